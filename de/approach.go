package de

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// approach finds the threshold on one grid: by runs that come ever closer to
// it from below, and by the necks of the tunnels that these show.
type approach struct {
	e     ensembles.Ensemble
	f     channel.Family
	grid  *density.Grid
	low   float64 // certain to succeed, or has succeeded
	high  float64 // cannot be exceeded, or has failed
	bound float64 // of the stability condition

	decoded float64 // the B at which a run ends without proof of success

	runs       []course // that succeeded, in order of parameter
	iterations int
	tunnel     float64   // where the first tunnel closes, predicted or by its neck
	estimate   float64   // of the threshold: there, or at the bound
	error      float64   // of tunnel
	critical   []closing // predictions, the first one first
	necks      []neck    // found, the first one first
}

const (
	// iterationCap ends a run. One that needs more is so close to the
	// threshold that its outcome may be taken for a failure.
	iterationCap = 200_000
	// remaining is the fraction of the predicted distance to the threshold
	// that is left after each run.
	remaining = 0.15
	// extrapolationGain is by how much an estimate is at least better than
	// the one before. The error of extrapolating a parabola goes with the
	// product of the distances of its three runs, each of which is left at
	// 0.15 of itself, so that it gains a factor of 300 in the end.
	extrapolationGain = 8
	// nearBound is how near the stability bound, relative to it, a run must
	// have come before the bound is taken for the threshold.
	nearBound = 2e-3
	// firstStride is how far the second run goes towards the guess, and
	// leastStart is the least distance of the first run from the guess,
	// relative to it.
	firstStride = 0.6
	leastStart  = 0.02
	// leastCapacity is the capacity below which nothing is tried where neither
	// the design rate nor stability bounds the threshold.
	leastCapacity = 1e-4
	// runCap ends an approach that does not settle.
	runCap = 60
)

// bracket sets low, where success is certain, high, which cannot be reached,
// and the stability bound. Where that settles the threshold it is low, and
// why says so.
func (a *approach) bracket(ctx context.Context) (why string, err error) {
	best, worst := a.f.Range()
	a.bound = StabilityOf(a.e, a.f, best).Bound
	a.low, a.high = best, min(a.bound, worst)
	if rate := a.e.DesignRate(); rate > 0 && rate < 1 {
		limit, err := a.f.Inverse(rate)
		if err != nil {
			a.high = best
			return fmt.Sprintf("the design rate, %.6g, is above the capacity of the best channel, %.6g", rate, a.f.Capacity(best)), nil
		}
		a.high = min(a.high, limit)
	} else if math.IsInf(a.high, 1) {
		if a.high, err = a.f.Inverse(leastCapacity); err != nil {
			return "", err
		}
	}
	// On the BEC the Bhattacharyya parameter is the erasure probability, and
	// no channel of the same parameter is worse: below is certain success.
	onBEC, err := ExactEngine{}.Threshold(ctx, a.e, channel.BEC{})
	if err != nil {
		return "", err
	}
	certain := channel.ParameterAtBhattacharyya(a.f, onBEC.Value)
	if a.f.Bhattacharyya(certain) > onBEC.Value {
		// Not even the best channel of the family is that good.
		c, err := evolve(ctx, a.e, a.grid, a.f, best, a.decoded)
		if err != nil {
			return "", err
		}
		if c.outcome != Converged {
			a.high = best
			return "decoding does not succeed on the best channel", nil
		}
	}
	if certain >= a.high && math.IsInf(min(a.bound, worst), 1) {
		return "", fmt.Errorf("there is no threshold: decoding succeeds down to a capacity of %g", leastCapacity)
	}
	a.low = min(certain, a.high)
	// Thresholds on different channels are at nearly the same capacity.
	a.estimate = a.low + (a.high-a.low)/2
	if onBEC.Value < 1 {
		if guess, err := a.f.Inverse(1 - onBEC.Value); err == nil {
			a.estimate = min(guess, a.high)
		}
	}
	return "", nil
}

// start returns how far below the guess to begin.
func (a *approach) start() float64 {
	return max((a.estimate-a.low)/4, leastStart*a.estimate)
}

// run evolves at one parameter and files the outcome.
func (a *approach) run(ctx context.Context, parameter float64) (bool, error) {
	c, err := evolve(ctx, a.e, a.grid, a.f, parameter, a.decoded)
	a.iterations += len(c.rate)
	if err != nil {
		return false, err
	}
	if c.outcome != Converged {
		a.high = min(a.high, parameter)
		return false, nil
	}
	at := len(a.runs)
	for at > 0 && a.runs[at-1].parameter > parameter {
		at--
	}
	a.runs = slices.Insert(a.runs, at, c)
	a.low = max(a.low, parameter)
	return true, nil
}

// find approaches the threshold until successive predictions agree within
// tolerance (of the parameter), beginning at the given distance below guess.
func (a *approach) find(ctx context.Context, guess, distance, tolerance float64) error {
	a.runs, a.tunnel = nil, math.NaN()
	next := guess - distance
	for range runCap {
		if a.high-a.low <= tolerance {
			a.tunnel, a.error = a.low+(a.high-a.low)/2, (a.high-a.low)/2
			a.estimate = a.tunnel
			return nil
		}
		ok, err := a.run(ctx, next)
		if err != nil {
			return err
		}
		n := len(a.runs)
		switch {
		case n == 0:
			distance *= 2
			next = max(next-distance, a.low+(next-a.low)/2)
			continue
		case n == 1 && ok:
			next = a.below(next + distance*firstStride)
			continue
		case n == 1:
			next = a.runs[0].parameter + (next-a.runs[0].parameter)/2
			continue
		}
		previous := a.tunnel
		a.predict()
		last := a.runs[n-1].parameter
		ahead := a.estimate - last
		if ok && n > 2 && a.settled(previous, tolerance) {
			return nil
		}
		if ok {
			next = a.below(last + ahead*(1-remaining))
		} else {
			next = last + min(ahead, a.high-last)/2
		}
	}
	return fmt.Errorf("no threshold found in %d runs: it lies between %v and %v", runCap, a.low, a.high)
}

// settled sets the error of the tunnel's closing, given the previous
// prediction of it, and tells whether that of the estimate is within the
// tolerance.
func (a *approach) settled(previous, tolerance float64) bool {
	a.error = math.Abs(a.tunnel-previous) / extrapolationGain
	if a.tunnel == previous {
		a.error = 0 // where both are infinite
	}
	switch {
	case a.estimate > a.high:
		// A run has failed below it.
		return false
	case a.tunnel-a.error > a.bound:
		return a.bound-a.runs[len(a.runs)-1].parameter < nearBound*a.bound
	}
	return a.error < tolerance
}

// below returns the parameter, or one below high if it is not.
func (a *approach) below(parameter float64) float64 {
	last := a.runs[len(a.runs)-1].parameter
	if parameter < a.high {
		return parameter
	}
	return last + (a.high-last)*(1-remaining)
}

// predict sets the estimate from the last runs.
func (a *approach) predict() {
	a.critical = closings(a.runs[max(0, len(a.runs)-3):])
	a.tunnel = math.Inf(1)
	if len(a.critical) > 0 {
		a.tunnel = a.critical[0].parameter
	}
	a.estimate = min(a.tunnel, a.bound)
}

// places lists the places where the tunnel closes at the threshold or little
// behind it.
func (a *approach) places() []Critical {
	all := []closing{{parameter: a.bound}}
	for _, n := range a.necks {
		all = append(all, closing{parameter: n.parameter, entropy: n.messages.Entropy()})
	}
	if len(a.necks) == 0 {
		all = append(all, a.critical...)
	}
	slices.SortStableFunc(all, func(x, y closing) int { return cmp.Compare(x.parameter, y.parameter) })
	var out []Critical
	for _, c := range all {
		if slack := c.parameter/all[0].parameter - 1; slack <= criticalSlack {
			out = append(out, Critical{Entropy: c.entropy, Slack: slack})
		}
	}
	return out
}

package de

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/ensembles"
)

// ErrUnreachable is wrapped by the error of Limited when the target is missed
// even on the best channel of the family.
var ErrUnreachable = errors.New("the target cannot be reached")

const (
	// limitedTolerance is the relative width of the bracket at which the
	// root finding of Limited ends, and gridTolerance that on a grid, whose
	// own error is larger.
	limitedTolerance = 1e-10
	gridTolerance    = 1e-7
	// leastError stands for bit error probabilities below it, down to 0,
	// whose logarithm would be -Inf.
	leastError = 1e-300
	// limitedSteps bounds the traces of one root finding: bisection alone
	// would need 34 for the tolerance and a few to find a bracket.
	limitedSteps = 200
)

const (
	// limitedPoints is the number of points of the finer of the two grids on
	// which Limited evolves quantised densities.
	limitedPoints = 1024
	// limitedGain is by how much the difference of the two is widened: small
	// error probabilities settle slowly, at first by less than half from one
	// grid to the next. TestLimitedUncertainty holds it against finer grids.
	limitedGain = 2
)

// Limited returns the largest channel parameter at which the bit error
// probability reaches the target in at most the given number of iterations,
// as the length goes to infinity: the threshold of a decoder that stops there.
// The target lies from 1e-30, where traces that converge end, to below 1/2, and
// iterations is at least 1. It is ErrUnreachable if the best channel fails.
//
// It works for any engine, on the law that the bit error probability after a
// number of iterations increases with the parameter (degradation; Richardson &
// Urbanke, IEEE Trans. Inf. Theory 47(2), 2001). Iterations of the result
// counts the evolution steps.
//
// Quantised densities are evolved on two grids, and the uncertainty covers
// their difference.
func Limited(ctx context.Context, engine Engine, e ensembles.Ensemble, f channel.Family, iterations int, target float64) (Threshold, error) {
	if iterations < 1 {
		return Threshold{}, fmt.Errorf("iterations %d: must be at least 1", iterations)
	}
	if !(target >= negligibleError && target < 0.5) {
		return Threshold{}, fmt.Errorf("target error %v: must be at least %g and below 0.5", target, negligibleError)
	}
	l := limit{engine: engine, e: e, f: f, iterations: iterations, target: target}
	q, quantized := engine.(QuantizedEngine)
	if !quantized {
		return l.threshold(ctx, math.NaN(), limitedTolerance)
	}
	q.tracePoints = limitedPoints / 2
	l.engine = q
	coarse, err := l.threshold(ctx, math.NaN(), gridTolerance)
	if err != nil {
		return coarse, err
	}
	q.tracePoints = limitedPoints
	l.engine = q
	fine, err := l.threshold(ctx, coarse.Value, gridTolerance)
	fine.Uncertainty += limitedGain*math.Abs(fine.Value-coarse.Value) + gridError(limitedPoints/2)*fine.Value
	return fine, err
}

// limit is the task of Limited by the traces of one engine: to find where
// attempts begin to miss.
type limit struct {
	engine     Engine
	e          ensembles.Ensemble
	f          channel.Family
	iterations int
	target     float64
	steps      int // of evolution, spent
}

// threshold finds it, near the guess, or NaN, to a tolerance relative to it.
func (l *limit) threshold(ctx context.Context, guess, tolerance float64) (Threshold, error) {
	low, high, err := l.bracketNear(ctx, guess)
	if err != nil {
		return Threshold{}, err
	}
	out := Threshold{Method: l.engine.Method(), Iterations: l.steps}
	switch {
	case !low.reached():
		return Threshold{}, fmt.Errorf("%w: bit error probability %.3g after %d iterations on the best channel, %s = %g; the target is %g",
			ErrUnreachable, l.target*math.Exp(low.excess), l.iterations, l.f.Parameter(), low.parameter, l.target)
	case high.reached():
		// The whole family reaches the target.
		out.Value = high.parameter
		return out, nil
	}
	if low, high, err = l.close(ctx, low, high, tolerance); err != nil {
		return Threshold{}, err
	}
	out.Iterations = l.steps
	out.Value, out.Uncertainty = low.parameter, high.parameter-low.parameter
	return out, nil
}

// attempt is what an evolution at one parameter says.
type attempt struct {
	parameter float64
	// excess is the logarithm of the bit error probability after the
	// iterations allowed, over the target: positive where it is missed.
	excess float64
	// needed is after how many iterations the target is reached, interpolated
	// in the logarithm of the probability; +Inf if that was not seen.
	needed float64
}

func (a attempt) reached() bool { return a.excess <= 0 }

// beyond is how many iterations more than allowed, relative to them, are tried
// to see how far a parameter misses.
const beyond = 0.25

// try evolves at a parameter.
func (l *limit) try(ctx context.Context, parameter float64) (attempt, error) {
	more := int(math.Ceil(beyond * float64(l.iterations)))
	trace, err := l.engine.Trace(ctx, l.e, l.f, parameter, l.iterations+more)
	if err != nil {
		return attempt{}, err
	}
	points := trace.Points
	excess := func(iteration int) float64 {
		p := points[min(iteration, len(points)-1)].BitErrorProbability
		return math.Log(math.Max(p, leastError) / l.target)
	}
	l.steps += points[len(points)-1].Iteration
	a := attempt{parameter: parameter, excess: excess(l.iterations), needed: math.Inf(1)}
	first := slices.IndexFunc(points, func(p Point) bool { return p.BitErrorProbability <= l.target })
	switch {
	case first == 0:
		a.needed = 0
	case first > 0:
		before, after := excess(first-1), excess(first)
		a.needed = float64(first-1) + before/(before-after)
	}
	return a, nil
}

// How far an attempt goes, of the distance to where low ends lead.
const (
	shortOf  = 0.85
	beyondIt = 1.5
)

// pace is a function of the iterations needed that is nearly linear in the
// parameter, since they grow like the inverse root of the distance from the
// threshold without a limit.
func (a attempt) pace() float64 { return 1 / ((1 + a.needed) * (1 + a.needed)) }

// close narrows the bracket to the tolerance, relative to the parameter, by
// the Illinois rule (Dowell & Jarratt, BIT 11, 1971), safeguarded by bisection:
// on the pace of decoding, and on the excess, which is smooth there, once the
// iterations needed at both ends are those allowed, but for one.
func (l *limit) close(ctx context.Context, low, high attempt, tolerance float64) (attempt, attempt, error) {
	allowed := attempt{needed: float64(l.iterations)}.pace()
	before := low // the low end before this one
	width := high.parameter - low.parameter
	lowShare, highShare, side := 1.0, 1.0, 0
	for step := 0; high.parameter-low.parameter > tolerance*high.parameter && step < limitedSteps; step++ {
		var middle float64
		if math.IsInf(high.needed, 1) {
			// How far the high end misses is unknown: on from the low ends,
			// now short of where they lead and now beyond it.
			share := beyondIt
			if side > 0 {
				share = shortOf
			}
			middle = low.parameter + share*(allowed-low.pace())*(low.parameter-before.parameter)/(low.pace()-before.pace())
		} else {
			atLow, atHigh := low.excess, high.excess
			if float64(l.iterations)-low.needed > 1 || high.needed-float64(l.iterations) > 1 {
				atLow, atHigh = allowed-low.pace(), allowed-high.pace()
			}
			atLow, atHigh = atLow*lowShare, atHigh*highShare
			middle = (low.parameter*atHigh - high.parameter*atLow) / (atHigh - atLow)
		}
		if !(middle >= low.parameter && middle <= high.parameter) {
			middle = low.parameter + (high.parameter-low.parameter)/2
		}
		// Every third step must have halved the bracket.
		if step%3 == 2 {
			if high.parameter-low.parameter > width/2 {
				middle, side, lowShare, highShare = low.parameter+(high.parameter-low.parameter)/2, 0, 1, 1
			}
			width = high.parameter - low.parameter
		}
		// Stay off the ends, so that both close in.
		margin := tolerance / 4 * high.parameter
		middle = math.Min(math.Max(middle, low.parameter+margin), high.parameter-margin)
		a, err := l.try(ctx, middle)
		if err != nil {
			return low, high, err
		}
		if a.reached() {
			if lowShare = 1; side < 0 {
				highShare /= 2
			}
			before, low, side = low, a, -1
		} else {
			if highShare = 1; side > 0 {
				lowShare /= 2
			}
			high, side = a, 1
		}
	}
	return low, high, nil
}

// bracketNear returns two parameters near the guess between which the target
// begins to be missed, if it finds such, or those of bracket.
func (l *limit) bracketNear(ctx context.Context, guess float64) (low, high attempt, err error) {
	best, worst := l.f.Range()
	if guess*(1-nearGuess) > best && guess*(1+nearGuess) < worst {
		if low, err = l.try(ctx, guess*(1-nearGuess)); err == nil && low.reached() {
			high, err = l.try(ctx, guess*(1+nearGuess))
		}
		if err != nil || low.reached() && !high.reached() {
			return low, high, err
		}
	}
	return l.bracket(ctx)
}

// nearGuess is how near to the value on one grid that on another is expected,
// relative to it.
const nearGuess = 1e-5

// bracket returns two parameters between which the target begins to be missed,
// as close as the Shannon limit tells; low is the best channel if that misses
// too, and equals high if the whole family reaches the target.
func (l *limit) bracket(ctx context.Context) (low, high attempt, err error) {
	best, worst := l.f.Range()
	start, err := l.f.Inverse(l.e.DesignRate())
	if err != nil { // no limit at this rate: anything inside the range will do
		start = 1
		if !math.IsInf(worst, 1) {
			start = best + (worst-best)/2
		}
	}
	if low, err = l.try(ctx, start); err != nil {
		return low, low, err
	}
	high = low
	for high.reached() && high.parameter < worst {
		low = high
		next := math.Min(worst, best+2*(high.parameter-best))
		if next > maxParameter {
			return low, low, nil
		}
		if high, err = l.try(ctx, next); err != nil {
			return low, high, err
		}
	}
	for !low.reached() && low.parameter > best {
		high = low
		next := best + (low.parameter-best)/2
		if next-best < minParameter {
			next = best
		}
		if low, err = l.try(ctx, next); err != nil {
			return low, high, err
		}
	}
	return low, high, nil
}

// Parameters above maxParameter count as the end of a family without one, and
// those within minParameter of the best as the best.
const (
	maxParameter = 1e6
	minParameter = 1e-6
)

package optimize

import (
	"context"
	"fmt"
	"math"
	"slices"
)

// Relaxation says what a little more freedom in a limit would gain.
type Relaxation struct {
	// Limit names the limit, as in Result.Binding.
	Limit string
	// To is what it is relaxed to, in words.
	To string
	// Gain is the growth of the threshold on the problem's first channel, as
	// a channel parameter. It is predicted from the linear programme of the
	// last round and not searched for, except for the number of iterations,
	// where it is that of the same ensemble, and for distinct degrees, where
	// it is that of the best found without the limit.
	Gain float64
}

const (
	// relaxRadius is the trust radius within which relaxing is tried.
	relaxRadius = 0.02
	// leastRelief is the gain, relative to the threshold, below which a limit
	// does not bind.
	leastRelief = 1e-5
	// The steps by which limits are relaxed, relative.
	moreEdges      = 1.05
	moreIterations = 1.1
	largerDegree   = 1.1
	lessMargin     = 0.01 // absolute
)

// relaxations tries each limit of the problem at the best ensemble.
func relaxations(ctx context.Context, p Problem, r *run) ([]Relaxation, error) {
	by, err := p.yardsticks(coarsePoints)
	if err != nil {
		return nil, err
	}
	f := refinement{problem: p, by: by, workers: r.settings.Workers, tolerance: coarseTolerance, free: true}
	at := &point{Ensemble: r.best.ensemble(), Degrees: r.best.degrees}
	if err := f.measure(ctx, at); err != nil {
		return nil, nil // nothing to linearise: the threshold is a bound's
	}
	more := moreVariable(p.VariableDegrees)
	variables := nearDegrees(at.Ensemble.Lambda, union(p.VariableDegrees, more))
	checks := nearChecks(at.Ensemble.Rho, nil, true)
	s, _, err := sense(ctx, at.Ensemble, at.readings, by, variables, checks, r.settings.Workers)
	if err != nil {
		return nil, err
	}
	// threshold predicts that on the first channel within changed limits.
	threshold := func(p Problem) (float64, proposal, bool) {
		lp := step{problem: p, e: at.Ensemble, readings: at.readings, by: by, sensitivity: s.only(p), radius: relaxRadius}
		next, ok, err := lp.solve()
		if err != nil || !ok {
			return 0, next, false
		}
		return next.thresholds[0], next, true
	}
	var out []Relaxation
	add := func(limit, to string, gain float64) {
		if gain > leastRelief*at.Thresholds[0] {
			out = append(out, Relaxation{limit, to, gain})
		}
	}
	now, _, ok := threshold(p)
	if !ok {
		return nil, nil
	}
	try := func(limit string, change func(p *Problem), to func(next proposal) string) {
		relaxed := p
		change(&relaxed)
		if then, next, ok := threshold(relaxed); ok {
			add(limit, to(next), then-now)
		}
	}
	fixed := func(text string, args ...any) func(proposal) string {
		return func(proposal) string { return fmt.Sprintf(text, args...) }
	}
	try(limitVariable, func(p *Problem) { p.VariableDegrees = union(p.VariableDegrees, more) }, func(next proposal) string {
		return "also " + listNew(degreesOf(next.ensemble.Lambda), p.VariableDegrees)
	})
	if p.CheckDegrees != nil {
		try(limitCheck, func(p *Problem) { p.CheckDegrees = nil }, func(next proposal) string {
			return "also " + listNew(degreesOf(next.ensemble.Rho), p.CheckDegrees)
		})
	}
	l := p.Limits
	if l.EdgesPerBit > 0 {
		try(limitEdges, func(p *Problem) { p.Limits.EdgesPerBit *= moreEdges }, fixed("%.4g", l.EdgesPerBit*moreEdges))
	}
	if l.DegreeTwoParity {
		try(limitParity, func(p *Problem) { p.Limits.DegreeTwoParity = false }, fixed("free"))
	}
	if l.StabilityMargin > 0 {
		less := max(0, l.StabilityMargin-lessMargin)
		try(limitStability, func(p *Problem) { p.Limits.StabilityMargin = less }, fixed("%.4g", less))
	}
	if l.Iterations > 0 {
		relaxed := p
		relaxed.Limits.Iterations = int(math.Ceil(moreIterations * float64(l.Iterations)))
		if by, err := relaxed.yardsticks(coarsePoints); err == nil {
			t := at.Thresholds[0]
			if reading, err := by[0].read(ctx, at.Ensemble, t, startBelow*t, coarseTolerance); err == nil {
				add(limitIterations, fmt.Sprint(relaxed.Limits.Iterations), reading.threshold-t)
			}
		}
	}
	if l.DistinctDegrees > 0 && r.unlimited > 0 {
		add(limitDistinct, "free", r.unlimited-at.Thresholds[0])
	}
	return out, nil
}

// limitIterations names the limit on iterations.
const limitIterations = "iterations"

// only returns the sensitivity to the degrees that the problem allows.
func (s sensitivity) only(p Problem) sensitivity {
	out := sensitivity{}
	var keep []int
	for i, d := range s.variables {
		if _, found := slices.BinarySearch(p.VariableDegrees, d); found {
			out.variables = append(out.variables, d)
			keep = append(keep, i)
		}
	}
	for i, d := range s.checks {
		if _, found := slices.BinarySearch(p.CheckDegrees, d); found || p.CheckDegrees == nil {
			out.checks = append(out.checks, d)
			keep = append(keep, len(s.variables)+i)
		}
	}
	keep = append(keep, len(s.variables)+len(s.checks))
	for _, rows := range s.slopes {
		var kept [][]float64
		for _, row := range rows {
			short := make([]float64, len(keep))
			for i, k := range keep {
				short[i] = row[k]
			}
			kept = append(kept, short)
		}
		out.slopes = append(out.slopes, kept)
	}
	return out
}

// moreVariable returns degrees that are not allowed: those missing below the
// largest, and one a tenth beyond it.
func moreVariable(allowed []int) []int {
	last := allowed[len(allowed)-1]
	var more []int
	for d := 2; d < last; d++ {
		if _, found := slices.BinarySearch(allowed, d); !found {
			more = append(more, d)
		}
	}
	return append(more, max(last+1, int(largerDegree*float64(last))))
}

func union(a, b []int) []int {
	return slices.Compact(slices.Sorted(slices.Values(slices.Concat(a, b))))
}

// listNew names the degrees in use that are not among the old ones.
func listNew(used, old []int) string {
	var fresh []int
	for _, d := range used {
		if _, found := slices.BinarySearch(old, d); !found {
			fresh = append(fresh, d)
		}
	}
	switch len(fresh) {
	case 0:
		return "others"
	case 1:
		return fmt.Sprintf("degree %d", fresh[0])
	}
	text := fmt.Sprintf("degrees %d", fresh[0])
	for _, d := range fresh[1:] {
		text += fmt.Sprintf(", %d", d)
	}
	return text
}

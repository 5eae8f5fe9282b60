package de

import (
	"context"
	"math"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// Course is an evolution that succeeded, as a search for better ensembles sees
// it: how fast the Bhattacharyya parameter B of the messages fell, at each
// depth -ln B. A tunnel is where it fell slowly.
type Course struct {
	// Parameter is that of the channel.
	Parameter float64
	course    course
}

// Follow evolves the ensemble on the grid at one channel parameter; ok is
// false if it does not succeed.
func Follow(ctx context.Context, e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter float64) (c Course, ok bool, err error) {
	inner, err := evolve(ctx, e, g, f, parameter, shallow)
	return Course{parameter, inner}, inner.outcome == Converged, err
}

// Iterations returns the number of evolution steps done.
func (c Course) Iterations() int { return len(c.course.rate) }

// Depths returns the depths of the iterations after the first few, at which
// the density has not yet forgotten its first shape, and before the last two,
// and the rate ln(B before/B after) of each.
func (c Course) Depths() (depths, rates []float64) {
	first, last := minSkip, len(c.course.depth)-2
	if last <= first {
		return nil, nil
	}
	return c.course.depth[first:last], c.course.rate[first:last]
}

// Rate interpolates the rate at a depth, NaN outside the course.
func (c Course) Rate(depth float64) float64 {
	rate, ok := c.course.rateAt(depth)
	if !ok {
		return math.NaN()
	}
	return rate
}

// Approach finds the threshold on one grid, to the tolerance given as a channel
// parameter, from runs that come closer to it from below, the first at the
// given distance below guess; both 0 for none. It returns the courses of the
// runs in increasing order of parameter. Its estimate is predicted from these,
// without the fixed points by which QuantizedEngine finds it.
func Approach(ctx context.Context, e ensembles.Ensemble, g *density.Grid, f channel.Family, guess, distance, tolerance float64) (threshold float64, courses []Course, err error) {
	a := approach{e: e, f: f, grid: g, decoded: shallow}
	if _, err := a.bracket(ctx); err != nil {
		return 0, nil, err
	}
	if a.high <= a.low {
		return a.high, nil, nil
	}
	if guess == 0 {
		guess, distance = a.estimate, a.start()
	}
	if err := a.find(ctx, guess, distance, tolerance); err != nil {
		return 0, nil, err
	}
	for _, c := range a.runs {
		courses = append(courses, Course{c.parameter, c})
	}
	return a.estimate, courses, nil
}

// BitErrorAfter returns the bit error probability after the given number of
// iterations, at least 1.
func BitErrorAfter(e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter float64, iterations int) float64 {
	v := NewEvolution(e, g, f.Density(parameter))
	for range iterations {
		v.Step()
	}
	return max(v.DecisionError(), 0)
}

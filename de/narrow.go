package de

import (
	"cmp"
	"context"
	"math"
	"slices"

	"tannery/de/density"
)

const (
	// roughTolerance is the relative error of predictions good enough for
	// the necks to be found from there.
	roughTolerance = 1e-3
	// nearEnough is how near the threshold, relative to it, the last run must
	// have come, so that no tunnel that closes before it is overlooked: some
	// show only a few thousandths before they close.
	nearEnough = 1.5e-3
	// watched is how far ahead tunnels are looked at, in distances from the
	// last run to the threshold.
	watched = 2
	// sameDepth is how far apart in ln B predictions of one tunnel may be.
	sameDepth = 0.1
	// sameNeck is how far apart in ln B one neck may be found.
	sameNeck = 1e-3
	// keptSlack is the relative distance behind the first tunnel up to which
	// others are followed to finer grids, where they may come first.
	keptSlack = 1e-3
)

// locate finds the threshold on the first grid, by the necks of its tunnels;
// where there are none, by runs alone, to the tolerance.
func (a *approach) locate(ctx context.Context, tolerance float64) error {
	bracketed := *a
	if err := a.find(ctx, a.estimate, a.start(), roughTolerance*a.estimate); err != nil {
		return err
	}
	if len(a.runs) > 2 {
		if ok, err := a.narrow(ctx); ok || err != nil {
			return err
		}
	}
	bracketed.iterations = a.iterations
	*a = bracketed
	// That two predictions agree may be an accident.
	err := a.find(ctx, a.estimate, a.start(), tolerance/extrapolationGain)
	a.error *= extrapolationGain
	return err
}

// narrow replaces the predictions of where tunnels close by their necks, for
// all near the threshold. It returns false if that does not settle it.
func (a *approach) narrow(ctx context.Context) (bool, error) {
	var tried []closing
	for range runCap {
		last := a.runs[len(a.runs)-1].parameter
		ahead := a.estimate + watched*(a.estimate-last)
		var candidates []closing
		for _, c := range a.critical {
			known := func(k closing) bool { return math.Abs(k.depth-c.depth) < sameDepth }
			if c.parameter <= max(ahead, a.estimate*(1+criticalSlack)) && !slices.ContainsFunc(tried, known) {
				candidates = append(candidates, c)
			}
		}
		tried = append(tried, candidates...)
		if ok, err := a.squeeze(ctx, last, ahead, candidates); !ok || err != nil {
			return false, err
		}
		a.settleOn(a.necks)
		switch {
		case a.estimate-last > nearEnough*a.estimate:
			ok, err := a.run(ctx, a.estimate-remaining*(a.estimate-last))
			if !ok || err != nil {
				return false, err
			}
			a.critical = closings(a.runs[len(a.runs)-3:])
		case len(candidates) == 0:
			return len(a.necks) > 0 || a.bound-last < nearBound*a.bound, nil
		}
	}
	return false, nil
}

// squeeze finds the necks near the candidates from an evolution at a parameter
// below them. It returns false if one has none that is predicted to close
// before ahead.
func (a *approach) squeeze(ctx context.Context, parameter, ahead float64, candidates []closing) (bool, error) {
	slices.SortStableFunc(candidates, func(x, y closing) int { return cmp.Compare(x.depth, y.depth) })
	v := NewEvolution(a.e, a.grid, a.f.Density(parameter))
	points := newFixedPoints(a.e, a.grid, a.f, parameter)
	defer func() { a.iterations += points.iterations }()
	for _, c := range candidates {
		for v.Messages.Bhattacharyya() > math.Exp(-c.depth) {
			if err := ctx.Err(); err != nil {
				return false, err
			}
			v.Step()
			a.iterations++
		}
		if n, ok := points.neck(v.Messages, wideSpan, strideError); ok && n.parameter > parameter {
			same := func(k neck) bool { return math.Abs(k.log-n.log) < sameNeck }
			if !slices.ContainsFunc(a.necks, same) {
				a.necks = append(a.necks, n)
			}
		} else if c.parameter <= ahead {
			return false, nil
		}
	}
	return true, nil
}

// refine finds the threshold again on a grid that is twice as fine. It returns
// false if only runs can tell it.
func (a *approach) refine(grid *density.Grid) bool {
	a.grid = grid
	if len(a.necks) == 0 {
		return math.IsInf(a.tunnel, 1) // stability decides, on every grid
	}
	points := newFixedPoints(a.e, grid, a.f, a.tunnel)
	defer func() { a.iterations += points.iterations }()
	var necks []neck
	for _, c := range a.necks {
		n := c
		if c.parameter <= a.tunnel*(1+keptSlack) {
			var ok bool
			if n, ok = points.neck(grid.Refine(c.messages), narrowSpan, neckTolerance); !ok {
				return false
			}
		}
		necks = append(necks, n)
	}
	a.settleOn(necks)
	return true
}

// settleOn takes the threshold from the necks.
func (a *approach) settleOn(necks []neck) {
	slices.SortStableFunc(necks, func(x, y neck) int { return cmp.Compare(x.parameter, y.parameter) })
	a.necks = necks
	a.tunnel, a.error = math.Inf(1), 0
	if len(necks) > 0 {
		a.tunnel, a.error = necks[0].parameter, necks[0].error
	}
	a.estimate = min(a.tunnel, a.bound)
}

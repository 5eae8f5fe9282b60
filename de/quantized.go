package de

import (
	"context"
	"fmt"
	"math"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// QuantizedEngine finds thresholds by evolving quantised message densities,
// on any channel family. The zero value works.
type QuantizedEngine struct {
	// Tolerance is the uncertainty to reach, relative to the threshold;
	// 0 means DefaultTolerance. Finer grids are taken until it is reached
	// or the grid has 4096 points.
	Tolerance float64

	tracePoints int // of the grid of traces; 0 for the constant of that name
}

var _ Engine = QuantizedEngine{}

const (
	// DefaultTolerance is the relative uncertainty of QuantizedEngine.
	DefaultTolerance = 2e-6
	// coarsestPoints and finestPoints are the numbers of points of the first
	// and the last grid tried.
	coarsestPoints = 128
	finestPoints   = 4096
)

// Method returns Quantized.
func (QuantizedEngine) Method() Method { return Quantized }

// Threshold evolves the ensemble on grids of doubling fineness, on each of
// which the threshold is extrapolated from runs below it (see closing.go),
// until the thresholds of two grids agree.
func (q QuantizedEngine) Threshold(ctx context.Context, e ensembles.Ensemble, f channel.Family) (Threshold, error) {
	t := Threshold{Method: Quantized}
	best, _ := f.Range()
	if e.Lambda.Fraction(1) > 0 {
		t.Value, t.Warnings = best, []string{degreeOneWarning}
		return t, nil
	}
	tolerance := q.Tolerance
	if tolerance == 0 {
		tolerance = DefaultTolerance
	}
	grid, err := density.NewGrid(coarsestPoints)
	if err != nil {
		return t, err
	}
	a := approach{e: e, f: f, grid: grid}
	switch why, err := a.bracket(ctx); {
	case err != nil:
		return t, err
	case why != "":
		t.Value, t.Warnings = best, []string{why}
		return t, nil
	case a.high <= a.low:
		// Certain success and certain failure meet: cycle codes, say, whose
		// stability bound is that of the Bhattacharyya recursion.
		t.Value, t.Critical = a.high, []Critical{{}}
		return t, nil
	}
	exactGrid := f.Name() == bec
	if exactGrid {
		// Masses at 0 and at infinity have nodes of their own, so that the
		// grid makes no error and more can be asked of the approach.
		tolerance = min(tolerance, becTolerance)
	}
	absolute := tolerance * a.estimate / 4
	bracketed := a
	for points := coarsestPoints; ; points *= 2 {
		coarse := a
		a = bracketed
		if a.grid, err = density.NewGrid(points); err != nil {
			return t, err
		}
		found := false
		if len(coarse.runs) >= 3 {
			found, err = a.transfer(ctx, &coarse, absolute)
		}
		if !found && err == nil {
			err = a.find(ctx, a.estimate, a.start(), absolute)
		}
		t.Iterations += a.iterations
		if err != nil {
			return t, err
		}
		t.Value = a.estimate
		t.Uncertainty = a.error
		if !exactGrid {
			t.Uncertainty += math.Abs(a.estimate-coarse.estimate)/gridGain + gridError(points)*a.estimate
		}
		// Where the stability bound comes first, only what may bring the
		// tunnel's closing below it counts.
		t.Uncertainty = max(t.Uncertainty-(a.tunnel-a.estimate), 0)
		t.Critical = a.places()
		if (points > coarsestPoints || exactGrid) && t.Uncertainty <= tolerance*t.Value {
			return t, nil
		}
		if points == finestPoints {
			t.Warnings = append(t.Warnings, fmt.Sprintf("the uncertainty asked for, %.2g, was not reached on the finest grid", tolerance*t.Value))
			return t, nil
		}
	}
}

// becTolerance is the tolerance on the BEC.
const becTolerance = 2e-9

// gridGain is by how much the error of a grid is at least smaller than its
// difference from the grid half as fine. Fourth order would make it 15.
const gridGain = 3

// gridError is the relative error of a grid that its difference from the grid
// half as fine may be lacking, since errors of the coarser one may cancel by
// accident: twice the largest found where the differences were small. To this
// comes what wraps around under the damping, which is the same on all grids.
// TestThresholdUncertainty holds it against finer grids.
func gridError(points int) float64 {
	ratio := 256 / float64(points)
	return 7e-7*ratio*ratio*ratio*ratio + 3e-8
}

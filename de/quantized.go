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
	DefaultTolerance = 1e-6
	// coarsestPoints and finestPoints are the numbers of points of the first
	// and the last grid tried.
	coarsestPoints = 128
	finestPoints   = 4096
)

// Method returns Quantized.
func (QuantizedEngine) Method() Method { return Quantized }

// Threshold finds the tunnels on a coarse grid by evolutions below the
// threshold (see closing.go), then the fixed points at which they close (see
// neck.go), and these again on grids of doubling fineness until the thresholds
// of two grids agree.
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
	a := approach{e: e, f: f, grid: grid, decoded: deep}
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
		// grid makes no error.
		tolerance = min(tolerance, becTolerance)
	}
	bracketed := a
	if err := a.locate(ctx, tolerance*a.estimate/4); err != nil {
		return t, err
	}
	for points := coarsestPoints; ; {
		t.Value, t.Iterations, t.Critical = a.estimate, a.iterations, a.places()
		if exactGrid {
			t.Uncertainty = a.error
			return t, nil
		}
		if points == finestPoints {
			t.Warnings = append(t.Warnings, fmt.Sprintf("the uncertainty asked for, %.2g, was not reached on the finest grid", tolerance*t.Value))
			return t, nil
		}
		points *= 2
		if grid, err = density.NewGrid(points); err != nil {
			return t, err
		}
		coarse := a.estimate
		if !a.refine(grid) || math.Abs(a.estimate-coarse) > keptSlack/2*coarse {
			// Or so far away that other tunnels may come first.
			bracketed.grid, bracketed.estimate, bracketed.iterations = grid, a.estimate, a.iterations
			a = bracketed
			if err := a.locate(ctx, tolerance*a.estimate/4); err != nil {
				return t, err
			}
		}
		t.Uncertainty = a.error + math.Abs(a.estimate-coarse)/gridGain + gridError(points)*a.estimate
		// Where the stability bound comes first, only what may bring the
		// tunnel's closing below it counts.
		t.Uncertainty = max(t.Uncertainty-(a.tunnel-a.estimate), 0)
		if t.Uncertainty <= tolerance*t.Value {
			t.Value, t.Iterations, t.Critical = a.estimate, a.iterations, a.places()
			return t, nil
		}
	}
}

// becTolerance is the tolerance on the BEC.
const becTolerance = 2e-9

// gridGain is by how much the error of a grid is at least smaller than its
// difference from the grid half as fine. Sixth order would make it 63.
const gridGain = 8

// gridError is the relative error of a grid that its difference from the grid
// half as fine may be lacking: errors of the coarser one may cancel by
// accident, and those of the shape, such as what wraps around under the
// damping, are the same on all grids. Both are twice the largest found, against
// a longer and finer grid: TestThresholdUncertainty.
func gridError(points int) float64 {
	return 1.5e-6*math.Pow(256/float64(points), 6) + 1.5e-7
}

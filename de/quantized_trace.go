package de

import (
	"cmp"
	"context"
	"slices"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

const (
	// tracePoints is the number of points of the grid that traces use: their
	// error is below 1e-6 of the values.
	tracePoints = 512
	// leastTraced is the bit error probability at which a trace that is
	// known to converge ends: smaller ones are lost in rounding.
	leastTraced = 1e-15
	// leastClear is the Bhattacharyya parameter below which rounding is seen
	// in the progress of an iteration.
	leastClear = 1e-6
)

// Trace evolves the ensemble step by step.
func (q QuantizedEngine) Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error) {
	if err := checkParameter(f, parameter); err != nil {
		return Trace{}, err
	}
	grid, err := density.NewGrid(cmp.Or(q.tracePoints, tracePoints))
	if err != nil {
		return Trace{}, err
	}
	t := Trace{Method: Quantized, Parameter: parameter, Outcome: Exhausted}
	certain := certainBelow(e, f.Bhattacharyya(parameter))
	v := NewEvolution(e, grid, f.Density(parameter))
	bit := v.Messages.ErrorProbability()
	var c course
	for i := 0; ; i++ {
		if err := ctx.Err(); err != nil {
			return Trace{}, err
		}
		// Rounding may take what is almost zero below it.
		p := Point{
			Iteration:           i,
			ErrorProbability:    max(v.Messages.ErrorProbability(), 0),
			Entropy:             max(v.Messages.Entropy(), 0),
			Bhattacharyya:       max(v.Messages.Bhattacharyya(), 0),
			BitErrorProbability: max(bit, 0),
		}
		v.Step()
		p.CheckEntropy = max(v.Checks.Entropy(), 0)
		t.Points = append(t.Points, p)
		if p.BitErrorProbability <= leastTraced && p.Bhattacharyya < certain {
			t.Outcome = Converged
			break
		}
		next := v.Messages.Bhattacharyya()
		c.note(p.Bhattacharyya, next)
		if c.stalled() || !(next < p.Bhattacharyya) {
			t.Outcome = Stalled
			if p.Bhattacharyya < certain { // only rounding is in the way
				t.Outcome = Converged
			}
			break
		}
		if i == iterations {
			break
		}
		bit = v.DecisionError()
	}
	clear := slices.IndexFunc(t.Points, func(p Point) bool { return p.Bhattacharyya < leastClear })
	if clear < 0 {
		clear = len(t.Points)
	}
	t.Narrowest = narrowest(t.Points[:clear])
	return t, nil
}

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
	// tracePoints is the number of points of the grid that traces use. Near
	// a threshold their values are off by about 1e-6 of themselves; error
	// probabilities of ensembles with variable nodes of degree 2 by 1e-5 at
	// 1e-6 and by some hundredths at 1e-12.
	tracePoints = 1024
	// leastClear is the Bhattacharyya parameter below which rounding is seen
	// in the progress of an iteration.
	leastClear = 1e-6
	// leastFollowed is the Bhattacharyya parameter at which a trace that is
	// known to converge ends in any case: rounding is as large.
	leastFollowed = 1e-16
)

// Trace evolves the ensemble step by step.
func (q QuantizedEngine) Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error) {
	if err := checkParameter(f, parameter); err != nil {
		return Trace{}, err
	}
	grid, err := density.NewLongGrid(cmp.Or(q.tracePoints, tracePoints))
	if err != nil {
		return Trace{}, err
	}
	t := Trace{Method: Quantized, Parameter: parameter, Outcome: Exhausted}
	certain := certainBelow(e, f.Bhattacharyya(parameter))
	v := NewEvolution(e, grid, f.Density(parameter))
	bit := f.ErrorProbability(parameter)
	messages := bit
	var c course
	for i := 0; ; i++ {
		if err := ctx.Err(); err != nil {
			return Trace{}, err
		}
		// Rounding may take what is almost zero below it.
		p := Point{
			Iteration:           i,
			ErrorProbability:    max(messages, 0),
			Entropy:             max(v.Messages.Entropy(), 0),
			Bhattacharyya:       max(v.Messages.Bhattacharyya(), 0),
			BitErrorProbability: max(bit, 0),
		}
		v.Step()
		p.CheckEntropy = max(v.Checks.Entropy(), 0)
		t.Points = append(t.Points, p)
		next := v.Messages.Bhattacharyya()
		if p.Bhattacharyya < certain {
			if p.BitErrorProbability <= negligibleError || p.Bhattacharyya <= leastFollowed {
				t.Outcome = Converged
				break
			}
		} else {
			c.note(p.Bhattacharyya, next)
			if c.stalled() || !(next < p.Bhattacharyya) {
				t.Outcome = Stalled
				break
			}
		}
		if i == iterations {
			break
		}
		messages, bit = v.Messages.ErrorProbability(), v.DecisionError()
	}
	clear := slices.IndexFunc(t.Points, func(p Point) bool { return p.Bhattacharyya < leastClear })
	if clear < 0 {
		clear = len(t.Points)
	}
	t.Narrowest = narrowest(t.Points[:clear])
	return t, nil
}

package optimize

import (
	"context"

	"tannery/de"
	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// QuantizedDesign searches on any channel, judged by density evolution with
// quantised message densities. Starts from BEC designs are refined by
// sequential linear programming over λ, ρ and the channel parameter, on a
// coarse grid first (see refinement); where the number of distinct variable
// degrees is limited, sets of degrees are searched; the best is refined on a
// fine grid. The zero value works.
type QuantizedDesign struct{}

var _ Method = QuantizedDesign{}

// Name returns "quantized design".
func (QuantizedDesign) Name() string { return "quantized design" }

func (QuantizedDesign) check(Problem) error { return nil }

// The grids, and what settles a point on each: the gain of a round in rate.
const (
	coarsePoints, coarseTolerance, coarseGain = 128, 3e-6, 2e-6
	finePoints, fineTolerance, fineGain       = 256, 1e-6, 1e-6
)

// channels returns the channel of the problem and the others that count.
func (p Problem) channels() []channel.Family {
	return append([]channel.Family{p.Channel}, p.Also...)
}

// yardsticks returns one for each channel, on a grid.
func (p Problem) yardsticks(points int) ([]yardstick, error) {
	grid, err := density.NewGrid(points)
	if err != nil {
		return nil, err
	}
	var by []yardstick
	for _, f := range p.channels() {
		if n := p.Limits.Iterations; n > 0 {
			by = append(by, deadlineYardstick{f, grid, n, p.targetError()})
		} else {
			by = append(by, tunnelYardstick{f, grid})
		}
	}
	return by, nil
}

func (q QuantizedDesign) search(ctx context.Context, p Problem, r *run) error {
	j := &journey{Format: journeyFormat, Problem: p.digest(r.settings.Seed)}
	if saved := r.settings.Resume; saved != nil {
		if err := j.restore(saved, p); err != nil {
			return err
		}
		r.stats.Evaluations, r.stats.Programmes = j.Evolved, j.Solved
		r.unlimited = j.Unlimited
		j.adopt(p, r, j.Best)
		for _, at := range j.Points {
			j.adopt(p, r, at)
		}
	}
	for j.Phase != arrived {
		r.enter(phaseNames[j.Phase])
		if err := j.advance(ctx, p, r); err != nil {
			return err
		}
		if ctx.Err() != nil || r.spent() {
			return nil
		}
	}
	return nil
}

// finish measures the best by the engine, and what its limits cost.
func (QuantizedDesign) finish(p Problem, r *run) (Result, error) {
	best := r.best.ensemble()
	out := Result{Ensemble: best}
	for _, f := range p.channels() {
		t, err := p.measure(best, f)
		if err != nil {
			return Result{}, err
		}
		out.Thresholds = append(out.Thresholds, t)
	}
	out.Threshold = out.Thresholds[0]
	var err error
	if out.Relaxations, err = relaxations(context.Background(), p, r); err != nil {
		return Result{}, err
	}
	for _, x := range out.Relaxations {
		out.Binding = append(out.Binding, x.Limit)
	}
	return out, nil
}

// measure finds the threshold, within the iterations allowed.
func (p Problem) measure(e ensembles.Ensemble, f channel.Family) (de.Threshold, error) {
	ctx := context.Background() // the budget is spent, but the best must be made whole
	if p.Limits.Iterations > 0 {
		return de.Limited(ctx, de.QuantizedEngine{}, e, f, p.Limits.Iterations, p.targetError())
	}
	return de.QuantizedEngine{}.Threshold(ctx, e, f)
}

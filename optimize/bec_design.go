package optimize

import (
	"context"
	"fmt"

	"tannery/de"
	"tannery/ensembles"
)

// BECDesign searches on the BEC: for each ρ the best λ is one linear
// programme, of which the dual solution certifies that it is the best. The
// zero value works.
type BECDesign struct{}

var _ Method = BECDesign{}

// Name returns "erasure design".
func (BECDesign) Name() string { return "erasure design" }

func (b BECDesign) check(p Problem) error {
	if name := p.Channel.Name(); name != "bec" {
		return fmt.Errorf("channel %s: %s works on bec: %w", name, b.Name(), ErrUnsupported)
	}
	return checkDesign(b, p)
}

// checkDesign refuses the limits that linear programmes for an infinite number
// of iterations cannot know.
func checkDesign(m Method, p Problem) error {
	if p.Limits.Iterations > 0 {
		return fmt.Errorf("iterations %d: %s finds the threshold for unlimited iterations: %w", p.Limits.Iterations, m.Name(), ErrUnsupported)
	}
	if len(p.Also) > 0 {
		return fmt.Errorf("several channels: %s works on one: %w", m.Name(), ErrUnsupported)
	}
	return nil
}

func (BECDesign) search(ctx context.Context, p Problem, r *run) error {
	return searchChecks(ctx, p, r, newErasureDesigner(p))
}

// erasureDesigner finds the best λ for a ρ on the BEC.
type erasureDesigner struct {
	p      Problem
	powers *erasurePowers
}

func newErasureDesigner(p Problem) erasureDesigner {
	return erasureDesigner{p, newErasurePowers(p.VariableDegrees[len(p.VariableDegrees)-1])}
}

func (e erasureDesigner) design(rho ensembles.Distribution, degrees []int) *design {
	d := &design{
		tunnel:  &erasureTunnel{rho: rho, powers: e.powers},
		degrees: degrees,
		c:       rho.Integral() / (1 - e.p.Rate),
	}
	margin := e.p.Limits.StabilityMargin
	if degrees[0] == 2 {
		stability := degreeTwo{
			factor:  rho.Derivative(1) / (1 - margin),
			byCheck: func(j int) float64 { return float64(j-1) / (1 - margin) },
		}
		if margin > 0 {
			stability.limit = limitStability
		}
		d.two = append(d.two, stability)
		d.two = append(d.two, parityRow(e.p, rho)...)
	}
	return d
}

func (e erasureDesigner) best(ctx context.Context, rho ensembles.Distribution, degrees []int, near *candidate) (*candidate, error) {
	var start working
	if near != nil {
		start = near.working
	}
	o, err := e.design(rho, degrees).solve(ctx, start)
	if err != nil {
		return nil, err
	}
	return &candidate{rho: rho, degrees: degrees, value: min(1/o.t, 1), optimum: o}, nil
}

func (e erasureDesigner) at(c *candidate) *design { return e.design(c.rho, c.degrees) }

func (erasureDesigner) free() bool { return true }

// finish measures the best by the exact engine. Should that find a point that
// the grid of the search has missed, the point is added and λ found again.
func (BECDesign) finish(p Problem, r *run) (Result, error) {
	e := newErasureDesigner(p)
	// The budget is spent, but what was found must be made whole.
	ctx := context.Background()
	best, err := tidy(ctx, e, r.best)
	if err != nil {
		return Result{}, err
	}
	d := e.at(best)
	var threshold de.Threshold
	const repairs = 5
	for range repairs {
		if threshold, err = (de.ExactEngine{}).Threshold(ctx, best.ensemble(), p.Channel); err != nil {
			return Result{}, err
		}
		if threshold.Value >= best.value*(1-10*exchangeTolerance) {
			break
		}
		start := best.working
		for _, c := range threshold.Critical {
			if y := erasureY(best.rho, c.Entropy); c.Entropy > 0 && y > 0 && y < 1 {
				start.points = append(start.points, logit(y))
			}
		}
		o, err := d.solve(ctx, start)
		if err != nil {
			return Result{}, err
		}
		best = &candidate{rho: best.rho, degrees: best.degrees, value: min(1/o.t, 1), optimum: o}
	}
	result := Result{Ensemble: best.ensemble(), Threshold: withMargin(threshold, best.ensemble(), p)}
	free := best
	if len(best.degrees) < len(p.VariableDegrees) {
		if free, err = e.best(ctx, best.rho, p.VariableDegrees, best); err != nil {
			return Result{}, err
		}
	}
	if result.Certificate, err = certify(p, e.at(free), free.rho, free.optimum); err != nil {
		return Result{}, err
	}
	result.Binding = binding(p, e, best, free)
	return result, nil
}

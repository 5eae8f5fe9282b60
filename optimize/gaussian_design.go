package optimize

import (
	"context"
	"errors"
	"fmt"
	"math"

	"tannery/de"
	"tannery/ensembles"
)

// GaussianDesign searches on the BI-AWGN channel by the Gaussian
// approximation: for each ρ and σ the best λ is a linear programme, and the
// largest σ at which it opens the tunnel is found by Newton's method. The true
// stability condition holds at the threshold. ρ is on two neighbouring check
// degrees, as in the paper: see gaussianDesigner.free. Even so the
// approximation may exceed the Shannon limit at rates below a tenth, where many
// checks have degree 2; the threshold then carries a warning. The zero value
// works.
type GaussianDesign struct{}

var _ Method = GaussianDesign{}

// Name returns "Gaussian design".
func (GaussianDesign) Name() string { return "Gaussian design" }

func (g GaussianDesign) check(p Problem) error {
	if name := p.Channel.Name(); name != "biawgn" {
		return fmt.Errorf("channel %s: %s works on biawgn: %w", name, g.Name(), ErrUnsupported)
	}
	return checkDesign(g, p)
}

func (GaussianDesign) search(ctx context.Context, p Problem, r *run) error {
	return searchChecks(ctx, p, r, newGaussianDesigner(p, r.limit))
}

// finish measures the best by the Gaussian approximation.
func (GaussianDesign) finish(p Problem, r *run) (Result, error) {
	ctx := context.Background()
	g := newGaussianDesigner(p, r.limit)
	best, err := tidy(ctx, g, r.best)
	if err != nil {
		return Result{}, err
	}
	threshold, err := (de.GaussianEngine{}).Threshold(ctx, best.ensemble(), p.Channel)
	if err != nil {
		return Result{}, err
	}
	threshold = withMargin(threshold, best.ensemble(), p)
	if threshold.Value > r.limit {
		threshold.Warnings = append(threshold.Warnings, "above the Shannon limit: the Gaussian approximation does not hold for this ensemble")
	}
	free := best
	if len(best.degrees) < len(p.VariableDegrees) {
		if free, err = g.best(ctx, best.rho, p.VariableDegrees, best); err != nil {
			return Result{}, err
		}
	}
	return Result{Ensemble: best.ensemble(), Threshold: threshold, Binding: binding(p, g, best, free)}, nil
}

// gaussianDesigner finds the best λ for a ρ by the Gaussian approximation.
type gaussianDesigner struct {
	p      Problem
	limit  float64 // mean LLR at the Shannon limit
	checks *gaussianChecks
}

func newGaussianDesigner(p Problem, sigma float64) gaussianDesigner {
	limit := meanOf(sigma)
	return gaussianDesigner{p, limit, newGaussianChecks(limit * gaussianBelow)}
}

// meanOf returns the mean LLR s = 2/σ² of the channel.
func meanOf(sigma float64) float64 { return 2 / (sigma * sigma) }

// design is the programme at mean LLR s.
func (g gaussianDesigner) design(rho ensembles.Distribution, degrees []int, s float64) *design {
	d := &design{
		tunnel:  &gaussianTunnel{rho: rho, s: s, checks: g.checks},
		degrees: degrees,
		c:       rho.Integral() / (1 - g.p.Rate),
	}
	if degrees[0] == 2 {
		margin := g.p.Limits.StabilityMargin
		b := math.Exp(-s/4) / (1 - margin)
		stability := degreeTwo{
			factor:  rho.Derivative(1) * b,
			byCheck: func(j int) float64 { return float64(j-1) * b },
			byMean:  -rho.Derivative(1) * b / 4,
		}
		if margin > 0 {
			stability.limit = limitStability
		}
		d.two = append(append(d.two, stability), parityRow(g.p, rho)...)
	}
	return d
}

func (g gaussianDesigner) at(c *candidate) *design {
	return g.design(c.rho, c.degrees, meanOf(c.value))
}

// free is false: the approximation takes the messages from checks of all
// degrees for one normal distribution with their mean mean, which is generous
// to mixtures of far-apart degrees. Left free, ρ drifts to such mixtures, and
// thresholds beyond the Shannon limit (σ = 1.088 against .979 at rate 1/2 and
// largest variable degree 15).
func (gaussianDesigner) free() bool { return false }

const (
	// rootSteps bounds the steps for s; four are usual.
	rootSteps = 40
	// rootTolerance is how near to 0 ln t must come: a few times what the
	// linear programme leaves.
	rootTolerance = 1e-10
	// firstGap is the relative distance of σ from the Shannon limit to start
	// with where nothing better is known.
	firstGap = 0.03
	// largestStep is the largest factor by which s may change in a step.
	largestStep = 1.5
)

// best finds the s at which the least t is 1. t falls with s, and Newton's
// method on ln t converges from either side.
func (g gaussianDesigner) best(ctx context.Context, rho ensembles.Distribution, degrees []int, near *candidate) (*candidate, error) {
	s := g.limit / (1 - firstGap) / (1 - firstGap)
	var start working
	if near != nil {
		s, start = meanOf(near.value), near.working
	}
	programmes, pivots := 0, 0
	for range rootSteps {
		d := g.design(rho, degrees, s)
		o, err := d.solve(ctx, start)
		if err != nil {
			return nil, err
		}
		programmes, pivots = programmes+o.programmes, pivots+o.pivots
		start = o.working
		if math.Abs(math.Log(o.t)) < rootTolerance {
			o.programmes, o.pivots = programmes, pivots
			return &candidate{rho: rho, degrees: degrees, value: math.Sqrt(2 / s), optimum: o}, nil
		}
		slope := g.byMean(d, o)
		step := largestStep
		if slope < 0 {
			step = math.Exp(math.Log(o.t) * o.t / -slope / s)
		} else if o.t < 1 {
			step = 1 / largestStep
		}
		s *= min(max(step, 1/largestStep), largestStep)
		if s < g.limit*gaussianBelow {
			return nil, fmt.Errorf("the approximation converges far beyond the Shannon limit: %w", ErrUnreachable)
		}
	}
	return nil, errNoRoot
}

// errNoRoot is returned should Newton's method fail.
var errNoRoot = errors.New("the noise at which the tunnel opens was not found")

// byMean returns dt/ds at an optimum, by the envelope theorem.
func (g gaussianDesigner) byMean(d *design, o optimum) float64 {
	t := d.tunnel.(*gaussianTunnel)
	slope := 0.
	for k, p := range o.points {
		slope += o.weights[k] * t.byMean(p, o.lambda)
	}
	for i, row := range d.two {
		slope += o.two[i] * row.byMean * o.lambda.Fraction(2)
	}
	return slope
}

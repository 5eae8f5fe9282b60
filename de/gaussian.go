package de

import (
	"context"
	"fmt"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/ensembles"
)

// GaussianEngine analyses the BI-AWGN channel by the Gaussian approximation
// (Chung, Richardson & Urbanke, IEEE Trans. Inf. Theory 47(2), 2001) with the
// exact φ: the messages from each variable node, and those from check nodes,
// are taken for normal with a variance of twice their mean, so that one
// number, r = 1-E[tanh(u/2)], follows them. The zero value works.
type GaussianEngine struct{}

var _ Engine = GaussianEngine{}

// Method returns Gaussian.
func (GaussianEngine) Method() Method { return Gaussian }

// gaussianUncertainty is the relative error allowed for the root and the
// maximum together; tests hold the engine to it against long iteration.
const gaussianUncertainty = 1e-10

// Threshold returns the largest σ at which the approximation converges,
// √(2/s) for the largest s that any r asks for (see gaussian_tunnel.go),
// or the bound of the true stability condition if that is smaller. Where the
// approximation converges for every s the value is +Inf, with a warning; this
// happens to ensembles of low rate with checks of degree 2. Critical
// lists the places where the tunnel closes. Iterations counts the equations
// solved.
func (GaussianEngine) Threshold(ctx context.Context, e ensembles.Ensemble, f channel.Family) (Threshold, error) {
	if err := covers(Gaussian, f, biawgn); err != nil {
		return Threshold{}, err
	}
	if err := ctx.Err(); err != nil {
		return Threshold{}, err
	}
	if e.Lambda.Fraction(1) > 0 {
		return Threshold{Method: Gaussian, Warnings: []string{degreeOneWarning}}, nil
	}
	t := tunnelSearch{e: &e}
	t.run()
	out := Threshold{
		Method:     Gaussian,
		Value:      sigmaOfMean(t.best.s),
		Iterations: t.points,
	}
	if out.Value > largestSigma {
		out.Value, out.Warnings = math.Inf(1), []string{alwaysWarning}
		return enforceStability(out, e, f), nil
	}
	slices.SortFunc(t.maxima, func(a, b tunnelPoint) int {
		if a.s > b.s {
			return -1
		}
		return 1
	})
	for _, m := range t.maxima {
		if slack := math.Sqrt(t.best.s/m.s) - 1; slack <= criticalSlack {
			state := gaussianState{s: m.s, l: m.l, u: m.u}
			out.Critical = append(out.Critical, Critical{Entropy: state.entropy(e.Lambda, f), Slack: slack})
		}
	}
	return enforceStability(out, e, f), nil
}

// largestSigma is the σ above which the approximations, and their rounding, are
// taken to converge on every channel; the capacity there is 1e-8.
const largestSigma = 1e4

const alwaysWarning = "the approximation converges on every channel, however bad: it does not hold for this ensemble"

// enforceStability lowers a threshold to the stability bound, and lists the
// bound among the critical places if it is close.
func enforceStability(t Threshold, e ensembles.Ensemble, f channel.Family) Threshold {
	bound := StabilityOf(e, f, t.Value).Bound
	if bound < t.Value*(1-gaussianUncertainty) {
		t.Warnings = append(t.Warnings, fmt.Sprintf(
			"the stability condition binds: the approximation alone converges up to %s = %.6g", f.Parameter(), t.Value))
	}
	value := math.Min(t.Value, bound)
	if len(t.Critical) > 0 && value < t.Value {
		widen := t.Value/value - 1
		for i := range t.Critical {
			t.Critical[i].Slack += widen
		}
		t.Critical = slices.DeleteFunc(t.Critical, func(c Critical) bool { return c.Slack > criticalSlack })
	}
	t.Value = value
	if slack := bound/value - 1; slack <= criticalSlack { // not NaN, of two infinities
		i, _ := slices.BinarySearchFunc(t.Critical, slack, func(c Critical, s float64) int {
			if c.Slack < s {
				return -1
			}
			return 1
		})
		t.Critical = slices.Insert(t.Critical, i, Critical{Entropy: 0, Slack: slack})
	}
	if !math.IsInf(value, 1) {
		t.Uncertainty = math.Max(t.Uncertainty, value*gaussianUncertainty)
	}
	return t
}

// sigmaOfMean returns the σ at which the channel's LLR has the given mean
// 2/σ², +Inf at 0.
func sigmaOfMean(mean float64) float64 { return math.Sqrt(2 / mean) }

// gaussianState is a state of the approximation: the means s of the channel
// and u of the check nodes' messages, and l = -ln r of the variable nodes'.
type gaussianState struct{ s, u, l float64 }

// entropy returns that of the mixture of the variable nodes' messages in bits.
func (g gaussianState) entropy(lambda ensembles.Distribution, f channel.Family) float64 {
	var sum float64
	for _, t := range lambda {
		sum += t.Fraction * normalEntropy(g.s+float64(t.Degree-1)*g.u, f)
	}
	return sum
}

// normalEntropy returns the entropy in bits of a bit given an LLR that is
// normal with the given mean and twice that variance: such is the output of a
// BI-AWGN channel.
func normalEntropy(mean float64, f channel.Family) float64 {
	switch {
	case mean == 0:
		return 1
	case math.IsInf(mean, 1):
		return 0
	}
	return 1 - f.Capacity(sigmaOfMean(mean))
}

// normalError returns the error probability of such an LLR, Q(√(mean/2)).
func normalError(mean float64) float64 { return math.Erfc(math.Sqrt(mean)/2) / 2 }

// point describes the state after an iteration: each quantity is the mixture
// of those of the normal messages from nodes of each degree. before is the
// mean of the check nodes' messages which this iteration received.
func (g gaussianState) point(e ensembles.Ensemble, nodes ensembles.Distribution, f channel.Family, iteration int, before float64) Point {
	p := Point{Iteration: iteration, CheckEntropy: normalEntropy(g.u, f)}
	for _, t := range e.Lambda {
		mean := g.s + float64(t.Degree-1)*before
		p.ErrorProbability += t.Fraction * normalError(mean)
		p.Entropy += t.Fraction * normalEntropy(mean, f)
		p.Bhattacharyya += t.Fraction * math.Exp(-mean/4)
	}
	for _, t := range nodes {
		p.BitErrorProbability += t.Fraction * normalError(g.s+float64(t.Degree)*before)
	}
	return p
}

// Trace iterates r ← h(s,r). The messages of variable nodes are a mixture over
// their degrees of normal ones with means m = s+(i-1)u: error probability
// Σλᵢ Q(√(m/2)), entropy Σλᵢ (1-C(m)) with the capacity C of the BI-AWGN
// channel of that mean LLR, Bhattacharyya parameter Σλᵢ e^(-m/4). The messages
// of check nodes are one normal with the mean over their degrees.
// Convergence is declared once a bound proves h < r from there on.
func (GaussianEngine) Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error) {
	return gaussianTrace(ctx, e, f, Gaussian, parameter, iterations, gaussianRule{
		variable: func(lambda ensembles.Distribution, s, u float64) float64 {
			l, _, _ := variableExponent(lambda, s, u)
			return l
		},
		check: func(rho ensembles.Distribution, l float64) float64 {
			u, _ := gaussianCheck(rho, l)
			return u
		},
	})
}

// gaussianRule is what the exact φ and the fit differ in: -ln r from s and u,
// and u from -ln r.
type gaussianRule struct {
	variable func(lambda ensembles.Distribution, s, u float64) float64
	check    func(rho ensembles.Distribution, l float64) float64
}

func gaussianTrace(ctx context.Context, e ensembles.Ensemble, f channel.Family, method Method, parameter float64, iterations int, rule gaussianRule) (Trace, error) {
	if err := covers(method, f, biawgn); err != nil {
		return Trace{}, err
	}
	if err := checkParameter(f, parameter); err != nil {
		return Trace{}, err
	}
	var kappa float64
	for _, t := range e.Rho {
		kappa += 4 * t.Fraction * math.Log(float64(t.Degree-1))
	}
	nodes := e.Lambda.Nodes()
	trace := Trace{Method: method, Parameter: parameter, Outcome: Exhausted}
	g := gaussianState{s: 2 / (parameter * parameter)}
	var before float64
	for i := 0; ; i++ {
		if err := ctx.Err(); err != nil {
			return Trace{}, err
		}
		last := g.l
		g.l, g.u = g.s, g.s
		if !math.IsInf(g.s, 1) {
			g.l = rule.variable(e.Lambda, g.s, before)
			g.u = rule.check(e.Rho, g.l)
		}
		p := g.point(e, nodes, f, i, before)
		trace.Points = append(trace.Points, p)
		if math.IsInf(g.s, 1) || p.BitErrorProbability <= negligibleError &&
			e.Lambda.Min() > 1 && tailHolds(&e, kappa, g.s, g.l) {
			trace.Outcome = Converged
			break
		}
		if i > 0 && g.l <= last*(1+stallTolerance) {
			trace.Outcome = Stalled
			break
		}
		if i == iterations {
			break
		}
		before = g.u
	}
	trace.Narrowest = narrowest(trace.Points)
	return trace, nil
}

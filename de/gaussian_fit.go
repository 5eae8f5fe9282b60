package de

import (
	"context"
	"math"

	"tannery/de/channel"
	"tannery/ensembles"
)

// GaussianFitEngine is the Gaussian approximation as Chung, Richardson &
// Urbanke (IEEE Trans. Inf. Theory 47(2), 2001) computed it: with their fit of
// φ, iterated as printed. Its thresholds differ from those with the exact φ by
// about 0.003 in σ. The fit is not monotone where it jumps, at a mean of 10,
// and has no value 1 near 0; the iteration takes it as it is, with φ(0) = 1
// where it starts, and the smaller inverse where there are two. The zero value
// works.
type GaussianFitEngine struct{}

var _ Engine = GaussianFitEngine{}

// Method returns GaussianFit.
func (GaussianFitEngine) Method() Method { return GaussianFit }

const (
	// fitSigmaTolerance is the relative width at which the bisection of
	// σ ends: three digits beyond those of the printed table.
	fitSigmaTolerance = 1e-7
	// fitIterations bounds one evolution: close to the threshold it takes
	// about 10/√(relative distance) iterations to pass.
	fitIterations = 200_000
	// fitSuccess is the -ln r at which an evolution counts as converged:
	// below r = e^(-40) only the stability condition can stop it, and that is
	// enforced apart.
	fitSuccess = 40
)

// Threshold bisects σ, evolving each time until r falls below e^(-40) or
// stops falling, and lowers the result to the stability bound.
func (GaussianFitEngine) Threshold(ctx context.Context, e ensembles.Ensemble, f channel.Family) (Threshold, error) {
	if err := covers(GaussianFit, f, biawgn); err != nil {
		return Threshold{}, err
	}
	if err := ctx.Err(); err != nil {
		return Threshold{}, err
	}
	if e.Lambda.Fraction(1) > 0 {
		return Threshold{Method: GaussianFit, Warnings: []string{degreeOneWarning}}, nil
	}
	out := Threshold{Method: GaussianFit}
	var slowest gaussianState // where the last evolution that passed was slowest
	passes := func(sigma float64) bool {
		g := gaussianState{s: 2 / (sigma * sigma)}
		var narrow gaussianState
		least := math.Inf(1)
		for range fitIterations {
			out.Iterations++
			last := g
			g.l = fitVariableExponent(e.Lambda, g.s, g.u)
			if g.l > fitSuccess {
				slowest = narrow
				return true
			}
			if last.l > 0 && g.l <= last.l {
				return false
			}
			if progress := g.l / last.l; last.l > 0 && progress < least {
				least, narrow = progress, g
			}
			g.u = fitCheck(e.Rho, g.l)
		}
		return false
	}
	low, high := 0.0, 1.0
	for passes(high) {
		low, high = high, 2*high
		if high > largestSigma {
			low = math.Inf(1)
			out.Warnings = append(out.Warnings, alwaysWarning)
			break
		}
	}
	for high-low > fitSigmaTolerance*high { // not if low is +Inf
		if err := ctx.Err(); err != nil {
			return Threshold{}, err
		}
		if middle := (low + high) / 2; passes(middle) {
			low = middle
		} else {
			high = middle
		}
	}
	out.Value = low
	if !math.IsInf(low, 1) {
		out.Uncertainty = high - low
	}
	if slowest.l > 0 {
		out.Critical = []Critical{{Entropy: slowest.entropy(e.Lambda, f)}}
	}
	return enforceStability(out, e, f), nil
}

// fitVariableExponent returns -ln Σᵢ λᵢ φ(s+(i-1)u) with the fit.
func fitVariableExponent(lambda ensembles.Distribution, s, u float64) float64 {
	least := fitExponent(s + float64(lambda[0].Degree-1)*u)
	var sum float64
	for _, t := range lambda {
		sum += t.Fraction * math.Exp(least-fitExponent(s+float64(t.Degree-1)*u))
	}
	return least - math.Log(sum)
}

// fitCheck is gaussianCheck with the fit, without the derivative.
func fitCheck(rho ensembles.Distribution, l float64) (u float64) {
	if l <= 0 {
		return 0 // φ = 1, or above by the fit's error
	}
	logComplement := math.Log(-math.Expm1(-l))
	if l > math.Ln2 {
		logComplement = math.Log1p(-math.Exp(-l))
	}
	for _, t := range rho {
		out := l + math.Log(float64(t.Degree-1)) // where r is below rounding
		if a := float64(t.Degree-1) * logComplement; a < -1e-300 {
			out = -math.Log(-math.Expm1(a))
		}
		u += t.Fraction * fitExponentInverse(out)
	}
	return u
}

// Trace iterates the approximation with the fit; see GaussianEngine.Trace for
// the quantities. Convergence is declared at a bit error probability below
// 1e-30, where φ and its fit have the same law, if the stability condition
// of the approximation holds.
func (GaussianFitEngine) Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error) {
	return gaussianTrace(ctx, e, f, GaussianFit, parameter, iterations, gaussianRule{
		variable: fitVariableExponent,
		check:    fitCheck,
	})
}

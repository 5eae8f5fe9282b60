package de

import (
	"math"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Stability is the condition under which small error probabilities shrink to
// zero, λ₂ρ'(1)·B < 1 with the channel's Bhattacharyya parameter B
// (Richardson, Shokrollahi & Urbanke, IEEE Trans. Inf. Theory 47(2), 2001).
// On the BEC B = ε.
type Stability struct {
	// Bound is the largest channel parameter at which the condition holds,
	// +Inf if it holds for the whole family (λ₂ = 0), and the best parameter
	// of the family if λ₁ > 0, where the error never reaches zero.
	Bound float64
	// Margin is 1 - λ₂ρ'(1)·B at the parameter asked about: the relative
	// distance from instability, 1 at most, negative where unstable.
	Margin float64
}

// StabilityOf returns the stability bound of the ensemble on the family, and
// the margin at the given parameter.
func StabilityOf(e ensembles.Ensemble, f channel.Family, parameter float64) Stability {
	slope := e.Lambda.Fraction(2) * e.Rho.Derivative(1)
	best, worst := f.Range()
	s := Stability{Margin: 1 - slope*f.Bhattacharyya(parameter)}
	switch {
	case e.Lambda.Fraction(1) > 0:
		s.Bound, s.Margin = best, math.Inf(-1)
	case slope*f.Bhattacharyya(worst) < 1:
		s.Bound = math.Inf(1)
	default:
		s.Bound = channel.ParameterAtBhattacharyya(f, 1/slope)
	}
	return s
}

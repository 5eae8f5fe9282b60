package ensembles

import (
	"errors"
	"fmt"
)

// Ensemble is a pair of degree distributions in edge perspective: λ over the
// variable nodes and ρ over the check nodes of a random Tanner graph. What it
// predicts holds for almost every long graph with these degrees
// (Richardson & Urbanke, IEEE Trans. Inf. Theory 47(2), 2001).
type Ensemble struct {
	Lambda Distribution // variable nodes, degrees from 1
	Rho    Distribution // check nodes, degrees from 2
}

// New checks that both distributions are present and that every check degree
// is at least 2: a check of degree 1 forces its bit to zero.
func New(lambda, rho Distribution) (Ensemble, error) {
	if len(lambda) == 0 {
		return Ensemble{}, errors.New("lambda: must have at least one degree")
	}
	if len(rho) == 0 {
		return Ensemble{}, errors.New("rho: must have at least one degree")
	}
	if rho.Min() < 2 {
		return Ensemble{}, fmt.Errorf("rho: degree %d: must be at least 2", rho.Min())
	}
	return Ensemble{lambda, rho}, nil
}

// Regular returns the (dv,dc)-regular ensemble, dv ≥ 1 and dc ≥ 2.
func Regular(dv, dc int) Ensemble {
	return Ensemble{Distribution{{dv, 1}}, Distribution{{dc, 1}}}
}

// DesignRate returns 1 - ∫ρ/∫λ, information bits per code bit. It is the
// true rate of a graph whose checks are independent, and may be negative.
func (e Ensemble) DesignRate() float64 {
	return 1 - e.Rho.Integral()/e.Lambda.Integral()
}

// MeanVariableDegree returns the mean over variable nodes, 1/∫λ, which is
// also the number of edges per code bit.
func (e Ensemble) MeanVariableDegree() float64 { return 1 / e.Lambda.Integral() }

// MeanCheckDegree returns the mean over check nodes, 1/∫ρ.
func (e Ensemble) MeanCheckDegree() float64 { return 1 / e.Rho.Integral() }

// EdgesPerBit returns the number of edges per code bit, the usual measure of
// a decoder's work per iteration; it equals MeanVariableDegree.
func (e Ensemble) EdgesPerBit() float64 { return 1 / e.Lambda.Integral() }

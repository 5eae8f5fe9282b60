package catalog

import (
	"math"

	"tannery/ensembles"
)

// tailMass is the share of edges at which the Poisson law of check degrees is
// cut off: below the rounding of published fractions.
const tailMass = 1e-9

// HeavyTail returns the ensemble of D ≥ 1 terms with the design rate strictly
// between 0 and 1, whose variable degrees i+1 have the edge fractions 1/(H·i)
// for i = 1…D, with the harmonic number H, and whose check degrees follow a
// Poisson law, ρᵢ = e^(-α) α^(i-1)/(i-1)! (Luby, Mitzenmacher, Shokrollahi &
// Spielman, IEEE Trans. Inf. Theory 47(2), 2001).
//
// The Poisson law is cut off: at the bottom below degree 2, since a check of
// degree 1 would force its bit to zero, and at the top where less than
// tailMass is left. α is the root at which the design rate is met after that,
// found by bisection to the last bit, as the mean check degree grows with it.
func HeavyTail(d int, rate float64) ensembles.Ensemble {
	var terms []ensembles.Term
	for i := 1; i <= d; i++ {
		terms = append(terms, ensembles.Term{Degree: i + 1, Fraction: 1 / float64(i)})
	}
	e := ensembles.Ensemble{Lambda: ensembles.Normalize(terms)}
	low, high := 0., 1.
	at := func(alpha float64) float64 {
		e.Rho = poisson(alpha)
		return e.DesignRate()
	}
	for at(high) < rate {
		high *= 2
	}
	for {
		middle := low + (high-low)/2
		if middle <= low || middle >= high {
			at(high)
			return e
		}
		if at(middle) < rate {
			low = middle
		} else {
			high = middle
		}
	}
}

// poisson returns the edge fractions of check degrees, cut off on both sides.
func poisson(alpha float64) ensembles.Distribution {
	var terms []ensembles.Term
	left := -math.Expm1(-alpha) // the mass from degree 2 on
	for i := 2; left > tailMass; i++ {
		k := float64(i - 1)
		logarithm, _ := math.Lgamma(k + 1)
		mass := math.Exp(k*math.Log(alpha) - alpha - logarithm)
		terms = append(terms, ensembles.Term{Degree: i, Fraction: mass})
		left -= mass
		if k > alpha && mass < tailMass/10 {
			break // rounding keeps left from reaching the end
		}
	}
	if len(terms) == 0 {
		terms = []ensembles.Term{{Degree: 2, Fraction: 1}}
	}
	return ensembles.Normalize(terms)
}

package optimize

import (
	"math"

	"tannery/ensembles"
)

// leastFraction is the fraction of edges below which a degree is dropped.
const leastFraction = 1e-7

// distribution returns the fractions of the degrees, without the smallest.
func distribution(degrees []int, fractions []float64) ensembles.Distribution {
	var d ensembles.Distribution
	for i, f := range fractions {
		if f > leastFraction {
			d = append(d, ensembles.Term{Degree: degrees[i], Fraction: f})
		}
	}
	if len(d) == 0 {
		return nil
	}
	return ensembles.Normalize(d)
}

// withRate changes the fractions of an ensemble as little as needed for its
// design rate to be rate, up to rounding: those of λ, or of ρ where λ has only
// one degree. It fails where a fraction would become negative, or where there
// is nothing to change and the rate differs.
func withRate(e ensembles.Ensemble, rate float64) (ensembles.Ensemble, bool) {
	ok := true
	if len(e.Lambda) > 1 {
		e.Lambda, ok = withIntegral(e.Lambda, e.Rho.Integral()/(1-rate))
	} else {
		e.Rho, ok = withIntegral(e.Rho, e.Lambda.Integral()*(1-rate))
	}
	return e, ok && math.Abs(e.DesignRate()-rate) < rateTolerance
}

// rateTolerance is how far the design rate of a result may be off.
const rateTolerance = 1e-12

// withIntegral multiplies each fraction fᵢ by 1+a+b/i with a and b such that
// the fractions sum to 1 and Σ fᵢ/i = c.
func withIntegral(d ensembles.Distribution, c float64) (ensembles.Distribution, bool) {
	if len(d) == 1 {
		return d, math.Abs(d.Integral()-c) < rateTolerance
	}
	out := append(ensembles.Distribution(nil), d...)
	// Twice: the second time takes what rounding left.
	for range 2 {
		var s0, s1, s2 float64
		for _, t := range out {
			i := float64(t.Degree)
			s0 += t.Fraction
			s1 += t.Fraction / i
			s2 += t.Fraction / (i * i)
		}
		// a·s0 + b·s1 = 1-s0, a·s1 + b·s2 = c-s1.
		det := s0*s2 - s1*s1
		a := ((1-s0)*s2 - (c-s1)*s1) / det
		b := ((c-s1)*s0 - (1-s0)*s1) / det
		for i := range out {
			out[i].Fraction *= 1 + a + b/float64(out[i].Degree)
			if !(out[i].Fraction > 0) {
				return nil, false
			}
		}
	}
	return out, true
}

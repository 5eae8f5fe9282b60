package de

import "tannery/ensembles"

// certainBelow returns how small the Bhattacharyya parameter of the messages
// must be for certain success on a channel of Bhattacharyya parameter b0: the
// largest x up to which the scalar recursion
//
//	x ← b0·λ(1-ρ(1-x))
//
// decreases everywhere. It bounds the parameter of the true densities from
// above, since among channels of equal Bhattacharyya parameter the BEC is the
// worst at check nodes, and at variable nodes the parameter multiplies
// (Khandekar & McEliece, Proc. ISIT 2001; Richardson & Urbanke, Modern Coding
// Theory, 2008, section 4.10). It returns 0 if there is no such x.
//
// The largest x is approached by intervals, rigorously: with y = 1-ρ(1-x),
// λ(y)/y does not decrease in x and y/x does not increase, so on [a, b]
//
//	λ(y)/x ≤ λ(y(b))/y(b) · y(a)/a,
//
// where y(a)/a → ρ'(1) as a → 0.
func certainBelow(e ensembles.Ensemble, b0 float64) float64 {
	if e.Lambda.Fraction(1) > 0 {
		return 0
	}
	y := func(x float64) float64 { return 1 - e.Rho.At(1-x) }
	a, ratio := 0.0, e.Rho.Derivative(1)
	for {
		holds := func(b float64) bool {
			yb := y(b)
			return b0*e.Lambda.At(yb)/yb*ratio < 1
		}
		if holds(1) {
			return 1
		}
		low, high := max(a, 1e-8), 1.0
		if !holds(low) {
			return a
		}
		for range 40 {
			if middle := (low + high) / 2; holds(middle) {
				low = middle
			} else {
				high = middle
			}
		}
		if low < a*(1+1e-4) {
			return a
		}
		a, ratio = low, y(low)/low
	}
}

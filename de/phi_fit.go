package de

import "math"

// The fit of φ printed by Chung, Richardson & Urbanke (2001):
//
//	φ(x) ≈ e^(-0.4527x^0.86+0.0218)        0 < x < 10,
//	φ(x) ≈ √(π/x) e^(-x/4) (1-10/(7x))     x ≥ 10, the mean of two bounds.
//
// It jumps up at 10, from 0.0385 to 0.0394, and tends to e^0.0218 > 1 as
// x → 0, with φ(0) = 1 by definition.
const (
	fitSwitch   = 10
	fitFactor   = 0.4527
	fitPower    = 0.86
	fitConstant = 0.0218
	fitTail     = 10. / 7
)

// fitAtSwitch is -ln of the left limit of the fit at 10.
var fitAtSwitch = fitFactor*math.Pow(fitSwitch, fitPower) - fitConstant

// PhiFit returns the fit of φ printed by Chung, Richardson & Urbanke (IEEE
// Trans. Inf. Theory 47(2), 2001), as printed: it exceeds 1 for 0 < x < 0.029
// and jumps up by 2.5 % at 10. Use Phi for φ itself.
func PhiFit(x float64) float64 { return math.Exp(-fitExponent(x)) }

// PhiFitInverse returns an x at which PhiFit(x) = r, for r from 0 (x = +Inf)
// to 1 (x = 0.029, not 0). Where two x have the same r it returns the one
// below 10; where none has, 0 to e^0.0218 being covered, there is none.
func PhiFitInverse(r float64) float64 { return fitExponentInverse(-math.Log(r)) }

// fitExponent returns -ln of the fit.
func fitExponent(x float64) float64 {
	switch {
	case x == 0:
		return 0
	case x < fitSwitch:
		return fitFactor*math.Pow(x, fitPower) - fitConstant
	case math.IsInf(x, 1):
		return x
	}
	return x/4 + 0.5*math.Log(x/math.Pi) - math.Log1p(-fitTail/x)
}

// fitExponentInverse undoes fitExponent.
func fitExponentInverse(l float64) float64 {
	if l <= fitAtSwitch {
		return math.Pow((l+fitConstant)/fitFactor, 1/fitPower)
	}
	if math.IsInf(l, 1) {
		return l
	}
	// Newton's method on a function of slope 0.28 to 0.25 that is nearly
	// straight: each step gains four digits.
	x := fitSwitch + 4*(l-fitAtSwitch)
	for range 6 {
		slope := 0.25 + 0.5/x - fitTail/(x*x)/(1-fitTail/x)
		x -= (fitExponent(x) - l) / slope
	}
	return x
}

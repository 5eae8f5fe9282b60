package de

import (
	"math"

	"tannery/ensembles"
)

//go:generate go run phi_generate.go

// The Gaussian approximation (Chung, Richardson & Urbanke, IEEE Trans. Inf.
// Theory 47(2), 2001) takes messages for normal with mean x and variance 2x
// and follows
//
//	φ(x) = 1 - E[tanh(u/2)],  u normal with mean x and variance 2x,
//
// which falls from 1 at x = 0 to 0. Completing the square,
//
//	φ(x) = e^(-x/4)/√(4πx) ∫ e^(-u²/4x)/cosh(u/2) du  over the real line
//	     = √(π/x) e^(-x/4) (1 - π²/(4x) + 5π⁴/(32x²) - …)  for large x,
//
// where the coefficients are (-1)^k |E_2k| (π²/4)^k/k! with the Euler numbers
// E_2k. All work is done with l = -ln φ(x), which behaves like x/2 for small x
// and like x/4 for large x and so loses no digits at either end: polynomials
// for l/x and x/l on intervals that double, made by phi_generate.go.

// Phi returns φ(x) = 1 - E[tanh(u/2)] for u normal with mean x and variance
// 2x, to a relative error below 1e-13 while x < 1000 (below 1e-16·x beyond).
// It falls from 1 at x = 0 to 0 at +Inf; x must not be negative.
func Phi(x float64) float64 { return math.Exp(-phiExponent(x)) }

// PhiComplement returns 1 - φ(x) = E[tanh(u/2)] with full relative precision
// for small x, where it is about x/2.
func PhiComplement(x float64) float64 { return -math.Expm1(-phiExponent(x)) }

// PhiInverse returns the x at which φ(x) = r, for r from 0 (x = +Inf) to 1
// (x = 0), to a relative error below 1e-13 given r.
func PhiInverse(r float64) float64 { return phiExponentInverse(-math.Log(r)) }

// GaussianCheck returns the mean u of the messages from check nodes under the
// Gaussian approximation, when those from variable nodes have E[tanh(u/2)] =
// 1-r:
//
//	u(r) = Σⱼ ρⱼ φ⁻¹(1 - (1-r)^(j-1)),
//
// for r from 0 (u = +Inf) to 1 (u = 0). It increases as r falls. With the
// channel's mean LLR s a variable node of degree i then sends messages of mean
// s+(i-1)u, and λ keeps the tunnel open at r if Σᵢ λᵢ φ(s+(i-1)u(r)) < r.
func GaussianCheck(rho ensembles.Distribution, r float64) float64 {
	u, _ := gaussianCheck(rho, -math.Log(r))
	return u
}

// asymptoticFrom is where phiExponent turns to the asymptotic series; its
// terms there fall below rounding with the seventh.
var asymptoticFrom = math.Ldexp(1, phiLast+1)

// phiSeries holds the coefficients |E_2k|·(π²/4)^k/k!, signed, of the
// asymptotic series in 1/x.
var phiSeries = func() (c [7]float64) {
	factor := 1.0
	for k, euler := range []float64{1, 1, 5, 61, 1385, 50521, 2702765} {
		if k > 0 {
			factor *= -math.Pi * math.Pi / 4 / float64(k)
		}
		c[k] = factor * euler
	}
	return c
}()

// phiExponent returns -ln φ(x) for x ≥ 0.
func phiExponent(x float64) float64 {
	if x >= asymptoticFrom {
		return asymptoticExponent(x)
	}
	return x * value(phiTable[:], x, phiFirst)
}

// phiExponentSlope returns -ln φ(x) and its derivative, which falls from 1/2
// at x = 0 to 1/4.
func phiExponentSlope(x float64) (l, slope float64) {
	if x >= asymptoticFrom {
		const a = math.Pi * math.Pi / 4 // -ln(1-a/x+5a²/(2x²)) = a/x-2a²/x²+…
		return asymptoticExponent(x), 0.25 + (0.5-(a-4*a*a/x)/x)/x
	}
	p, dp := valueSlope(phiTable[:], x, phiFirst)
	return x * p, p + x*dp
}

func asymptoticExponent(x float64) float64 {
	if math.IsInf(x, 1) {
		return x
	}
	q := 1 / x
	var sum float64
	for k := len(phiSeries) - 1; k >= 0; k-- {
		sum = sum*q + phiSeries[k]
	}
	return x/4 + 0.5*math.Log(x/math.Pi) - math.Log(sum)
}

// phiExponentInverse returns x at which -ln φ(x) = l, for l ≥ 0.
func phiExponentInverse(l float64) float64 {
	if l < math.Ldexp(1, inverseLast+1) {
		return l * value(inverseTable[:], l, inverseFirst)
	}
	if math.IsInf(l, 1) {
		return l
	}
	// Newton's method doubles the digits of x ≈ 4l, and the curvature of l
	// is only 1/(2x²).
	x := 4 * l
	for range 3 {
		f, slope := phiExponentSlope(x)
		x -= (f - l) / slope
	}
	return x
}

// row finds the polynomial for the interval from 2^k to 2^(k+1) that holds x,
// and the place t of x in it, from -1 to 1, with dt/dx; the first row stands
// for k = first and reaches down to 0.
func row(rows [][phiTerms]float64, x float64, first int) (c *[phiTerms]float64, t, scale float64) {
	scale = math.Float64frombits(uint64(1023-first) << 52) // 2^-first
	if !(x*scale >= 2) {                                   // also where x is not positive
		return &rows[0], x*scale - 1, scale
	}
	k := int(math.Float64bits(x)>>52) - 1023 // x = 1.… · 2^k
	scale = math.Float64frombits(uint64(1024-k) << 52)
	return &rows[k-first], x*scale - 3, scale
}

// value returns the value at x of the polynomial that row finds. Even and odd
// terms are apart, as two chains that run side by side.
func value(rows [][phiTerms]float64, x float64, first int) float64 {
	c, t, _ := row(rows, x, first)
	w := t * t
	var even, odd float64
	for i := phiTerms - 2; i >= 0; i -= 2 {
		even = even*w + c[i]
		odd = odd*w + c[i+1]
	}
	return even + t*odd
}

// valueSlope returns the value and the derivative.
func valueSlope(rows [][phiTerms]float64, x float64, first int) (p, slope float64) {
	c, t, scale := row(rows, x, first)
	w := t * t
	var even, odd, dEven, dOdd float64
	for i := phiTerms - 2; i >= 0; i -= 2 {
		dEven = dEven*w + even
		dOdd = dOdd*w + odd
		even = even*w + c[i]
		odd = odd*w + c[i+1]
	}
	return even + t*odd, scale * (odd + 2*t*(dEven+t*dOdd))
}

// gaussianCheck is GaussianCheck as a function of l = -ln r; it returns the
// derivative du/dl too.
func gaussianCheck(rho ensembles.Distribution, l float64) (u, slope float64) {
	r := math.Exp(-l)
	logComplement := math.Log1p(-r) // ln(1-r)
	if l < math.Ln2 {
		logComplement = math.Log(-math.Expm1(-l))
	}
	for _, t := range rho {
		n := float64(t.Degree - 1)
		a := n * logComplement // ln(1-r)ⁿ
		var out float64        // -ln(1-(1-r)ⁿ)
		var dOut float64       // d out/dl = n·r·(1-r)^(n-1)/(1-(1-r)ⁿ)
		switch {
		case n == 1:
			out, dOut = l, 1
		case a > -1e-300: // r below the least number: 1-(1-r)ⁿ = n·r
			out, dOut = l-math.Log(n), 1
		case a < -math.Ln2:
			c := math.Exp(a)
			out = -math.Log1p(-c)
			dOut = n * r * c / (-math.Expm1(-l)) / (1 - c)
		default:
			c := -math.Expm1(a)
			out = -math.Log(c)
			dOut = n * r * (1 - c) / (-math.Expm1(-l)) / c
		}
		x := phiExponentInverse(out)
		_, dx := phiExponentSlope(x)
		u += t.Fraction * x
		slope += t.Fraction * dOut / dx
	}
	return u, slope
}

package de

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// phiQuadrature evaluates φ(x) from its definition, E[2/(1+e^u)], by Legendre
// quadrature: the integrand is positive, so there is no cancellation.
func phiQuadrature(x float64) float64 {
	sd := math.Sqrt(2 * x)
	f := func(u float64) float64 {
		z := (u - x) / sd
		return math.Exp(-z*z/2) / (sd * math.Sqrt(2*math.Pi)) * 2 / (1 + math.Exp(u))
	}
	// The integrand is c·e^(-u²/4x)/cosh(u/2), below 1e-17 of its peak outside.
	high := math.Min(80, 12*sd)
	low := -high
	var sum float64
	const pieces = 40
	for i := range pieces {
		a := low + (high-low)*float64(i)/pieces
		sum += quad.Fixed(f, a, a+(high-low)/pieces, 40, quad.Legendre{}, 0)
	}
	return sum
}

func TestPhiAgainstQuadrature(t *testing.T) {
	for x := 1e-3; x < 1500; x *= 1.013 {
		want := phiQuadrature(x)
		if got := Phi(x); math.Abs(got/want-1) > 2e-13+1e-15*x {
			t.Errorf("φ(%g) = %.17g, quadrature %.17g (relative %.2g)", x, got, want, got/want-1)
		}
	}
}

func TestPhiInverseUndoesPhi(t *testing.T) {
	for x := 1e-12; x < 1e5; x *= 1.07 {
		l, slope := phiExponentSlope(x)
		if got := phiExponentInverse(l); math.Abs(got/x-1) > 2e-14 {
			t.Errorf("x = %g comes back as %.17g (relative %.2g)", x, got, got/x-1)
		}
		h := 1e-5 * x
		if want := (phiExponent(x+h) - phiExponent(x-h)) / (2 * h); math.Abs(slope/want-1) > 1e-8 {
			t.Errorf("slope at %g is %.12g, want %.12g", x, slope, want)
		}
		if x < 2000 {
			if got := PhiInverse(Phi(x)); math.Abs(got/x-1) > 1e-13+1e-15/x {
				t.Errorf("PhiInverse(Phi(%g)) = %.17g", x, got)
			}
		}
	}
}

func TestPhiEnds(t *testing.T) {
	if got := Phi(0); got != 1 {
		t.Errorf("φ(0) = %v, want 1", got)
	}
	if got := PhiInverse(1); got != 0 {
		t.Errorf("φ⁻¹(1) = %v, want 0", got)
	}
	if got := PhiInverse(0); !math.IsInf(got, 1) {
		t.Errorf("φ⁻¹(0) = %v, want +Inf", got)
	}
	if got := Phi(math.Inf(1)); got != 0 {
		t.Errorf("φ(∞) = %v, want 0", got)
	}
	for _, x := range []float64{1e-15, 1e-10, 1e-6} {
		// 1-φ(x) = x/2 - x²/4 + …: E[tanh(u/2)] with u²'s mean 2x+x².
		if got, want := PhiComplement(x), x/2-x*x/4; math.Abs(got/want-1) > 1e-11 {
			t.Errorf("1-φ(%g) = %.17g, want %.17g", x, got, want)
		}
	}
}

func TestGaussianCheck(t *testing.T) {
	for _, text := range []string{"2:1", "6:1", "2:0.1,7:0.4,30:0.5", "1000:1"} {
		rho := distribution(t, text)
		for l := 1e-3; l < 600; l *= 1.1 {
			r := math.Exp(-l)
			var want float64
			for _, term := range rho {
				want += term.Fraction * PhiInverse(-math.Expm1(float64(term.Degree-1)*math.Log1p(-r)))
			}
			got := GaussianCheck(rho, r)
			if l > 0.1 && math.Abs(got-want) > 1e-9*want+1e-13 {
				t.Errorf("%v: u(%g) = %.15g, want %.15g", rho, r, got, want)
			}
			u, slope := gaussianCheck(rho, l)
			h := 1e-5 * l
			up, _ := gaussianCheck(rho, l+h)
			down, _ := gaussianCheck(rho, l-h)
			if numeric := (up - down) / (2 * h); math.Abs(slope-numeric) > 1e-6*numeric+1e-12 {
				t.Errorf("%v: du/dl = %.10g at %g (u = %g), want %.10g", rho, slope, l, u, numeric)
			}
		}
	}
}

func BenchmarkPhi(b *testing.B) {
	var sum float64
	for b.Loop() {
		sum += Phi(3.7)
	}
	_ = sum
}

func BenchmarkPhiInverse(b *testing.B) {
	var sum float64
	for b.Loop() {
		sum += PhiInverse(0.037)
	}
	_ = sum
}

package channel

import (
	"math"

	"gonum.org/v1/gonum/integrate/quad"
)

// Laplace is the family of binary-input channels with additive Laplace noise:
// y = x + n with x = ±1 and n of density e^(-|n|/b)/(2b). The parameter is
// the scale b, from 0 to +Inf.
type Laplace struct{}

var _ Family = Laplace{}

// Name implements Family.
func (Laplace) Name() string { return "laplace" }

// Parameter implements Family.
func (Laplace) Parameter() string { return "scale" }

// Symbol implements Family.
func (Laplace) Symbol() string { return "b" }

// Range implements Family.
func (Laplace) Range() (best, worst float64) { return 0, math.Inf(1) }

// Capacity implements Family, in closed form.
func (Laplace) Capacity(scale float64) float64 {
	capacity, _ := laplaceInformation(1 / scale)
	return capacity
}

// Inverse implements Family.
func (Laplace) Inverse(rate float64) (float64, error) {
	if err := checkRate(rate); err != nil {
		return 0, err
	}
	// With a = 1/b: gd(a) ≤ min(a, π/2) bounds both forms of the capacity.
	low := math.Sqrt(2 * math.Ln2 * rate)
	high := math.Log((1 + math.Pi/2) / (math.Ln2 * (1 - rate)))
	return 1 / atRate(rate, low, high, laplaceInformation), nil
}

// Bhattacharyya implements Family: (1+1/b) e^(-1/b).
func (Laplace) Bhattacharyya(scale float64) float64 {
	a := 1 / scale
	if math.IsInf(a, 1) {
		return 0
	}
	return (1 + a) * math.Exp(-a)
}

// ErrorProbability implements Family: e^(-1/b)/2.
func (Laplace) ErrorProbability(scale float64) float64 { return math.Exp(-1/scale) / 2 }

// Density implements Family. The LLR is (|y+1|-|y-1|)/b: outside of (-1,1)
// it is ±2/b, inside it is 2y/b and has density e^(-1/b) e^(x/2) / 4.
func (Laplace) Density(scale float64) Density {
	a := 1 / scale
	switch {
	case math.IsInf(a, 1):
		return certain(1)
	case a == 0:
		return certain(0)
	}
	return Density{
		Atoms: []Atom{{Magnitude: 2 * a, Mass: (1 + math.Exp(-2*a)) / 2}},
		PDF: func(x float64) float64 {
			return (math.Exp(x/2-a) + math.Exp(-x/2-a)) / 4
		},
		End: 2 * a,
	}
}

// SNR implements Family: with noise of variance 2b², Es/N0 = 1/(4b²).
func (Laplace) SNR(scale float64) (snr float64, ok bool) { return EsN0(math.Sqrt2 * scale), true }

// laplaceInformation returns C and 1-C at a = 1/b, from 0 to +Inf. Averaging
// h(1/(1+e^|L|)) over the density, by parts, leaves
//
//	(1-C) ln 2 = ln(1+e^(-2a)) + e^(-a) gd(a),  gd(a) = 2 atan(tanh(a/2)),
//
// whose derivative is -e^(-a) gd(a), so that C ln 2 = ∫₀ᵃ e^(-t) gd(t) dt,
// which is accurate where C is small.
func laplaceInformation(a float64) (capacity, equivocation float64) {
	if a < 1 {
		sum := 0.0
		for i, t := range laplaceNodes {
			sum += laplaceWeights[i] * math.Exp(-a*t) * gudermann(a*t)
		}
		capacity = a * sum / math.Ln2
		return capacity, 1 - capacity
	}
	equivocation = (math.Log1p(math.Exp(-2*a)) + math.Exp(-a)*gudermann(a)) / math.Ln2
	return 1 - equivocation, equivocation
}

// gudermann returns the Gudermannian function, the integral of 1/cosh.
func gudermann(a float64) float64 { return 2 * math.Atan(math.Tanh(a/2)) }

// laplaceNodes and laplaceWeights are Gauss's on (0,1). The integrand's
// nearest singularity is at iπ/2, so for a ≤ 1 the error of n nodes is about
// 6.6^(-2n).
var laplaceNodes, laplaceWeights = func() (x, w []float64) {
	x, w = make([]float64, 14), make([]float64, 14)
	quad.Legendre{}.FixedLocations(x, w, 0, 1)
	return x, w
}()

package channel

import "math"

// BIAWGN is the family of binary-input channels with additive white Gaussian
// noise: y = x + n with x = ±1 and real noise of standard deviation σ, from
// 0 to +Inf. The LLR 2y/σ² of a sent zero (x = 1) is Gaussian with mean
// m = 2/σ² and variance 2m.
type BIAWGN struct{}

var _ Family = BIAWGN{}

// Name implements Family.
func (BIAWGN) Name() string { return "biawgn" }

// Parameter implements Family.
func (BIAWGN) Parameter() string { return "sigma" }

// Symbol implements Family.
func (BIAWGN) Symbol() string { return "σ" }

// Range implements Family.
func (BIAWGN) Range() (best, worst float64) { return 0, math.Inf(1) }

// Capacity implements Family; its error is a few units of rounding.
func (BIAWGN) Capacity(sigma float64) float64 {
	capacity, _ := gaussianInformation(2 / sigma)
	return capacity
}

// Inverse implements Family; its relative error is a few units of rounding.
func (BIAWGN) Inverse(rate float64) (float64, error) {
	if err := checkRate(rate); err != nil {
		return 0, err
	}
	// With s = 2/σ: s²/(8 ln 2) ≥ C, as it is for inputs of any kind, and
	// e^(-s²/8) = B ≥ 1-C, as it is for binary channels of any kind.
	low, high := math.Sqrt(8*math.Ln2*rate), math.Sqrt(-8*math.Log1p(-rate))
	return 2 / atRate(rate, low, high, gaussianInformation), nil
}

// Bhattacharyya implements Family: e^(-1/(2σ²)).
func (BIAWGN) Bhattacharyya(sigma float64) float64 { return math.Exp(-0.5 / (sigma * sigma)) }

// ErrorProbability implements Family: Q(1/σ).
func (BIAWGN) ErrorProbability(sigma float64) float64 { return tail(1 / sigma) }

// tail returns Q(x), the probability that a standard normal variable exceeds x.
func tail(x float64) float64 { return math.Erfc(x/math.Sqrt2) / 2 }

// Density implements Family.
func (BIAWGN) Density(sigma float64) Density {
	m := 2 / (sigma * sigma)
	switch {
	case math.IsInf(m, 1):
		return certain(1)
	case m == 0:
		return certain(0)
	}
	scale := 1 / math.Sqrt(4*math.Pi*m)
	return Density{
		PDF: func(x float64) float64 {
			return scale * math.Exp(-(x-m)*(x-m)/(4*m)) * (1 + math.Exp(-x))
		},
		End: m + vanishing*math.Sqrt(2*m),
	}
}

// vanishing is the number of standard deviations after which e^(-x²/2) is
// below all floating-point numbers. Ends of densities tell those who integrate
// them their scale, which may be far below that of a grid.
const vanishing = 39

// certain returns the density of a bit known for certain with the given
// probability and otherwise erased.
func certain(probability float64) Density {
	var d Density
	if probability < 1 {
		d.Atoms = append(d.Atoms, Atom{Magnitude: 0, Mass: 1 - probability})
	}
	if probability > 0 {
		d.Atoms = append(d.Atoms, Atom{Magnitude: math.Inf(1), Mass: probability})
	}
	return d
}

// SNR implements Family: Es/N0 = 1/(2σ²).
func (BIAWGN) SNR(sigma float64) (snr float64, ok bool) { return EsN0(sigma), true }

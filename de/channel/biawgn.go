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
		End: math.Inf(1),
	}
}

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

// The capacity of BIAWGN is the mean of 1-H(|L|), H(x) = h(1/(1+e^x)). With
// s = √(2m) = 2/σ, the standard deviation of L, its density is
//
//	f(x) = e^(x/2) g(x),  g(x) = e^(-s²/8) e^(-x²/(2s²)) / (s√(2π)),
//
// so that 1-C = ∫ g(x) cosh(x/2) H(x) dx over the whole line, and the same
// with 1-H in place of H for C. Both integrands are positive and even, analytic
// for |Im x| < π, and decay fast: the trapezoidal rule with step q errs by
// about e^(π²/(2s²) - 2π²/q), or by e^(-2π²s²/q²) where s is small (Trefethen
// & Weideman, The exponentially convergent trapezoidal rule, SIAM Review
// 56(3), 2014). At q = min(0.4, 0.6s) that is below 1e-16 of the integral for
// every s.
const (
	gaussianStep     = 0.4
	gaussianStepBits = 0.6
	// gaussianReach is the number of standard deviations after which e^(-x²/2)
	// no longer counts.
	gaussianReach = 9.0
	// gaussianEnd is the x after which cosh(x/2) H(x), about x e^(-x/2), no
	// longer counts.
	gaussianEnd = 100.0
)

// gaussianCapacity and gaussianEntropy hold 2cosh(x/2)(1-H(x)) and
// 2cosh(x/2)H(x) at the multiples of gaussianStep, the first one halved, as
// both sides of the line are counted together.
var gaussianCapacity, gaussianEntropy = gaussianTables()

func gaussianTables() (capacity, entropy []float64) {
	n := int(gaussianEnd/gaussianStep) + 1
	capacity, entropy = make([]float64, n), make([]float64, n)
	for i := range n {
		x := gaussianStep * float64(i)
		capacity[i] = 2 * math.Cosh(x/2) * llrCapacity(x)
		entropy[i] = 2 * math.Cosh(x/2) * llrEntropy(x)
	}
	capacity[0] /= 2
	entropy[0] /= 2
	return capacity, entropy
}

// gaussianInformation returns C and 1-C at s = 2/σ, from 0 to +Inf: the
// smaller of them by quadrature, and so with full relative accuracy.
func gaussianInformation(s float64) (capacity, equivocation float64) {
	const half = 2.04 // the s at which C is 1/2, nearly
	switch {
	case s == 0:
		return 0, 1
	case s*s/8 > 745: // e^-745 is 0
		return 1, 0
	case s < gaussianStep/gaussianStepBits:
		// The nodes are at the same multiples of s for every s.
		sum := 0.0
		for i := 1; i <= int(gaussianReach/gaussianStepBits)+1; i++ {
			z := gaussianStepBits * float64(i)
			x := z * s
			sum += math.Exp(-z*z/2) * 2 * math.Cosh(x/2) * llrCapacity(x)
		}
		capacity = sum * gaussianStepBits * math.Exp(-s*s/8) / math.Sqrt(2*math.Pi)
		return capacity, 1 - capacity
	case s < half:
		// The factor cosh(x/2) moves the bell from 0 to s²/2.
		capacity = gaussianSum(s, s*s/2+gaussianReach*s, gaussianCapacity)
		return capacity, 1 - capacity
	default:
		equivocation = gaussianSum(s, gaussianReach*s, gaussianEntropy)
		return 1 - equivocation, equivocation
	}
}

// gaussianSum returns the trapezoidal sum of the tabulated kernel times g,
// up to x = end or the end of the table.
func gaussianSum(s, end float64, kernel []float64) float64 {
	n := min(len(kernel), int(end/gaussianStep)+1)
	z := gaussianStep / s
	z *= -z / 2
	sum := 0.0
	for i, k := range kernel[:n] {
		sum += k * math.Exp(z*float64(i*i))
	}
	return sum * gaussianStep * math.Exp(-s*s/8) / (s * math.Sqrt(2*math.Pi))
}

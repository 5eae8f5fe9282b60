package channel

import "math"

// The capacity and the dispersion of BIAWGN are means of functions of the
// LLR L. With s = √(2m) = 2/σ, the standard deviation of L, its density is
//
//	f(x) = e^(x/2) g(x),  g(x) = e^(-s²/8) e^(-x²/(2s²)) / (s√(2π)),
//
// with g even. So E[k(L)] = ∫ g(x) K(x) dx over x > 0 with the even function
// K(x) = e^(x/2)k(x) + e^(-x/2)k(-x). The functions here are analytic for
// |Im x| < π, and the trapezoidal rule with step q errs by about
// e^(π²/(2s²) - 2π²/q), or by e^(-2π²s²/q²) where s is small (Trefethen &
// Weideman, The exponentially convergent trapezoidal rule, SIAM Review 56(3),
// 2014). At q = min(0.4, 0.6s) that is below 1e-16 of the integral for
// every s.
const (
	gaussianStep      = 0.4
	gaussianStepOverS = 0.6
	// gaussianReach is the number of standard deviations after which
	// e^(-x²/2) no longer counts.
	gaussianReach = 9.0
	// gaussianEnd is the x after which x²e^(-x/2), as fast as any of the
	// functions falls that need it, no longer counts.
	gaussianEnd = 100.0
	// gaussianHalf is the s at which C is 1/2, nearly.
	gaussianHalf = 2.04
	// gaussianPerfect is the s at which e^(-s²/8) vanishes.
	gaussianPerfect = 77.2
)

// gaussianKernel is a function K, with its values at the multiples of
// gaussianStep, the one at 0 halved.
type gaussianKernel struct {
	even  func(x float64) float64
	table []float64
}

func newGaussianKernel(even func(x float64) float64) gaussianKernel {
	k := gaussianKernel{even, make([]float64, int(gaussianEnd/gaussianStep)+1)}
	for i := range k.table {
		k.table[i] = even(gaussianStep * float64(i))
	}
	k.table[0] /= 2
	return k
}

// The kernels of C, of 1-C, and of the second moments of the information
// density 1-log₂(1+e^(-L)) about 0 and about 1.
var (
	gaussianCapacity = newGaussianKernel(func(x float64) float64 {
		return 2 * math.Cosh(x/2) * llrCapacity(x)
	})
	gaussianEntropy = newGaussianKernel(func(x float64) float64 {
		return 2 * math.Cosh(x/2) * llrEntropy(x)
	})
	gaussianSquare = newGaussianKernel(func(x float64) float64 {
		right, wrong := informationDensity(x), informationDensity(-x)
		return math.Exp(x/2)*right*right + math.Exp(-x/2)*wrong*wrong
	})
	gaussianSquareLoss = newGaussianKernel(func(x float64) float64 {
		right := math.Log1p(math.Exp(-x)) / math.Ln2
		wrong := right + x/math.Ln2
		return math.Exp(x/2)*right*right + math.Exp(-x/2)*wrong*wrong
	})
)

// informationDensity returns 1-log₂(1+e^(-x)) with full relative accuracy
// around 0, its zero.
func informationDensity(x float64) float64 {
	return -math.Log1p(math.Expm1(-x)/2) / math.Ln2
}

// mean returns the mean of the kernel's function at s, above 0 and below
// gaussianPerfect. Up to gaussianHalf the function may be bounded by any
// polynomial; beyond, K must fall like e^(-x/2).
func (k gaussianKernel) mean(s float64) float64 {
	sum := 0.0
	if s < gaussianStep/gaussianStepOverS {
		sum = k.even(0) / 2
		for i := 1; i <= int(gaussianReach/gaussianStepOverS)+1; i++ {
			z := gaussianStepOverS * float64(i)
			sum += math.Exp(-z*z/2) * k.even(z*s)
		}
		return sum * gaussianStepOverS * math.Exp(-s*s/8) / math.Sqrt(2*math.Pi)
	}
	end := gaussianReach * s
	if s < gaussianHalf {
		end += s * s / 2 // where e^(x/2) moves the bell
	}
	n := min(len(k.table), int(end/gaussianStep)+1)
	z := gaussianStep / s
	z *= -z / 2
	for i, value := range k.table[:n] {
		sum += value * math.Exp(z*float64(i*i))
	}
	return sum * gaussianStep * math.Exp(-s*s/8) / (s * math.Sqrt(2*math.Pi))
}

// gaussianInformation returns C and 1-C at s = 2/σ, from 0 to +Inf: the
// smaller of them by quadrature, and so with full relative accuracy.
func gaussianInformation(s float64) (capacity, equivocation float64) {
	switch {
	case s == 0:
		return 0, 1
	case s > gaussianPerfect:
		return 1, 0
	case s < gaussianHalf:
		capacity = gaussianCapacity.mean(s)
		return capacity, 1 - capacity
	}
	equivocation = gaussianEntropy.mean(s)
	return 1 - equivocation, equivocation
}

// gaussianDispersion returns the variance of the information density in bits²
// at s = 2/σ: about 0, where C² is small beside the second moment, or about
// 1, where (1-C)² is.
func gaussianDispersion(s float64) float64 {
	capacity, equivocation := gaussianInformation(s)
	switch {
	case s == 0 || s > gaussianPerfect:
		return 0
	case s < gaussianHalf:
		return gaussianSquare.mean(s) - capacity*capacity
	}
	return gaussianSquareLoss.mean(s) - equivocation*equivocation
}

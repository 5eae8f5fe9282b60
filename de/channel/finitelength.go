package channel

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mathext"
)

// The normal approximation: the largest rate of a code of n bits that is
// decoded with frame error probability P is about
//
//	R = C - √(V/n) Q⁻¹(P) + t·log₂(n)/n
//
// with the capacity C, the dispersion V and the third term t of the channel
// (Polyanskiy, Poor & Verdú, IEEE Trans. Inf. Theory 56(5), 2010). It is an
// approximation, not a bound: good to a few hundredths of a dB from some
// hundred bits on, and poor where n·R or n·P is not large.

// RateAtLength returns the largest rate, from 0 to 1, of codes of n ≥ 1 bits
// with the frame error probability between 0 and 1.
func RateAtLength(f Dispersed, parameter float64, n int, frameError float64) (float64, error) {
	if err := checkLength(n, frameError); err != nil {
		return 0, err
	}
	r := f.Capacity(parameter) + thirdTerm(f, n)
	if v := f.Dispersion(parameter); v > 0 {
		r += math.Sqrt(v/float64(n)) * mathext.NormalQuantile(frameError)
	}
	return math.Max(0, math.Min(1, r)), nil
}

// FrameErrorAtLength returns the least frame error probability of codes of
// n ≥ 1 bits and the rate, between 0 and 1.
func FrameErrorAtLength(f Dispersed, parameter, rate float64, n int) (float64, error) {
	if err := checkRate(rate); err != nil {
		return 0, err
	}
	if err := checkLength(n, 0.5); err != nil {
		return 0, err
	}
	return tail(marginInDeviations(f, parameter, rate, n)), nil
}

// ParameterAtLength returns the largest channel parameter at which codes of
// n ≥ 1 bits and the rate, between 0 and 1, reach the frame error
// probability, between 0 and 1. It refuses rates at or below the third term,
// log₂(n)/(2n) or 0, where the approximation says nothing.
func ParameterAtLength(f Dispersed, rate float64, n int, frameError float64) (float64, error) {
	if err := checkRate(rate); err != nil {
		return 0, err
	}
	if err := checkLength(n, frameError); err != nil {
		return 0, err
	}
	third := thirdTerm(f, n)
	if rate <= third {
		return 0, fmt.Errorf("rate %v: must be above log₂(n)/(2n) = %.4g, below which the normal approximation at length %d says nothing", rate, third, n)
	}
	// At even odds the rate is C + t·log₂(n)/n. From there on both ways the
	// margin in standard deviations falls as the channel gets worse.
	even, err := f.Inverse(rate - third)
	if err != nil {
		return 0, err
	}
	wanted := -mathext.NormalQuantile(frameError)
	excess := func(parameter float64) float64 {
		return marginInDeviations(f, parameter, rate, n) - wanted
	}
	best, worst := f.Range()
	low, high := even, even
	switch {
	case wanted == 0:
		return even, nil
	case wanted > 0:
		for excess(low) <= 0 {
			high, low = low, best+(low-best)/2
		}
	case math.IsInf(worst, 1):
		for excess(high) >= 0 {
			low, high = high, 2*high
		}
	default:
		for excess(high) >= 0 {
			low, high = high, worst-(worst-high)/2
		}
	}
	// The margin may be infinite at the ends; its arctangent is not.
	return solve(low, high, 0, func(parameter float64) float64 {
		return math.Atan(marginInDeviations(f, parameter, rate, n)) - math.Atan(wanted)
	}), nil
}

// marginInDeviations returns (C + t·log₂(n)/n - R)/√(V/n), whose tail
// probability is the frame error probability.
func marginInDeviations(f Dispersed, parameter, rate float64, n int) float64 {
	margin := f.Capacity(parameter) + thirdTerm(f, n) - rate
	deviation := math.Sqrt(f.Dispersion(parameter) / float64(n))
	if deviation == 0 {
		return math.Copysign(math.Inf(1), margin)
	}
	return margin / deviation
}

func thirdTerm(f Dispersed, n int) float64 {
	return f.ThirdTerm() * math.Log2(float64(n)) / float64(n)
}

func checkLength(n int, frameError float64) error {
	if n < 1 {
		return fmt.Errorf("length %d: must be at least 1", n)
	}
	if !(frameError > 0 && frameError < 1) {
		return fmt.Errorf("frame error probability %v: must lie strictly between 0 and 1", frameError)
	}
	return nil
}

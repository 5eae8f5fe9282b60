package channel

import "math"

// BinaryEntropy returns h(p) = -p log₂ p - (1-p) log₂(1-p) in bits, for p
// from 0 to 1, with full relative accuracy as p tends to 0.
func BinaryEntropy(p float64) float64 {
	if p > 0.5 {
		p = 1 - p
	}
	if p == 0 {
		return 0
	}
	return -(p*math.Log(p) + (1-p)*math.Log1p(-p)) / math.Ln2
}

// InverseBinaryEntropy returns the p from 0 to 1/2 at which BinaryEntropy
// equals the entropy, which is from 0 to 1. Its relative accuracy is full
// both in p, as the entropy tends to 0, and in 1/2-p, as it tends to 1.
func InverseBinaryEntropy(entropy float64) float64 {
	return crossover(1-entropy, entropy)
}

// crossover returns the p from 0 to 1/2 with 1-h(p) = capacity and
// h(p) = entropy. The two add up to 1; the smaller is the one relied upon.
func crossover(capacity, entropy float64) float64 {
	switch {
	case capacity <= 0:
		return 0.5
	case entropy <= 0:
		return 0
	case capacity < entropy:
		// t²/(2 ln 2) ≤ 1-h((1-t)/2) ≤ t²
		low, high := math.Sqrt(capacity), math.Sqrt(2*math.Ln2*capacity)
		t := solveLog(low, math.Min(high, 1), func(t float64) float64 {
			return math.Log(biasCapacity(t) / capacity)
		})
		return (1 - t) / 2
	default:
		// 2p ≤ h(p) ≤ 2√p
		return solveLog(entropy*entropy/4, entropy/2, func(p float64) float64 {
			return math.Log(BinaryEntropy(p) / entropy)
		})
	}
}

// biasCapacity returns 1-h((1-t)/2) in bits, the capacity of the BSC of bias
// t = 1-2p from -1 to 1, with full relative accuracy as t tends to 0, where
// it is the series Σ t^(2k)/(2k(2k-1)) / ln 2.
func biasCapacity(t float64) float64 {
	const (
		seriesBelow = 0.2 // above it the closed form loses less than a digit
		terms       = 12  // 0.04¹² = 2e-17
	)
	t = math.Abs(t)
	switch {
	case t >= 1:
		return 1
	case t > seriesBelow:
		return ((1+t)*math.Log1p(t) + (1-t)*math.Log1p(-t)) / (2 * math.Ln2)
	}
	sum := 0.0
	for k := 2 * terms; k > 0; k -= 2 {
		sum = t * t * (sum + 1/float64(k*(k-1)))
	}
	return sum / math.Ln2
}

// llrCapacity returns 1-h(1/(1+e^x)) in bits, the capacity of the BSC whose
// LLR has magnitude x.
func llrCapacity(x float64) float64 { return biasCapacity(math.Tanh(x / 2)) }

// llrEntropy returns h(1/(1+e^x)) in bits for a magnitude x of the LLR, from
// 0 to +Inf, with full relative accuracy as x grows.
func llrEntropy(x float64) float64 {
	e := math.Exp(-x)
	if e == 0 {
		return 0
	}
	return (math.Log1p(e) + x*e/(1+e)) / math.Ln2
}

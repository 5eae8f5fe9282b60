package optimize

import "math"

// MeanDegreeBound returns the largest ε at which a code of the given rate
// (strictly between 0 and 1) whose check nodes have the given mean degree (at
// least 2) can work on the BEC under any decoder: rate ≤ 1 - ε/(1-(1-ε)^a)
// (Sason & Urbanke, IEEE Trans. Inf. Theory 49(7), 2003, after Shokrollahi,
// 1999; recalled). It is below the Shannon limit 1-rate and tends to it with
// a; 0 if the mean degree is too small for the rate, a(1-rate) ≤ 1.
func MeanDegreeBound(mean, rate float64) float64 {
	if mean*(1-rate) <= 1 {
		return 0
	}
	// ε/(1-(1-ε)^a) rises from 1/a at ε = 0 to 1 at ε = 1.
	holds := func(epsilon float64) bool {
		return epsilon <= (1-rate)*-math.Expm1(mean*math.Log1p(-epsilon))
	}
	low, high := 0., 1-rate
	for {
		middle := low + (high-low)/2
		if middle <= low || middle >= high {
			return low
		}
		if holds(middle) {
			low = middle
		} else {
			high = middle
		}
	}
}

package channel

// LowestBitErrorRate returns the lowest bit error rate that anybody can reach
// at a rate in information bits per channel use, above 0, over a channel of
// the given capacity, from 0 up: the p with R(1-h(p)) = C if R > C, and 0
// otherwise. It is the rate-distortion function of fair bits under the
// separation theorem (Shannon, Coding theorems for a discrete source with a
// fidelity criterion, IRE Nat. Conv. Rec. 7(4), 1959).
func LowestBitErrorRate(rate, capacity float64) float64 {
	if rate <= capacity {
		return 0
	}
	return crossover(capacity/rate, (rate-capacity)/rate)
}

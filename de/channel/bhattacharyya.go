package channel

import "math"

// ParameterAtBhattacharyya returns the largest parameter at which the
// family's Bhattacharyya parameter is at most b, by bisection to the last
// bit; b is from 0 to 1.
func ParameterAtBhattacharyya(f Family, b float64) float64 {
	low, high := f.Range()
	if f.Bhattacharyya(high) <= b {
		return high
	}
	if math.IsInf(high, 1) {
		for high = math.Max(1, 2*low); f.Bhattacharyya(high) <= b; high *= 2 {
			low = high
		}
	}
	for {
		middle := low + (high-low)/2
		if middle <= low || middle >= high {
			return low
		}
		if f.Bhattacharyya(middle) <= b {
			low = middle
		} else {
			high = middle
		}
	}
}

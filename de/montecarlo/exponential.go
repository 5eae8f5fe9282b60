package montecarlo

import "math"

// The check rule needs one exponential and one logarithm per edge, which
// take most of its time. These two have no tables, branches or special cases
// and are exact enough for messages of 24 bits: their errors are below
// exponentialError (relative) and logarithmError (absolute), which the tests
// confirm over the whole range. They are small enough to be compiled in line.
// The coefficients are printed by coefficients_generate.go.
const (
	exponentialError = 2e-10
	logarithmError   = 2e-9
)

// halvings returns 2^(-x) for 0 ≤ x ≤ 1000; exactly 1 for x = 0. With k the
// whole number nearest to -x and r = -x - k it is 2^k·2^r, |r| ≤ 1/2.
func halvings(x float64) float64 {
	// Subtracting from 1.5·2^52 rounds to a whole number, which then stands
	// in the low bits of the difference.
	const shift = 0x1.8p52
	t := shift - x
	r := shift - t - x
	r2 := r * r
	p := 1 + r*0.69314718055994518 + r2*(0.24022650922288846+r*0.055504108839094214+
		r2*(0.0096180566785105549+r*0.0013333502386319621+
			r2*(0.00015461444703038742+r*1.5297323733582509e-05)))
	return math.Float64frombits(math.Float64bits(p) + math.Float64bits(t)<<52)
}

// octaves returns log₂(a/b) for normal positive a ≥ b; exactly 0 for a = b.
// The bits of a float64 read as a whole number are its logarithm to base 2,
// interpolated linearly between powers of 2; so the nearest power k of 2 to
// the ratio is found, without a comparison, by rounding a difference of bits.
// The rest is log₂ m = 2·atanh(s)/ln 2, s = (m-1)/(m+1), with m = a/(b·2^k)
// within a factor 2^±0.5861 of 1, which takes a single division.
func octaves(a, b float64) float64 {
	i := math.Float64bits(b)
	k := int64(math.Float64bits(a)-i+1<<51) >> 52
	b = math.Float64frombits(i + uint64(k)<<52)
	s := (a - b) / (a + b)
	u := s * s
	return float64(k) + s*(2.8853900748197079+u*(0.96180223378934893+u*(0.57639197879900039+u*0.43915510021185211)))
}

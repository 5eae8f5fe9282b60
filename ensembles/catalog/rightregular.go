package catalog

import "tannery/ensembles"

// RightRegular returns the right-regular ensemble with check degree a ≥ 3 and
// N ≥ 2 terms, variable degrees from 2 to N, and its threshold on the erasure
// channel, which is exact.
//
// With α = 1/(a-1) the series 1-(1-x)^α = Σ C(α,i)(-1)^(i+1) xⁱ satisfies
// λ(1-ρ(1-x)) = x for ρ(x) = x^(a-1): a decoding tunnel of no width. Cut off
// after N-1 terms and divided by their sum S it leaves S·λ(1-ρ(1-x)) < x for
// all x, with equality in the limit x → 0: the threshold is S, reached by the
// stability condition (Shokrollahi, New sequences of linear time erasure codes
// approaching the channel capacity, 1999). The terms are all positive and are
// built by their ratio, (i-α)/(i+1).
func RightRegular(a, n int) (ensembles.Ensemble, float64) {
	alpha := 1 / float64(a-1)
	terms := make([]ensembles.Term, 0, n-1)
	sum, coefficient := 0., alpha
	for i := 1; i < n; i++ {
		terms = append(terms, ensembles.Term{Degree: i + 1, Fraction: coefficient})
		sum += coefficient
		coefficient *= (float64(i) - alpha) / float64(i+1)
	}
	return ensembles.Ensemble{
		Lambda: ensembles.Normalize(terms),
		Rho:    ensembles.Distribution{{Degree: a, Fraction: 1}},
	}, sum
}

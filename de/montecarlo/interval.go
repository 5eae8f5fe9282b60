package montecarlo

import "gonum.org/v1/gonum/stat/distuv"

// Rate is an error rate with the ends of its confidence interval.
type Rate struct{ Value, Low, High float64 }

// clopperPearson returns k/n with the confidence interval whose ends are the
// probabilities at which k or more, and k or fewer, successes have half of
// what confidence leaves (Clopper & Pearson, The use of confidence or fiducial
// limits illustrated in the case of the binomial, Biometrika 26(4), 1934). The
// binomial tail is a beta distribution: P(X ≥ k) = I_p(k, n-k+1). Without
// trials the rate is unknown and the interval everything.
func clopperPearson(k, n, confidence float64) Rate {
	if n == 0 {
		return Rate{0, 0, 1}
	}
	tail := (1 - confidence) / 2
	r := Rate{k / n, 0, 1}
	if k > 0 {
		r.Low = distuv.Beta{Alpha: k, Beta: n - k + 1}.Quantile(tail)
	}
	if k < n {
		r.High = distuv.Beta{Alpha: k + 1, Beta: n - k}.Quantile(1 - tail)
	}
	return r
}

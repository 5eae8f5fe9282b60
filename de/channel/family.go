// Package channel describes binary-input memoryless symmetric-output
// channels: their capacity and its inverse, the Bhattacharyya parameter of
// the stability condition, and the distribution of the log-likelihood ratio
// (LLR) with which density evolution starts. LLRs are natural logarithms.
package channel

// Family is a one-parameter family of channels ordered by degradation: a
// larger parameter is a worse channel. It obeys these laws, which the tests
// check over sweeps: Capacity does not increase, Bhattacharyya and
// ErrorProbability do not decrease, and Inverse undoes Capacity.
type Family interface {
	// Name is the name used in commands and files, such as "biawgn".
	Name() string
	// Parameter is the key of the parameter in files, such as "sigma".
	Parameter() string
	// Symbol is the parameter's symbol in text for people, such as "σ".
	Symbol() string
	// Range returns the least and the largest parameter, where capacity
	// tends to 1 and to 0. The largest may be +Inf.
	Range() (best, worst float64)
	// Capacity returns bits per channel use, for a parameter in Range.
	Capacity(parameter float64) float64
	// Inverse returns the parameter at which the capacity equals the rate,
	// which must lie strictly between 0 and 1.
	Inverse(rate float64) (float64, error)
	// Bhattacharyya returns E[e^(-L/2)] for the LLR L of a sent zero, from
	// 0 (perfect) to 1 (useless).
	Bhattacharyya(parameter float64) float64
	// ErrorProbability returns that of a hard decision on one bit, ties
	// counted half: P(L<0) + P(L=0)/2, from 0 to 1/2.
	ErrorProbability(parameter float64) float64
	// Density returns the distribution of the magnitude of the LLR.
	Density(parameter float64) Density
	// SNR returns a quantity proportional to Es/N0 (linear, not dB), so that
	// ratios may be given in dB; ok is false where the family has no noise
	// power, as on the BEC and the BSC.
	SNR(parameter float64) (snr float64, ok bool)
}

// Density is the distribution of the magnitude |L| of an LLR with a symmetric
// density, f(-x) = e^(-x) f(x). Because of the symmetry the magnitude says
// all: given |L| = x the sign is wrong with probability 1/(1+e^x), so the
// channel is a mixture of BSCs. The masses of Atoms and of the continuous
// part together are 1.
type Density struct {
	// Atoms are point masses in increasing order of magnitude. A magnitude
	// of 0 is an erasure; +Inf is a bit known for certain.
	Atoms []Atom
	// PDF is the probability density of the continuous part at x in
	// (0, End), smooth there; nil if there is none.
	PDF func(x float64) float64
	// End is where the support of the continuous part ends; may be +Inf.
	End float64
}

// Atom is a point mass of a Density.
type Atom struct {
	Magnitude float64 // |L|, from 0 to +Inf
	Mass      float64 // probability, from 0 to 1
}

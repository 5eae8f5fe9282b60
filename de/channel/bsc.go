package channel

import "math"

// BSC is the family of binary symmetric channels: a bit is flipped with the
// crossover probability p, from 0 to 1/2.
type BSC struct{}

var _ Family = BSC{}

// Name implements Family.
func (BSC) Name() string { return "bsc" }

// Parameter implements Family.
func (BSC) Parameter() string { return "p" }

// Symbol implements Family.
func (BSC) Symbol() string { return "p" }

// Range implements Family.
func (BSC) Range() (best, worst float64) { return 0, 0.5 }

// Capacity implements Family.
func (BSC) Capacity(p float64) float64 { return biasCapacity(1 - 2*p) }

// Inverse implements Family.
func (BSC) Inverse(rate float64) (float64, error) {
	return crossover(rate, 1-rate), checkRate(rate)
}

// Bhattacharyya implements Family: 2√(p(1-p)).
func (BSC) Bhattacharyya(p float64) float64 { return 2 * math.Sqrt(p*(1-p)) }

// ErrorProbability implements Family.
func (BSC) ErrorProbability(p float64) float64 { return p }

// Density implements Family: one atom at ln((1-p)/p).
func (BSC) Density(p float64) Density {
	return Density{Atoms: []Atom{{Magnitude: magnitude(p), Mass: 1}}}
}

// magnitude returns |L| = ln((1-p)/p), that of a bit with error probability
// p from 0 to 1/2.
func magnitude(p float64) float64 {
	if p > 0.25 {
		return 2 * math.Atanh(1-2*p)
	}
	return math.Log1p(-p) - math.Log(p)
}

// SNR implements Family.
func (BSC) SNR(p float64) (snr float64, ok bool) { return 0, false }

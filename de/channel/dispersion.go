package channel

import "math"

// Dispersed is a family whose channel dispersion is known: the variance of
// the information density, which rules how fast the largest rate approaches
// capacity as the length grows (Polyanskiy, Poor & Verdú, Channel coding rate
// in the finite blocklength regime, IEEE Trans. Inf. Theory 56(5), 2010).
type Dispersed interface {
	Family
	// Dispersion returns V in bits² per channel use, for a parameter in Range.
	Dispersion(parameter float64) float64
	// ThirdTerm returns the factor of log₂(n)/n in the normal approximation.
	ThirdTerm() float64
}

var (
	_ Dispersed = BEC{}
	_ Dispersed = BSC{}
	_ Dispersed = BIAWGN{}
)

// Dispersion implements Dispersed: ε(1-ε).
func (BEC) Dispersion(epsilon float64) float64 { return epsilon * (1 - epsilon) }

// ThirdTerm implements Dispersed. It is 0: on the BEC the largest code has
// nC - √(nV)Q⁻¹(P) + O(1) bits (Polyanskiy, Poor & Verdú 2010, Theorem 53;
// from memory).
func (BEC) ThirdTerm() float64 { return 0 }

// Dispersion implements Dispersed: p(1-p) log₂²((1-p)/p).
func (BSC) Dispersion(p float64) float64 {
	if p == 0 {
		return 0
	}
	d := magnitude(p) / math.Ln2
	return p * (1 - p) * d * d
}

// ThirdTerm implements Dispersed. It is 1/2: on the BSC the largest code has
// nC - √(nV)Q⁻¹(P) + ½log₂n + O(1) bits (Polyanskiy, Poor & Verdú 2010,
// Theorem 52; from memory).
func (BSC) ThirdTerm() float64 { return 0.5 }

// Dispersion implements Dispersed, by quadrature.
func (BIAWGN) Dispersion(sigma float64) float64 { return gaussianDispersion(2 / sigma) }

// ThirdTerm implements Dispersed. It is 1/2, as is usual for this channel.
func (BIAWGN) ThirdTerm() float64 { return 0.5 }

package channel

// BEC is the family of binary erasure channels: a bit is erased with
// probability ε, from 0 to 1, and otherwise known for certain.
type BEC struct{}

var _ Family = BEC{}

// Name implements Family.
func (BEC) Name() string { return "bec" }

// Parameter implements Family.
func (BEC) Parameter() string { return "epsilon" }

// Symbol implements Family.
func (BEC) Symbol() string { return "ε" }

// Range implements Family.
func (BEC) Range() (best, worst float64) { return 0, 1 }

// Capacity implements Family.
func (BEC) Capacity(epsilon float64) float64 { return 1 - epsilon }

// Inverse implements Family.
func (BEC) Inverse(rate float64) (float64, error) { return 1 - rate, checkRate(rate) }

// Bhattacharyya implements Family.
func (BEC) Bhattacharyya(epsilon float64) float64 { return epsilon }

// ErrorProbability implements Family.
func (BEC) ErrorProbability(epsilon float64) float64 { return epsilon / 2 }

// Density implements Family.
func (BEC) Density(epsilon float64) Density { return certain(1 - epsilon) }

// SNR implements Family.
func (BEC) SNR(epsilon float64) (snr float64, ok bool) { return 0, false }

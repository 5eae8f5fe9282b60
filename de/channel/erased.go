package channel

import "fmt"

// Erased is the family of a measured channel whose bits are erased on top
// with probability ε, from 0 (the channel as measured) to 1. Its threshold
// says how many of the bits may be lost.
type Erased struct{ Base Measured }

var _ Family = Erased{}

// Name implements Family: the title of the density.
func (f Erased) Name() string { return f.Base.name() }

// Parameter implements Family.
func (Erased) Parameter() string { return "epsilon" }

// Symbol implements Family.
func (Erased) Symbol() string { return "ε" }

// Range implements Family.
func (Erased) Range() (best, worst float64) { return 0, 1 }

// Capacity implements Family.
func (f Erased) Capacity(epsilon float64) float64 { return (1 - epsilon) * f.Base.Capacity() }

// Inverse implements Family; it refuses rates above the capacity of the base.
func (f Erased) Inverse(rate float64) (float64, error) {
	capacity, err := f.Base.checkRate(rate)
	if err != nil {
		return 0, err
	}
	return (capacity - rate) / capacity, nil
}

// checkRate returns the capacity, and an error if the rate is above it.
func (m Measured) checkRate(rate float64) (capacity float64, err error) {
	capacity = m.Capacity()
	if err := checkRate(rate); err != nil {
		return capacity, err
	}
	if rate > capacity {
		return capacity, fmt.Errorf("rate %v: must be at most %.9g, the capacity of %s as measured", rate, capacity, m.name())
	}
	return capacity, nil
}

// Bhattacharyya implements Family.
func (f Erased) Bhattacharyya(epsilon float64) float64 {
	return (1-epsilon)*f.Base.Bhattacharyya() + epsilon
}

// ErrorProbability implements Family.
func (f Erased) ErrorProbability(epsilon float64) float64 {
	return (1-epsilon)*f.Base.ErrorProbability() + epsilon/2
}

// Density implements Family.
func (f Erased) Density(epsilon float64) Density {
	var erased Measured
	erased.add(0, epsilon)
	for _, a := range f.Base.atoms {
		erased.add(a.Magnitude, (1-epsilon)*a.Mass)
	}
	return Density{Atoms: erased.atoms}
}

// SNR implements Family.
func (Erased) SNR(epsilon float64) (snr float64, ok bool) { return 0, false }

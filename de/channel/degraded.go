package channel

import "math"

// Degraded is the family of a measured channel followed by a BSC of crossover
// probability p, from 0 (the channel as measured) to 1/2: each of the BSCs of
// which it is a mixture, of crossover probability q, becomes one of
// q(1-p) + p(1-q). Its threshold says how many of the hard decisions may be
// turned while their reliabilities are left in place.
type Degraded struct{ Base Measured }

var _ Family = Degraded{}

// Name implements Family: the title of the density.
func (f Degraded) Name() string { return f.Base.name() }

// Parameter implements Family.
func (Degraded) Parameter() string { return "p" }

// Symbol implements Family.
func (Degraded) Symbol() string { return "p" }

// Range implements Family.
func (Degraded) Range() (best, worst float64) { return 0, 0.5 }

// Capacity implements Family.
func (f Degraded) Capacity(p float64) float64 {
	return f.Base.mean(func(x float64) float64 { return biasCapacity((1 - 2*p) * math.Tanh(x/2)) })
}

// Inverse implements Family; it refuses rates above the capacity of the base.
func (f Degraded) Inverse(rate float64) (float64, error) {
	capacity, err := f.Base.checkRate(rate)
	if err != nil {
		return 0, err
	}
	if rate == capacity {
		return 0, nil
	}
	// In the bias t = 1-2p; the capacity is at most t².
	bias := solveLog(math.Sqrt(rate), 1, func(t float64) float64 {
		return math.Log(f.Capacity((1-t)/2) / rate)
	})
	return (1 - bias) / 2, nil
}

// Bhattacharyya implements Family.
func (f Degraded) Bhattacharyya(p float64) float64 {
	return f.Base.mean(func(x float64) float64 { return BSC{}.Bhattacharyya(cascade(errorAt(x), p)) })
}

// ErrorProbability implements Family.
func (f Degraded) ErrorProbability(p float64) float64 {
	return cascade(f.Base.ErrorProbability(), p)
}

// cascade returns the crossover probability of two BSCs in a row.
func cascade(q, p float64) float64 { return q*(1-p) + p*(1-q) }

// Density implements Family.
func (f Degraded) Density(p float64) Density {
	if p == 0 {
		return f.Base.Density()
	}
	var degraded Measured
	for _, a := range f.Base.atoms {
		bias := (1 - 2*p) * math.Tanh(a.Magnitude/2)
		x := 2 * math.Atanh(bias)
		if bias > 0.5 {
			x = magnitude(cascade(errorAt(a.Magnitude), p))
		}
		// Rounding may bring two of them out of order, by a unit at most.
		if n := len(degraded.atoms); n > 0 {
			x = math.Max(x, degraded.atoms[n-1].Magnitude)
		}
		degraded.add(x, a.Mass)
	}
	return Density{Atoms: degraded.atoms}
}

// SNR implements Family.
func (Degraded) SNR(p float64) (snr float64, ok bool) { return 0, false }

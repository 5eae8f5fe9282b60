package montecarlo

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
)

func TestClopperPearson(t *testing.T) {
	for _, test := range []struct {
		k, n      float64
		low, high float64
	}{
		// Closed forms: no success, 1-(α/2)^(1/n); all, (α/2)^(1/n).
		{0, 10, 0, 1 - math.Pow(0.025, 0.1)},
		{10, 10, math.Pow(0.025, 0.1), 1},
		// One of two: the roots of (1-p)² = .975 and p² = .975.
		{1, 2, 1 - math.Sqrt(0.975), math.Sqrt(0.975)},
		{0, 0, 0, 1},
	} {
		r := clopperPearson(test.k, test.n, 0.95)
		if math.Abs(r.Low-test.low) > 1e-9 || math.Abs(r.High-test.high) > 1e-9 {
			t.Errorf("%g of %g: %g to %g, want %g to %g", test.k, test.n, r.Low, r.High, test.low, test.high)
		}
	}
}

// The ends are defined by binomial tails; gonum's binomial distribution
// evaluates them by another route, for moderate numbers, and the Poisson
// distribution is its limit for small rates.
func TestClopperPearsonTails(t *testing.T) {
	for _, confidence := range []float64{0.9, 0.95, 0.99} {
		tail := (1 - confidence) / 2
		for _, n := range []float64{1, 7, 100, 12345, 1e9} {
			for _, k := range []float64{0, 1, 3, 50, 100} {
				if k > n {
					continue
				}
				r := clopperPearson(k, n, confidence)
				above, below := 0.0, 0.0
				if n <= 12345 {
					above = distuv.Binomial{N: n, P: r.Low}.CDF(k - 1)
					below = distuv.Binomial{N: n, P: r.High}.CDF(k)
				} else {
					above = distuv.Poisson{Lambda: n * r.Low}.CDF(k - 1)
					below = distuv.Poisson{Lambda: n * r.High}.CDF(k)
				}
				if k > 0 && math.Abs(1-above-tail) > 1e-6 {
					t.Errorf("%g of %g at %g: upper tail %g at the lower end %g, want %g", k, n, confidence, 1-above, r.Low, tail)
				}
				if k < n && math.Abs(below-tail) > 1e-6 {
					t.Errorf("%g of %g at %g: lower tail %g at the upper end %g, want %g", k, n, confidence, below, r.High, tail)
				}
			}
		}
	}
}

// Bits that fail in whole frames are worth no more than frames.
func TestBitErrorRateOfClusters(t *testing.T) {
	m := Measurement{Length: 1000, Counts: Counts{Frames: 10000, FrameErrors: 50, BitErrors: 50 * 1000, BitErrorSquares: 50 * 1000 * 1000}}
	frames, bits := m.FrameErrorRate(0.95), m.BitErrorRate(0.95)
	if math.Abs(bits.Low/frames.Low-1) > 0.01 || math.Abs(bits.High/frames.High-1) > 0.01 || bits.Value != frames.Value {
		t.Errorf("whole frames: bits %+v, want as for frames, %+v", bits, frames)
	}
	// Errors spread evenly: as for independent bits.
	m.Counts = Counts{Frames: 1000, FrameErrors: 1000, BitErrors: 10000, BitErrorSquares: 1000 * 109}
	independent := clopperPearson(10000, 1e6, 0.95)
	if bits := m.BitErrorRate(0.95); math.Abs(bits.Low/independent.Low-1) > 0.01 || math.Abs(bits.High/independent.High-1) > 0.01 {
		t.Errorf("independent bits: %+v, want about %+v", bits, independent)
	}
	m.Counts = Counts{Frames: 100}
	if bits, frames := m.BitErrorRate(0.95), m.FrameErrorRate(0.95); bits != frames {
		t.Errorf("no errors: bits %+v, frames %+v; want the same", bits, frames)
	}
	m.Counts = Counts{Frames: 1, FrameErrors: 1, BitErrors: 30, BitErrorSquares: 900}
	if bits := m.BitErrorRate(0.95); !(bits.Low < 0.03 && bits.High == 1 || bits.High > 0.9) {
		t.Errorf("a single frame: %+v, want nearly everything", bits)
	}
}

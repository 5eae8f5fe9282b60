package channel

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
)

// TestNormalApproximation checks values of the approximation of Polyanskiy,
// Poor & Verdú (2010) for BI-AWGN, computed by an independent program to the
// digits kept.
func TestNormalApproximation(t *testing.T) {
	f := BIAWGN{}
	if c := f.Capacity(1); math.Abs(c-.485944) > 5.1e-7 {
		t.Errorf("C = %v; want .485944", c)
	}
	if v := f.Dispersion(1); math.Abs(v-.659681) > 5.1e-7 {
		t.Errorf("V = %v; want .659681", v)
	}
	for _, c := range []struct {
		n    int
		rate float64
	}{{128, .29144}, {500, .38266}, {1000, .41156}, {2000, .43256}, {10000, .46151}} {
		if rate, err := RateAtLength(f, 1, c.n, 1e-3); err != nil || math.Abs(rate-c.rate) > 5.1e-6 {
			t.Errorf("n = %d: rate %v, %v; want %v", c.n, rate, err, c.rate)
		}
	}
	for _, c := range []struct {
		n    int
		ebN0 float64
	}{{128, 2.919}, {512, 1.731}, {1024, 1.319}, {2048, 1.009}, {8192, .612}, {64800, .342}} {
		sigma, err := ParameterAtLength(f, 0.5, c.n, 1e-4)
		if db := EbN0DB(sigma, 0.5); err != nil || math.Abs(db-c.ebN0) > 5.1e-4 {
			t.Errorf("n = %d: Eb/N0 = %v dB, %v; want %v", c.n, db, err, c.ebN0)
		}
	}
}

// TestNormalApproximationOfBEC compares with the converse for the BEC: a code
// of k bits fails with probability at least that of more than n-k erasures,
// times 1-2^(n-k-e) for e of them (Polyanskiy, Poor & Verdú 2010, Theorem 38;
// from memory). Without a third term the approximation comes within a few
// parts in a thousand of it.
func TestNormalApproximationOfBEC(t *testing.T) {
	const n, epsilon, frameError = 1000, 0.5, 1e-3
	converse := func(k int) float64 {
		erasures := distuv.Binomial{N: n, P: epsilon}
		sum := 0.0
		for e := n - k + 1; e <= n; e++ {
			sum += erasures.Prob(float64(e)) * -math.Expm1(float64(n-k-e)*math.Ln2)
		}
		return sum
	}
	k := 0
	for converse(k+1) <= frameError {
		k++
	}
	rate, err := RateAtLength(BEC{}, epsilon, n, frameError)
	if err != nil || math.Abs(rate-float64(k)/n) > 0.002 {
		t.Errorf("rate %v, %v; the converse allows %v", rate, err, float64(k)/n)
	}
}

// TestDispersion compares with the variance of the information density
// 1-log₂(1+e^(-L)) over the LLR density.
func TestDispersion(t *testing.T) {
	for _, f := range []Dispersed{BEC{}, BSC{}, BIAWGN{}} {
		parameters, _ := sweep(t, f, 1)
		for _, x := range parameters {
			c := f.Capacity(x)
			squared := func(l float64) float64 {
				i := 1 - (math.Max(-l, 0)+math.Log1p(math.Exp(-math.Abs(l))))/math.Ln2
				return (i - c) * (i - c)
			}
			want := meanOver(f.Density(x), func(l float64) float64 {
				if math.IsInf(l, 1) {
					return squared(l)
				}
				return squared(l)/(1+math.Exp(-l)) + squared(-l)/(1+math.Exp(l))
			})
			if got := f.Dispersion(x); math.Abs(got-want) > 1e-12 {
				t.Errorf("%s at %v: V = %v; want %v", f.Name(), x, got, want)
			}
		}
		best, worst := f.Range()
		if a, b := f.Dispersion(best), f.Dispersion(worst); a != 0 || b != 0 {
			t.Errorf("%s: V = %v at the best, %v at the worst parameter; want 0", f.Name(), a, b)
		}
	}
}

// TestFiniteLengthInverses: rate, parameter and frame error probability are
// one relation, and a worse channel never helps.
func TestFiniteLengthInverses(t *testing.T) {
	for _, f := range []Dispersed{BEC{}, BSC{}, BIAWGN{}} {
		for _, n := range []int{30, 128, 2000, 64800, 10_000_000} {
			for _, rate := range []float64{0.1, 0.25, 0.5, 0.9, 0.99} {
				if rate <= thirdTerm(f, n) {
					continue
				}
				previous := -1.0
				for _, frameError := range []float64{1e-12, 1e-6, 1e-3, 0.1, 0.5, 0.9, 0.999} {
					at := fmt.Sprintf("%s, n = %d, R = %v, P = %v", f.Name(), n, rate, frameError)
					x, err := ParameterAtLength(f, rate, n, frameError)
					if err != nil {
						t.Errorf("%s: %v", at, err)
						continue
					}
					if x < previous {
						t.Errorf("%s: parameter %v, but %v for fewer errors", at, x, previous)
					}
					previous = x
					// P is steep: a last bit of the parameter moves it by
					// about √n·1e-16 deviations.
					p, err := FrameErrorAtLength(f, x, rate, n)
					if err != nil || math.Abs(p/frameError-1) > 1e-8 {
						t.Errorf("%s: parameter %v gives P = %v, %v", at, x, p, err)
					}
					r, err := RateAtLength(f, x, n, frameError)
					if err != nil || math.Abs(r-rate) > 1e-12 {
						t.Errorf("%s: parameter %v gives R = %v, %v", at, x, r, err)
					}
				}
			}
		}
	}
}

func TestFiniteLengthRefusals(t *testing.T) {
	f := BIAWGN{}
	for _, c := range []struct {
		rate       float64
		n          int
		frameError float64
	}{
		{0, 1000, 1e-3}, {1, 1000, 1e-3}, {math.NaN(), 1000, 1e-3},
		{0.5, 0, 1e-3}, {0.5, 1000, 0}, {0.5, 1000, 1}, {0.5, 1000, math.NaN()},
		{0.004, 1000, 1e-3}, // below log₂(n)/(2n) = .00498
	} {
		if x, err := ParameterAtLength(f, c.rate, c.n, c.frameError); err == nil {
			t.Errorf("ParameterAtLength at %+v = %v; want an error", c, x)
		}
	}
	if _, err := RateAtLength(f, 1, 0, 0.1); err == nil {
		t.Error("RateAtLength accepts length 0")
	}
	if _, err := FrameErrorAtLength(f, 1, 1.5, 100); err == nil {
		t.Error("FrameErrorAtLength accepts rate 1.5")
	}
}

func BenchmarkParameterAtLength(b *testing.B) {
	for b.Loop() {
		_, _ = ParameterAtLength(BIAWGN{}, 0.5, 2000, 1e-4)
	}
}

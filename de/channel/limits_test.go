package channel

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// TestShannonLimits checks the Shannon limits of BI-AWGN against values
// computed from the formula of the capacity by an independent program, to
// the digits kept.
func TestShannonLimits(t *testing.T) {
	for _, limit := range []struct{ rate, sigma, digits, ebN0 float64 }{
		{.02, 5.96402, 1e-5, -1.5314},
		{.1, 2.5927695, 1e-7, -1.28558},
		{.25, 1.5495941, 1e-7, -.79406},
		{1. / 3, 1.2966274, 1e-7, -.49539},
		{.4, 1.14914, 1e-5, -.2383},
		{.5, .9786941, 1e-7, .18706},
		{2. / 3, .7665776, 1e-7, 1.05949},
		{.75, .6770735, 1e-7, 1.62637},
		{.8, .6250865, 1e-7, 2.04000},
		{.9, .5157942, 1e-7, 3.19775},
	} {
		sigma, err := BIAWGN{}.Inverse(limit.rate)
		if err != nil || math.Abs(sigma-limit.sigma) > limit.digits*0.51 {
			t.Errorf("rate %v: limit σ = %.9f, %v; want %v", limit.rate, sigma, err, limit.sigma)
		}
		digits := 1e-5
		if limit.digits == 1e-5 {
			digits = 1e-4
		}
		if db := EbN0DB(sigma, limit.rate); math.Abs(db-limit.ebN0) > digits*0.51 {
			t.Errorf("rate %v: limit Eb/N0 = %.6f dB; want %v", limit.rate, db, limit.ebN0)
		}
	}
}

// TestCapacityFromLikelihoods computes capacities from the channels'
// likelihoods p(y|±1), without LLR densities: C = 1 - ∫ p(y|1) log₂(1 +
// p(y|-1)/p(y|1)) dy.
func TestCapacityFromLikelihoods(t *testing.T) {
	legendre := func(k func(float64) float64, cuts ...float64) float64 {
		sum := 0.0
		for i := 1; i < len(cuts); i++ {
			sum += quad.Fixed(k, cuts[i-1], cuts[i], 80, quad.Legendre{}, 1)
		}
		return sum
	}
	gaussian := func(amplitude, sigma float64) float64 {
		// y = amplitude + σz; the LLR is 2·amplitude·y/σ²
		return 1 - legendre(func(z float64) float64 {
			l := 2 * amplitude * (amplitude + sigma*z) / (sigma * sigma)
			return math.Exp(-z*z/2) / math.Sqrt(2*math.Pi) * math.Log1p(math.Exp(-l)) / math.Ln2
		}, -20, -8, -4, 0, 4, 10)
	}
	for _, x := range []float64{0.3, 0.5, 0.7, 1, 1.5, 2.9, 3.1, 6} {
		if got, want := (BIAWGN{}).Capacity(x), gaussian(1, x); math.Abs(got-want) > 1e-12 {
			t.Errorf("biawgn, σ = %v: %v; want %v", x, got, want)
		}
		want := legendre(func(a float64) float64 { return 2 * a * math.Exp(-a*a) * gaussian(a, x) }, 0, 1, 3, 7)
		if got := (Rayleigh{}).Capacity(x); math.Abs(got-want) > 1e-11 {
			t.Errorf("rayleigh, σ = %v: %v; want %v", x, got, want)
		}
		want = 1 - legendre(func(y float64) float64 {
			l := (math.Abs(y+1) - math.Abs(y-1)) / x
			return math.Exp(-math.Abs(y-1)/x) / (2 * x) * math.Log1p(math.Exp(-l)) / math.Ln2
		}, -1-40*x, -1-10*x, -1, 1, 1+10*x, 1+40*x)
		if got := (Laplace{}).Capacity(x); math.Abs(got-want) > 1e-12 {
			t.Errorf("laplace, b = %v: %v; want %v", x, got, want)
		}
	}
}

// TestLowSNR: with soft decisions C ln 2 → Es/N0 as the signal vanishes,
// whatever the fading (Verdú, Spectral efficiency in the wideband regime,
// IEEE Trans. Inf. Theory 48(6), 2002), and for additive noise in general half
// the Fisher information, which is 1/b² for Laplace noise (common practice).
// The relative error must vanish with the signal, far below where a
// subtraction from 1 loses every digit.
func TestLowSNR(t *testing.T) {
	for _, x := range []float64{1e4, 1e6, 1e9, 1e12, 8.5e149} {
		for _, c := range []struct {
			f     Family
			limit float64
			slope float64 // relative error over 1/x, generous
		}{
			{BIAWGN{}, 1 / (2 * x * x * math.Ln2), 1},
			{Rayleigh{}, 1 / (2 * x * x * math.Ln2), 2},
			{Laplace{}, 1 / (2 * x * x * math.Ln2), 1},
		} {
			if got := c.f.Capacity(x); math.Abs(got/c.limit-1) > c.slope/x+1e-14 {
				t.Errorf("%s at %v: capacity %v; want about %v", c.f.Name(), x, got, c.limit)
			}
			rate := c.f.Capacity(x)
			if back, err := c.f.Inverse(rate); err != nil || math.Abs(back/x-1) > 1e-13 {
				t.Errorf("%s: Inverse(%v) = %v, %v; want %v", c.f.Name(), rate, back, err, x)
			}
		}
		// 1-h((1-t)/2) → t²/(2 ln 2)
		tilt := 1 / x
		if got, want := (BSC{}).Capacity((1-tilt)/2), tilt*tilt/(2*math.Ln2); x < 1e7 && math.Abs(got/want-1) > 1e-7 {
			t.Errorf("bsc of bias %v: capacity %v; want about %v", tilt, got, want)
		}
	}
}

// TestHighSNR compares 1-C with its asymptote where 1 minus the rounded
// capacity has no digit left.
func TestHighSNR(t *testing.T) {
	// Laplace: e^(-a)·π/2 + e^(-2a)(1-2)… over ln 2 (from the closed form).
	a := 200.0
	_, got := laplaceInformation(a)
	if want := math.Exp(-a) * math.Pi / 2 / math.Ln2; math.Abs(got/want-1) > 1e-12 {
		t.Errorf("laplace: 1-C = %v; want %v", got, want)
	}
	// BI-AWGN: g is flat where cosh(x/2)H(x) lives, whose integral over
	// x > 0 is found by the general quadrature.
	kernel := integrate(func(x float64) float64 { return 2 * math.Cosh(x/2) * llrEntropy(x) }, 200)
	s := 60.0
	_, got = gaussianInformation(s)
	want := math.Exp(-s*s/8) / (s * math.Sqrt(2*math.Pi)) * kernel
	if math.Abs(got/want-1) > 20/(s*s) {
		t.Errorf("biawgn: 1-C = %v; want about %v", got, want)
	}
	// Rayleigh: 1-C → α ∫ 2cosh(x/2)e^(-x/2) H(x) dx with α → 1/(4γ).
	gamma := 1e12
	_, got = rayleighInformation(gamma)
	want = integrate(func(x float64) float64 { return (1 + math.Exp(-x)) * llrEntropy(x) }, 200) / (4 * gamma)
	if math.Abs(got/want-1) > 1e-11 {
		t.Errorf("rayleigh: 1-C = %v; want about %v", got, want)
	}
}

func TestUnits(t *testing.T) {
	// common practice: at σ = 1, Es/N0 = 1/2 = -3.0103 dB, and at rate 1/2
	// Eb/N0 = 0 dB
	if got := EsN0DB(1); math.Abs(got+3.010299956639812) > 1e-14 {
		t.Errorf("Es/N0 at σ = 1: %v dB", got)
	}
	if got := EbN0DB(1, 0.5); got != 0 {
		t.Errorf("Eb/N0 at σ = 1 and rate 1/2: %v dB", got)
	}
	for _, sigma := range []float64{1e-3, 0.5, 0.97869, 2, 1e4} {
		for _, rate := range []float64{0.01, 0.5, 1} {
			for i, back := range []float64{
				SigmaFromEsN0(EsN0(sigma)), SigmaFromEbN0(EbN0(sigma, rate), rate),
				SigmaFromEsN0DB(EsN0DB(sigma)), SigmaFromEbN0DB(EbN0DB(sigma, rate), rate),
			} {
				if math.Abs(back/sigma-1) > 1e-14 {
					t.Errorf("conversion %d at σ = %v, rate %v comes back as %v", i, sigma, rate, back)
				}
			}
		}
		if snr, ok := (BIAWGN{}).SNR(sigma); !ok || snr != EsN0(sigma) {
			t.Errorf("SNR at σ = %v: %v, %v", sigma, snr, ok)
		}
	}
}

package de

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// regularGaussian holds thresholds of regular ensembles under the Gaussian
// approximation. Printed: with the published fit of φ (Chung, Richardson &
// Urbanke, IEEE Trans. Inf. Theory 47(2), 2001, recalled). Exact: with φ by
// quadrature (computed independently).
var regularGaussian = []struct {
	dv, dc         int
	printed, exact float64
}{
	{3, 4, 1.2517, 1.2491}, {3, 5, 1.0003, .9973}, {3, 6, .8747, .8719},
	{3, 9, .7051, .7031}, {3, 12, .6297, .6284}, {4, 6, 1.0035, .9997},
	{4, 8, .8323, .8295}, {4, 10, .7440, .7416}, {5, 10, .7910, .7869},
}

func TestGaussianRegular(t *testing.T) {
	for _, test := range regularGaussian {
		got, err := GaussianEngine{}.Threshold(context.Background(), ensembles.Regular(test.dv, test.dc), channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		// One unit of the last digit: the list is cut off rather than rounded.
		if math.Abs(got.Value-test.exact) > 1e-4 {
			t.Errorf("(%d,%d): σ = %.7f, want %.4f", test.dv, test.dc, got.Value, test.exact)
		}
		if len(got.Critical) != 1 || got.Critical[0].Slack > 1e-12 {
			t.Errorf("(%d,%d): critical %v, want one with no slack", test.dv, test.dc, got.Critical)
		}
	}
}

// convergesGaussian evolves the approximation step by step, the second
// method. Success is declared at r = e^(-40), below which only the stability
// condition can fail.
func convergesGaussian(e ensembles.Ensemble, sigma float64, iterations int) bool {
	s := 2 / (sigma * sigma)
	var u, last float64
	for range iterations {
		l, _, _ := variableExponent(e.Lambda, s, u)
		if l > 40 {
			return true
		}
		if l <= last {
			return false
		}
		last = l
		u, _ = gaussianCheck(e.Rho, l)
	}
	return false
}

func TestGaussianAgainstIteration(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for range 400 {
		e := randomEnsemble(r, 4+int(math.Pow(10, 1+2*r.Float64())), 4+int(math.Pow(10, 1.5*r.Float64())))
		if e.DesignRate() < .01 {
			continue
		}
		got, err := GaussianEngine{}.Threshold(context.Background(), e, channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		if math.IsInf(got.Value, 1) {
			if len(got.Warnings) == 0 || !convergesGaussian(e, 1e3, 200_000) {
				t.Errorf("%v: σ = +Inf without a warning or convergence", e)
			}
			continue
		}
		const relative = 1e-6
		bound := StabilityOf(e, channel.BIAWGN{}, 1).Bound
		if got.Value > bound {
			t.Errorf("%v: σ = %.9f, above the stability bound %.9f", e, got.Value, bound)
		}
		if low := got.Value * (1 - relative); !convergesGaussian(e, low, 200_000) {
			t.Errorf("%v: iteration stalls at σ = %.9f below the threshold", e, low)
		}
		if high := got.Value * (1 + relative); high < bound && convergesGaussian(e, high, 200_000) {
			t.Errorf("%v: iteration converges at σ = %.9f above the threshold", e, high)
		}
	}
}

// The fit reproduces the printed table.
func TestGaussianFitRegular(t *testing.T) {
	for _, test := range regularGaussian {
		got, err := GaussianFitEngine{}.Threshold(context.Background(), ensembles.Regular(test.dv, test.dc), channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("(%d,%d): σ = %.7f ± %.2g, printed %.4f; %d steps", test.dv, test.dc, got.Value, got.Uncertainty, test.printed, got.Iterations)
		if math.Abs(got.Value-test.printed) > 1.001e-4 {
			t.Errorf("(%d,%d): σ = %.7f, printed %.4f", test.dv, test.dc, got.Value, test.printed)
		}
	}
}

// Long evolutions converge just below the threshold and stall just above.
func TestGaussianSharp(t *testing.T) {
	for _, e := range []ensembles.Ensemble{
		ensembles.Regular(3, 6), ensembles.Regular(4, 8),
		{Lambda: distribution(t, "2:0.2,3:0.25,4:0.1,20:0.45"), Rho: distribution(t, "8:1")},
	} {
		const relative = 1e-8
		got, err := GaussianEngine{}.Threshold(context.Background(), e, channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		if !convergesGaussian(e, got.Value*(1-relative), 2_000_000) || convergesGaussian(e, got.Value*(1+relative), 2_000_000) {
			t.Errorf("%v: σ = %.12f, iteration is not within %g", e, got.Value, relative)
		}
	}
}

func BenchmarkGaussian(b *testing.B) {
	for _, test := range benchmarked {
		b.Run(test.name, func(b *testing.B) {
			benchmarkThreshold(b, GaussianEngine{}, ensembles.Ensemble{
				Lambda: distribution(b, test.lambda), Rho: distribution(b, test.rho)}, channel.BIAWGN{})
		})
	}
}

func BenchmarkGaussianFit(b *testing.B) {
	benchmarkThreshold(b, GaussianFitEngine{}, ensembles.Regular(3, 6), channel.BIAWGN{})
}

// Where checks of degree 2 pass on what few messages say, the approximation
// never stops: rounding must not be taken for a threshold.
func TestGaussianWithoutEnd(t *testing.T) {
	got, err := GaussianEngine{}.Threshold(context.Background(), ensembles.Regular(2, 2), channel.BIAWGN{})
	if err != nil || !math.IsInf(got.Value, 1) || len(got.Warnings) == 0 {
		t.Errorf("%v, %v; want no end and a warning", got, err)
	}
}

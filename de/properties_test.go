package de

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Hundreds of random ensembles on every channel: the threshold is at most the
// Shannon limit at the design rate and at most the stability bound, says the
// same when it is found again, and is no better than that of maximum a
// posteriori decoding allows on the BEC.
func TestThresholdProperties(t *testing.T) {
	r := rand.New(rand.NewPCG(51, 52))
	families := []channel.Family{channel.BEC{}, channel.BSC{}, channel.BIAWGN{}, channel.Laplace{}, channel.Rayleigh{}, channel.Erased{Base: measured(t)}}
	count := 240
	if testing.Short() {
		count = 48
	}
	for i := range count {
		e, f := varied(r), families[i%len(families)]
		engine := Engine(QuantizedEngine{})
		if f.Name() == bec && i%2 == 0 {
			engine = ExactEngine{}
		}
		got, err := engine.Threshold(context.Background(), e, f)
		if err != nil {
			t.Fatal(err)
		}
		limit, err := f.Inverse(e.DesignRate())
		if err != nil {
			// No channel of the family is good enough.
			if best, _ := f.Range(); got.Value != best {
				t.Errorf("%s, λ %s, ρ %s: threshold %v where capacity never suffices", f.Name(), e.Lambda, e.Rho, got.Value)
			}
			continue
		}
		if !(got.Value <= limit) {
			t.Errorf("%s, λ %s, ρ %s: threshold %.9g above the Shannon limit %.9g", f.Name(), e.Lambda, e.Rho, got.Value, limit)
		}
		if bound := StabilityOf(e, f, got.Value).Bound; !(got.Value <= bound*(1+1e-12)) {
			t.Errorf("%s, λ %s, ρ %s: threshold %.9g above the stability bound %.9g", f.Name(), e.Lambda, e.Rho, got.Value, bound)
		}
		if i%10 == 0 {
			again, err := engine.Threshold(context.Background(), e, f)
			if err != nil || again.Value != got.Value || again.Uncertainty != got.Uncertainty {
				t.Errorf("%s, λ %s, ρ %s: %v ± %v, then %v ± %v", f.Name(), e.Lambda, e.Rho, got.Value, got.Uncertainty, again.Value, again.Uncertainty)
			}
		}
	}
}

// gaussianDistance is how far the Gaussian approximation may be from exact
// density evolution, as a fraction of the threshold: Chung, Richardson &
// Urbanke (IEEE Trans. Inf. Theory 47(2), 2001; recalled) found it within 0.3 %
// to 1.2 % for regular ensembles, and less close the larger the degrees of
// irregular ones; published comparisons stay below 5 %.
const gaussianDistance = .05

// The Gaussian approximation is near the truth for random ensembles with
// variable degrees to 20 and check degrees of 4 or more.
func TestGaussianNearQuantized(t *testing.T) {
	r := rand.New(rand.NewPCG(53, 54))
	worst := 0.0
	for done := 0; done < 60; {
		e := randomEnsemble(r, 20, 12)
		if e.Rho.Min() < 4 || e.DesignRate() < .1 {
			continue
		}
		done++
		exact, err := QuantizedEngine{}.Threshold(context.Background(), e, channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		approximate, err := GaussianEngine{}.Threshold(context.Background(), e, channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		off := math.Abs(approximate.Value/exact.Value - 1)
		worst = max(worst, off)
		if off > gaussianDistance {
			t.Errorf("λ %s, ρ %s: %.6g by the approximation, %.6g exactly", e.Lambda, e.Rho, approximate.Value, exact.Value)
		}
	}
	t.Logf("at most %.3g of the threshold", worst)
}

// The threshold of exported counts differs from the profile's by what rounding
// moves: a change of the fractions by δ in all changes it by no more than some
// multiples of δ.
func TestExportedThresholds(t *testing.T) {
	const perChange = 3
	r := rand.New(rand.NewPCG(55, 56))
	worst := 0.0
	for done := 0; done < 200; {
		e := randomEnsemble(r, 30, 12)
		length := 500 << r.IntN(8)
		realization, err := ensembles.Realize(e, length, nil)
		if err != nil {
			continue // no positive rate, or too short for the largest degrees
		}
		done++
		if err := realization.Validate(); err != nil {
			t.Errorf("λ %s, ρ %s, length %d: %v", e.Lambda, e.Rho, length, err)
		}
		rounded := realization.Ensemble()
		change := 0.0
		for _, pair := range [][2]ensembles.Distribution{{e.Lambda, rounded.Lambda}, {e.Rho, rounded.Rho}} {
			for degree := 1; degree <= max(pair[0].Max(), pair[1].Max()); degree++ {
				change += math.Abs(pair[0].Fraction(degree) - pair[1].Fraction(degree))
			}
		}
		before, after := erasureThreshold(t, e), erasureThreshold(t, rounded)
		off := math.Abs(after.Value/before.Value - 1)
		worst = max(worst, off/max(change, 1e-9))
		if off > perChange*change+1e-9 {
			t.Errorf("λ %s, ρ %s, length %d: threshold %.9g became %.9g, fractions changed by %.3g", e.Lambda, e.Rho, length, before.Value, after.Value, change)
		}
	}
	t.Logf("at most %.3g of the change", worst)
}

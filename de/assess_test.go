package de

import (
	"context"
	"math"
	"strings"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Gaps from the published values: (3,6) on the BEC, .4294398 (computed) from
// 1/2; on BI-AWGN σ = .8809 (Richardson & Urbanke 2001, recalled) from
// .9786941 (computed): 20 log₁₀ of the ratio.
func TestAssess(t *testing.T) {
	e := ensembles.Regular(3, 6)
	a, err := Assess(e, channel.BEC{}, Threshold{Value: .4294398})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(a.DesignRate-.5) > 1e-15 || math.Abs(a.Limit-.5) > 1e-15 || a.Gap.HasDB ||
		math.Abs(a.Gap.Parameter-.0705602) > 1e-12 || math.Abs(a.Gap.Rate-.0705602) > 1e-12 {
		t.Errorf("BEC: %+v", a)
	}
	if !math.IsInf(a.Stability.Bound, 1) || a.Stability.Margin != 1 {
		t.Errorf("BEC: stability %+v, want none without degree 2", a.Stability)
	}
	a, err = Assess(e, channel.BIAWGN{}, Threshold{Value: .8809})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(a.Limit-.9786941) > 0.51e-7 || math.Abs(a.Gap.Parameter-.0977941) > 1e-7 ||
		!a.Gap.HasDB || math.Abs(a.Gap.DB-20*math.Log10(.9786941/.8809)) > 1e-6 || !(a.Gap.Rate > .05 && a.Gap.Rate < .1) {
		t.Errorf("BI-AWGN: %+v", a)
	}
	for _, e := range []ensembles.Ensemble{ensembles.Regular(3, 3), ensembles.Regular(4, 3)} {
		if _, err := Assess(e, channel.BEC{}, Threshold{Value: .5}); err == nil || !strings.Contains(err.Error(), "design rate") {
			t.Errorf("%v: %v, want an error about the design rate", e, err)
		}
	}
}

// The bound is the threshold of degree 4 of the rate-1/2 table of Richardson,
// Shokrollahi & Urbanke (2001, recalled): the ensemble is unstable above
// σ = .9116 (computed).
func TestStabilityOf(t *testing.T) {
	e := ensembles.Ensemble{
		Lambda: distribution(t, "2:.38354,3:.04237,4:.57409"),
		Rho:    distribution(t, "5:.24123,6:.75877"),
	}
	if got := StabilityOf(e, channel.BIAWGN{}, .9).Bound; math.Abs(got-.9116) > 0.51e-4 {
		t.Errorf("bound %.6f, want .9116", got)
	}
	for _, f := range []channel.Family{channel.BEC{}, channel.BSC{}, channel.BIAWGN{}, channel.Laplace{}, channel.Rayleigh{}} {
		// At the bound the margin vanishes; it falls as the channel worsens.
		bound := StabilityOf(e, f, 0.1).Bound
		if got := StabilityOf(e, f, bound).Margin; math.Abs(got) > 1e-9 {
			t.Errorf("%s: margin %g at the bound %g", f.Name(), got, bound)
		}
		if below, above := StabilityOf(e, f, bound*.99).Margin, StabilityOf(e, f, bound*1.01).Margin; !(below > 0 && above < 0) {
			t.Errorf("%s: margins %g and %g around the bound", f.Name(), below, above)
		}
		one := ensembles.Ensemble{Lambda: distribution(t, "1:0.1,3:0.9"), Rho: distribution(t, "6:1")}
		best, _ := f.Range()
		if got := StabilityOf(one, f, 0.1); got.Bound != best || !math.IsInf(got.Margin, -1) {
			t.Errorf("%s: degree 1: %+v", f.Name(), got)
		}
		if got := StabilityOf(ensembles.Regular(3, 6), f, 0.1); !math.IsInf(got.Bound, 1) || got.Margin != 1 {
			t.Errorf("%s: λ₂ = 0: %+v", f.Name(), got)
		}
	}
	// On the BEC it caps the threshold: λ₂ρ'(1)ε ≤ 1.
	if threshold, bound := erasureThreshold(t, e).Value, StabilityOf(e, channel.BEC{}, 0.1).Bound; threshold > bound*(1+1e-14) {
		t.Errorf("BEC threshold %g above the stability bound %g", threshold, bound)
	}
}

func TestEngineFor(t *testing.T) {
	for _, m := range Methods() {
		engine, err := EngineFor(m)
		if err != nil || engine.Method() != m {
			t.Errorf("%s: %v, %v", m, engine, err)
		}
	}
	if _, err := EngineFor("crystal"); err == nil || !strings.Contains(err.Error(), "crystal") || !strings.Contains(err.Error(), "exact") {
		t.Errorf("unknown method: %v, want an error with the methods", err)
	}
	for _, f := range []channel.Family{channel.BEC{}, channel.BIAWGN{}} {
		engine, err := EngineFor(DefaultMethod(f))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := engine.Threshold(context.Background(), ensembles.Regular(3, 6), f); err != nil {
			t.Errorf("%s: default method: %v", f.Name(), err)
		}
	}
	if got := DefaultMethod(channel.BEC{}); got != Exact {
		t.Errorf("default on the BEC: %s", got)
	}
}

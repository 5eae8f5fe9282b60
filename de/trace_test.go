package de

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// scalarEngines are the engines of this package that follow one number.
var scalarEngines = []struct {
	engine Engine
	family channel.Family
}{
	{ExactEngine{}, channel.BEC{}},
	{GaussianEngine{}, channel.BIAWGN{}},
	{GaussianFitEngine{}, channel.BIAWGN{}},
}

// The first steps of (3,6) on the BEC at ε = 0.4, by hand:
// x₁ = 0.4·(1-0.6⁵)² = 0.4·0.92224², and the bit's decision after one
// iteration is 0.4·0.92224³.
func TestTraceErasureByHand(t *testing.T) {
	trace, err := ExactEngine{}.Trace(context.Background(), ensembles.Regular(3, 6), channel.BEC{}, .4, 1)
	if err != nil {
		t.Fatal(err)
	}
	want := []Point{
		{0, .2, .4, .4, .92224, .2},
		{1, .2 * .92224 * .92224, .4 * .92224 * .92224, .4 * .92224 * .92224, 1 - math.Pow(1-.4*.92224*.92224, 5), .2 * math.Pow(.92224, 3)},
	}
	if trace.Outcome != Exhausted || len(trace.Points) != 2 {
		t.Fatalf("%+v, want two points, exhausted", trace)
	}
	for i, p := range trace.Points {
		w := want[i]
		for _, pair := range [][2]float64{
			{p.ErrorProbability, w.ErrorProbability}, {p.Entropy, w.Entropy}, {p.Bhattacharyya, w.Bhattacharyya},
			{p.CheckEntropy, w.CheckEntropy}, {p.BitErrorProbability, w.BitErrorProbability}, {float64(p.Iteration), float64(w.Iteration)},
		} {
			if math.Abs(pair[0]-pair[1]) > 1e-14 {
				t.Errorf("point %d: %+v, want %+v", i, p, w)
				break
			}
		}
	}
}

// Every trace starts at the channel, stays in range and falls; it converges
// below the threshold and stalls above; worse channels give worse traces at
// every iteration (degradation).
func TestTraceLaws(t *testing.T) {
	ctx := context.Background()
	r := rand.New(rand.NewPCG(11, 12))
	for range 12 {
		e := randomEnsemble(r, 30, 15)
		if e.DesignRate() < .05 {
			continue
		}
		for _, s := range scalarEngines {
			threshold, err := s.engine.Threshold(ctx, e, s.family)
			if err != nil {
				t.Fatal(err)
			}
			if !(threshold.Value < 100) {
				continue
			}
			var worse Trace
			for _, factor := range []float64{1.02, 1.005, .995, .98, .7} {
				parameter := threshold.Value * factor
				if _, worst := s.family.Range(); parameter > worst {
					continue
				}
				trace, err := s.engine.Trace(ctx, e, s.family, parameter, 200_000)
				if err != nil {
					t.Fatal(err)
				}
				first := trace.Points[0]
				for _, pair := range [][2]float64{
					{first.ErrorProbability, s.family.ErrorProbability(parameter)},
					{first.Entropy, 1 - s.family.Capacity(parameter)},
					{first.Bhattacharyya, s.family.Bhattacharyya(parameter)},
					{first.BitErrorProbability, s.family.ErrorProbability(parameter)},
				} {
					if math.Abs(pair[0]-pair[1]) > 1e-12 {
						t.Errorf("%s, %v: first point %+v is not the channel", s.engine.Method(), e, first)
					}
				}
				// Where stability binds the approximations may converge
				// above the threshold.
				if factor < 1 && trace.Outcome != Converged || factor > 1 && len(threshold.Warnings) == 0 && trace.Outcome != Stalled {
					t.Errorf("%s, %v: %s at %g of the threshold", s.engine.Method(), e, trace.Outcome, factor)
				}
				for i, p := range trace.Points {
					if i > 0 && s.engine.Method() != GaussianFit {
						q := trace.Points[i-1]
						if p.ErrorProbability > q.ErrorProbability*(1+1e-12) || p.Bhattacharyya > q.Bhattacharyya*(1+1e-12) {
							t.Fatalf("%s, %v: rises at iteration %d: %+v, %+v", s.engine.Method(), e, i, q, p)
						}
					}
					if i < len(worse.Points) && s.engine.Method() != GaussianFit {
						w := worse.Points[i]
						if p.ErrorProbability > w.ErrorProbability || p.Entropy > w.Entropy || p.BitErrorProbability > w.BitErrorProbability {
							t.Fatalf("%s, %v: iteration %d is worse on the better channel: %+v, %+v", s.engine.Method(), e, i, p, w)
						}
					}
				}
				worse = trace
			}
		}
	}
}

// The narrowest point of a run just below the threshold is the critical one.
func TestTraceNarrowest(t *testing.T) {
	ctx := context.Background()
	for _, s := range scalarEngines {
		e := ensembles.Regular(3, 6)
		threshold, err := s.engine.Threshold(ctx, e, s.family)
		if err != nil {
			t.Fatal(err)
		}
		trace, err := s.engine.Trace(ctx, e, s.family, threshold.Value*.9999, 10_000)
		if err != nil {
			t.Fatal(err)
		}
		if trace.Narrowest < 0 {
			t.Fatalf("%s: no narrowest point", s.engine.Method())
		}
		got, want := trace.Points[trace.Narrowest].Entropy, threshold.Critical[0].Entropy
		if math.Abs(got-want) > .02 {
			t.Errorf("%s: narrowest at entropy %.4f, critical %.4f", s.engine.Method(), got, want)
		}
	}
}

func TestTraceEnds(t *testing.T) {
	ctx := context.Background()
	e := ensembles.Ensemble{Lambda: distribution(t, "2:0.3,3:0.7"), Rho: distribution(t, "6:1")}
	for _, s := range scalarEngines {
		best, worst := s.family.Range()
		trace, err := s.engine.Trace(ctx, e, s.family, best, 10)
		if err != nil || trace.Outcome != Converged || trace.Points[len(trace.Points)-1].BitErrorProbability != 0 {
			t.Errorf("%s on the best channel: %+v, %v", s.engine.Method(), trace, err)
		}
		trace, err = s.engine.Trace(ctx, e, s.family, worst, 10)
		if err != nil || trace.Points[len(trace.Points)-1].ErrorProbability > .5 {
			t.Errorf("%s on the worst channel: %+v, %v", s.engine.Method(), trace, err)
		}
		trace, err = s.engine.Trace(ctx, e, s.family, .3, 0)
		if err != nil || len(trace.Points) != 1 {
			t.Errorf("%s without iterations: %+v, %v", s.engine.Method(), trace, err)
		}
		for _, bad := range []float64{-.1, math.NaN()} {
			if _, err := s.engine.Trace(ctx, e, s.family, bad, 10); err == nil {
				t.Errorf("%s: no error at %v", s.engine.Method(), bad)
			}
		}
		// Degree 1 leaves errors, whatever the channel.
		one := ensembles.Ensemble{Lambda: distribution(t, "1:0.1,3:0.9"), Rho: distribution(t, "6:1")}
		if threshold, err := s.engine.Threshold(ctx, one, s.family); err != nil || threshold.Value != best || len(threshold.Warnings) == 0 {
			t.Errorf("%s with degree 1: %+v, %v", s.engine.Method(), threshold, err)
		}
		if trace, err := s.engine.Trace(ctx, one, s.family, .3, 10_000); err != nil || trace.Outcome != Stalled {
			t.Errorf("%s with degree 1: %s, %v", s.engine.Method(), trace.Outcome, err)
		}
	}
}

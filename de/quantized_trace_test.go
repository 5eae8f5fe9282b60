package de

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

func quantizedTrace(t testing.TB, q QuantizedEngine, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) Trace {
	t.Helper()
	trace, err := q.Trace(context.Background(), e, f, parameter, iterations)
	if err != nil {
		t.Fatal(err)
	}
	return trace
}

// On the BEC the quantised trace is that of the closed recursion.
func TestQuantizedTraceErasure(t *testing.T) {
	r := rand.New(rand.NewPCG(31, 32))
	for range 20 {
		e := randomEnsemble(r, 60, 20)
		epsilon := erasureThreshold(t, e).Value * (.8 + .3*r.Float64())
		if epsilon > 1 {
			continue
		}
		want, err := ExactEngine{}.Trace(context.Background(), e, channel.BEC{}, epsilon, 50)
		if err != nil {
			t.Fatal(err)
		}
		got := quantizedTrace(t, QuantizedEngine{}, e, channel.BEC{}, epsilon, 50)
		for i := range min(len(got.Points), len(want.Points)) {
			g, w := got.Points[i], want.Points[i]
			for _, pair := range [][2]float64{
				{g.ErrorProbability, w.ErrorProbability}, {g.Entropy, w.Entropy}, {g.Bhattacharyya, w.Bhattacharyya},
				{g.CheckEntropy, w.CheckEntropy}, {g.BitErrorProbability, w.BitErrorProbability},
			} {
				if math.Abs(pair[0]-pair[1]) > 1e-10 {
					t.Fatalf("λ %s, ρ %s, ε %g, iteration %d: %+v, want %+v", e.Lambda, e.Rho, epsilon, i, g, w)
				}
			}
		}
	}
}

// Every trace starts at the channel's own figures and stays in range; it
// converges below the threshold and stalls above; and worse channels give
// worse traces at every iteration (degradation: Richardson & Urbanke, IEEE
// Trans. Inf. Theory 47(2), 2001).
func TestQuantizedTraceDegradation(t *testing.T) {
	r := rand.New(rand.NewPCG(33, 34))
	families := []channel.Family{channel.BIAWGN{}, channel.BSC{}, channel.Laplace{}, channel.Rayleigh{}, channel.BEC{}}
	for i := range 15 {
		e, f := varied(r), families[i%len(families)]
		threshold := quantizedThreshold(t, e, f).Value
		var worse Trace
		for _, factor := range []float64{1.1, 1.01, .99, .9, .6} {
			parameter := threshold * factor
			if _, worst := f.Range(); parameter > worst {
				continue
			}
			trace := quantizedTrace(t, QuantizedEngine{}, e, f, parameter, 3000)
			want := Converged
			if factor > 1 {
				want = Stalled
			}
			if trace.Outcome != want && !(factor == 1.01 && trace.Outcome == Exhausted) {
				t.Errorf("%s, λ %s, ρ %s at %g of the threshold: %s, want %s", f.Name(), e.Lambda, e.Rho, factor, trace.Outcome, want)
			}
			first := trace.Points[0]
			if math.Abs(first.ErrorProbability-f.ErrorProbability(parameter)) > 1e-12 || math.Abs(first.Bhattacharyya-f.Bhattacharyya(parameter)) > 1e-6 ||
				math.Abs(first.Entropy-(1-f.Capacity(parameter))) > 1e-6 || first.BitErrorProbability != first.ErrorProbability {
				t.Errorf("%s %g starts with %+v", f.Name(), parameter, first)
			}
			for i, p := range trace.Points {
				if p.Iteration != i || !(p.ErrorProbability >= 0 && p.Entropy >= 0 && p.Bhattacharyya >= 0 && p.BitErrorProbability >= 0 && p.CheckEntropy >= 0 && p.CheckEntropy <= 1+1e-9) {
					t.Fatalf("%s %g: point %d is %+v", f.Name(), parameter, i, p)
				}
				if i < len(worse.Points) {
					w := worse.Points[i]
					// Rounding and the grid, relative where values are small.
					above := func(a, b float64) bool { return a > b*(1+1e-4)+1e-13 }
					if above(p.ErrorProbability, w.ErrorProbability) || above(p.Entropy, w.Entropy) || above(p.Bhattacharyya, w.Bhattacharyya) ||
						above(p.BitErrorProbability, w.BitErrorProbability) {
						t.Errorf("%s, λ %s, ρ %s at %g of the threshold, iteration %d: %+v is worse than %+v on a worse channel", f.Name(), e.Lambda, e.Rho, factor, i, p, w)
						break
					}
				}
			}
			worse = trace
		}
	}
}

// Small error probabilities are right: on a grid four times as fine they are
// the same to a few hundredths at 1e-12 and to much less where larger.
func TestQuantizedTraceSmallErrors(t *testing.T) {
	for _, c := range []struct {
		lambda, rho string
		f           channel.Family
		parameter   float64
		iterations  int
	}{
		{"3:1", "6:1", channel.BIAWGN{}, .85, 60},
		{"2:0.30013,3:0.28395,8:0.41592", "6:0.22919,7:0.77081", channel.BIAWGN{}, .85, 80},
		{"2:0.30013,3:0.28395,8:0.41592", "6:0.22919,7:0.77081", channel.BSC{}, .06, 80},
	} {
		e := ensembles.Ensemble{Lambda: distribution(t, c.lambda), Rho: distribution(t, c.rho)}
		got := quantizedTrace(t, QuantizedEngine{}, e, c.f, c.parameter, c.iterations)
		fine := quantizedTrace(t, QuantizedEngine{tracePoints: 4096}, e, c.f, c.parameter, c.iterations)
		least := 1.0
		for i := range min(len(got.Points), len(fine.Points)) {
			g, w := got.Points[i], fine.Points[i]
			for _, pair := range [][2]float64{{g.ErrorProbability, w.ErrorProbability}, {g.BitErrorProbability, w.BitErrorProbability}, {g.Bhattacharyya, w.Bhattacharyya}, {g.Entropy, w.Entropy}} {
				allowed := 1e-3
				if w.BitErrorProbability < 1e-8 {
					allowed = .05
				}
				if w.BitErrorProbability > 1e-12 && !(math.Abs(pair[0]/pair[1]-1) < allowed) {
					t.Errorf("%s, λ %s, iteration %d: %+v, on a finer grid %+v", c.f.Name(), c.lambda, i, g, w)
					break
				}
			}
			least = min(least, g.BitErrorProbability)
		}
		if least > 1e-11 {
			t.Errorf("%s, λ %s: the trace ends at %g", c.f.Name(), c.lambda, least)
		}
	}
}

// The narrowest point of a trace just below the threshold is where the tunnel
// closes at it.
func TestQuantizedTraceNarrowest(t *testing.T) {
	for _, f := range []channel.Family{channel.BIAWGN{}, channel.BSC{}, channel.Laplace{}} {
		e := ensembles.Regular(3, 6)
		threshold := quantizedThreshold(t, e, f)
		trace := quantizedTrace(t, QuantizedEngine{}, e, f, threshold.Value*.9999, 2000)
		if trace.Outcome != Converged || trace.Narrowest < 0 {
			t.Fatalf("%s: %s, narrowest %d", f.Name(), trace.Outcome, trace.Narrowest)
		}
		if at, want := trace.Points[trace.Narrowest].Entropy, threshold.Critical[0].Entropy; math.Abs(at-want) > .01 {
			t.Errorf("%s: narrowest at entropy %g, critical at %g", f.Name(), at, want)
		}
		short := quantizedTrace(t, QuantizedEngine{}, e, f, threshold.Value*.9999, 7)
		if short.Outcome != Exhausted || len(short.Points) != 8 {
			t.Errorf("%s: %s after %d points, want exhausted after 8", f.Name(), short.Outcome, len(short.Points))
		}
	}
}

func TestQuantizedTraceEnds(t *testing.T) {
	ctx := context.Background()
	e := ensembles.Regular(3, 6)
	if trace := quantizedTrace(t, QuantizedEngine{}, e, channel.BSC{}, 0, 10); trace.Outcome != Converged || trace.Points[0].Bhattacharyya != 0 {
		t.Errorf("noiseless: %+v", trace)
	}
	if trace := quantizedTrace(t, QuantizedEngine{}, e, channel.BSC{}, .5, 10); trace.Outcome != Stalled || math.Abs(trace.Points[0].Entropy-1) > 1e-9 {
		t.Errorf("useless: %+v", trace)
	}
	// Bits of degree 1 never become certain.
	one := ensembles.Ensemble{Lambda: distribution(t, "1:0.05,3:0.95"), Rho: distribution(t, "6:1")}
	if trace := quantizedTrace(t, QuantizedEngine{}, one, channel.BIAWGN{}, .5, 500); trace.Outcome != Stalled {
		t.Errorf("degree 1: %s", trace.Outcome)
	}
	for _, parameter := range []float64{-1, .6, math.NaN()} {
		if _, err := (QuantizedEngine{}).Trace(ctx, e, channel.BSC{}, parameter, 10); err == nil {
			t.Errorf("p = %v: no error", parameter)
		}
	}
}

func TestEvolutionAllocatesNothing(t *testing.T) {
	v := NewEvolution(ensembles.Ensemble{Lambda: distribution(t, "2:0.3,3:0.3,100:0.4"), Rho: distribution(t, "8:0.5,9:0.5")}, grid(t, 256), channel.BIAWGN{}.Density(.95))
	if n := testing.AllocsPerRun(20, func() {
		v.Step()
		v.DecisionError()
	}); n != 0 {
		t.Errorf("%g allocations per step", n)
	}
}

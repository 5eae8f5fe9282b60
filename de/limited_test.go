package de

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// With one iteration on the BEC the bit error probability is
// ε·L(1-ρ(1-ε))/2 in closed form; for many iterations the threshold without a
// limit is approached from below.
func TestLimitedErasure(t *testing.T) {
	ctx := context.Background()
	e := ensembles.Regular(3, 6)
	const target = 1e-6
	got, err := Limited(ctx, ExactEngine{}, e, channel.BEC{}, 1, target)
	if err != nil {
		t.Fatal(err)
	}
	closed := func(epsilon float64) float64 { return epsilon * math.Pow(1-math.Pow(1-epsilon, 5), 3) / 2 }
	if !(closed(got.Value) <= target*(1+1e-9) && closed(got.Value+got.Uncertainty) >= target*(1-1e-9)) {
		t.Errorf("one iteration: ε = %.12g ± %.2g has error %g, want %g", got.Value, got.Uncertainty, closed(got.Value), target)
	}
	if got.Uncertainty > 1e-9*got.Value {
		t.Errorf("one iteration: uncertainty %g", got.Uncertainty)
	}
	last := got.Value
	for _, iterations := range []int{2, 5, 10, 50, 200, 2000, 100000} {
		got, err := Limited(ctx, ExactEngine{}, e, channel.BEC{}, iterations, target)
		if err != nil {
			t.Fatal(err)
		}
		if got.Value <= last {
			t.Errorf("%d iterations: ε = %.12g, not above %.12g with fewer", iterations, got.Value, last)
		}
		last = got.Value
	}
	// (Iterations go as the inverse root of the distance.)
	if threshold := erasureThreshold(t, e).Value; last > threshold || last < threshold-1e-6 {
		t.Errorf("100000 iterations: ε = %.12g, threshold %.12g", last, threshold)
	}
}

// The result reaches the target, and a little above it the target is missed,
// whatever the ensemble, the engine and the limits.
func TestLimitedProperty(t *testing.T) {
	ctx := context.Background()
	r := rand.New(rand.NewPCG(9, 10))
	for range 40 {
		e := randomEnsemble(r, 30, 15)
		if e.DesignRate() < .05 {
			continue
		}
		iterations := 1 + r.IntN(60)
		target := math.Pow(10, -1-8*r.Float64())
		for _, test := range []struct {
			engine Engine
			family channel.Family
		}{{ExactEngine{}, channel.BEC{}}, {GaussianEngine{}, channel.BIAWGN{}}, {GaussianFitEngine{}, channel.BIAWGN{}}} {
			got, err := Limited(ctx, test.engine, e, test.family, iterations, target)
			if err != nil {
				t.Fatalf("%v, %s: %v", e, test.engine.Method(), err)
			}
			for parameter, want := range map[float64]bool{got.Value: true, got.Value * (1 + 1e-8): false} {
				trace, err := test.engine.Trace(ctx, e, test.family, parameter, iterations)
				if err != nil {
					t.Fatal(err)
				}
				final := trace.Points[len(trace.Points)-1].BitErrorProbability
				if reached := final <= target; reached != want {
					t.Errorf("%v, %s, %d iterations to %g: error %g at %.12g (threshold %.12g)",
						e, test.engine.Method(), iterations, target, final, parameter, got.Value)
				}
			}
		}
	}
}

func TestLimitedErrors(t *testing.T) {
	ctx := context.Background()
	e := ensembles.Regular(3, 6)
	for _, test := range []struct {
		iterations int
		target     float64
	}{{0, .1}, {-3, .1}, {1, 0}, {1, .5}, {1, math.NaN()}, {1, -1}, {1, 1e-40}} {
		if _, err := Limited(ctx, ExactEngine{}, e, channel.BEC{}, test.iterations, test.target); err == nil {
			t.Errorf("%d iterations, target %v: no error", test.iterations, test.target)
		}
	}
	var wrong *ErrChannel
	if _, err := Limited(ctx, ExactEngine{}, e, channel.BIAWGN{}, 10, .1); !errors.As(err, &wrong) {
		t.Errorf("exact on biawgn: %v, want ErrChannel", err)
	}
	if _, err := Limited(ctx, uncorrected{}, e, channel.BEC{}, 10, 1e-3); !errors.Is(err, ErrUnreachable) {
		t.Errorf("error floor: %v, want ErrUnreachable", err)
	}
	cancelled, cancel := context.WithCancel(ctx)
	cancel()
	if _, err := Limited(cancelled, ExactEngine{}, e, channel.BEC{}, 10, .1); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// uncorrected is an engine that never corrects all errors.
type uncorrected struct{ ExactEngine }

func (uncorrected) Trace(context.Context, ensembles.Ensemble, channel.Family, float64, int) (Trace, error) {
	return Trace{Points: []Point{{}, {Iteration: 1, BitErrorProbability: .01}}}, nil
}

// On finer grids the threshold lies within the uncertainty, also where small
// error probabilities are asked for, which settle last.
func TestLimitedUncertainty(t *testing.T) {
	ctx := context.Background()
	irregular := ensembles.Ensemble{
		Lambda: ensembles.Distribution{{Degree: 2, Fraction: 0.25}, {Degree: 3, Fraction: 0.21}, {Degree: 5, Fraction: 0.14}, {Degree: 15, Fraction: 0.4}},
		Rho:    ensembles.Distribution{{Degree: 8, Fraction: 1}},
	}
	for _, c := range []struct {
		e          ensembles.Ensemble
		f          channel.Family
		iterations int
		target     float64
	}{
		{ensembles.Regular(3, 6), channel.BIAWGN{}, 20, 1e-6},
		{ensembles.Regular(3, 6), channel.BIAWGN{}, 3, 1e-2},
		{ensembles.Regular(3, 60), channel.Rayleigh{}, 10, 1e-5},
		{irregular, channel.BSC{}, 30, 1e-6},
		{irregular, channel.Laplace{}, 60, 1e-9},
	} {
		got, err := Limited(ctx, QuantizedEngine{}, c.e, c.f, c.iterations, c.target)
		if err != nil {
			t.Fatal(err)
		}
		l := limit{engine: QuantizedEngine{tracePoints: 4096}, e: c.e, f: c.f, iterations: c.iterations, target: c.target}
		finer, err := l.threshold(ctx, got.Value, gridTolerance)
		if err != nil {
			t.Fatal(err)
		}
		if d := math.Abs(got.Value - finer.Value); d > got.Uncertainty || got.Uncertainty > 2e-3*got.Value {
			t.Errorf("%s, %d iterations to %g: %.9g ± %.2g, but %.9g on a finer grid", c.f.Name(), c.iterations, c.target, got.Value, got.Uncertainty, finer.Value)
		}
	}
}

// With very many iterations it is the threshold without a limit but for a
// little, at the cost of a few evolutions that use them: by bisection thirty.
func TestLimitedManyIterations(t *testing.T) {
	const iterations = 3000
	e, f := ensembles.Regular(3, 6), channel.BIAWGN{}
	got, err := Limited(context.Background(), QuantizedEngine{}, e, f, iterations, 1e-9)
	if err != nil {
		t.Fatal(err)
	}
	without := quantizedThreshold(t, e, f)
	if short := without.Value - got.Value; short < 0 || short > 4e-6 {
		t.Errorf("%.9g after %d iterations, %.9g without a limit", got.Value, iterations, without.Value)
	}
	if got.Iterations > 2*12*iterations {
		t.Errorf("%d iterations spent on two grids", got.Iterations)
	}
}

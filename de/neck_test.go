package de

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// located returns the first grid's approach to a threshold.
func located(t *testing.T, e ensembles.Ensemble, f channel.Family, points int) approach {
	t.Helper()
	a := approach{e: e, f: f, grid: grid(t, points), decoded: deep}
	if why, err := a.bracket(context.Background()); err != nil || why != "" || a.high <= a.low {
		t.Fatal("no bracket: ", why, err)
	}
	if err := a.locate(context.Background(), 1e-8); err != nil {
		t.Fatal(err)
	}
	return a
}

// The density at a neck is a fixed point: an evolution that begins with it on
// the channel of the neck's parameter stays there, on a better channel it goes
// on to success, on a worse one it goes back.
func TestNeckIsFixedPoint(t *testing.T) {
	for _, c := range []struct {
		e ensembles.Ensemble
		f channel.Family
	}{
		{ensembles.Regular(3, 6), channel.BIAWGN{}},
		{ensembles.Regular(4, 8), channel.Laplace{}},
		{ensembles.Regular(3, 4), channel.Rayleigh{}},
		{ensembles.Regular(3, 30), channel.BSC{}},
		{twoTunnels(t, 60, .38), channel.BIAWGN{}},
	} {
		a := located(t, c.e, c.f, 256)
		if len(a.necks) == 0 {
			t.Fatalf("%s, λ %s: no necks", c.f.Name(), c.e.Lambda)
		}
		for _, n := range a.necks {
			if n.error > neckError*n.parameter {
				t.Errorf("%s, λ %s: error %g of %g", c.f.Name(), c.e.Lambda, n.error, n.parameter)
			}
			for _, offset := range []float64{0, -1e-6, 1e-6} {
				v := NewEvolution(c.e, a.grid, c.f.Density(n.parameter*(1+offset)))
				v.Messages.Copy(n.messages)
				before := v.Messages.Bhattacharyya()
				for range 5 {
					v.Step()
				}
				moved := math.Log(v.Messages.Bhattacharyya() / before)
				if offset == 0 && math.Abs(moved) > 2e-9 || offset != 0 && !(moved*offset > 1e-13) {
					t.Errorf("%s, λ %s: at %.9g(1%+g) ln B moves by %g", c.f.Name(), c.e.Lambda, n.parameter, offset, moved)
				}
			}
		}
	}
}

// A neck is lower than the fixed points on both its sides. On the BEC fixed
// points are known: ε = x/λ(1-ρ(1-x)) (Luby, Mitzenmacher, Shokrollahi &
// Spielman, Efficient erasure correcting codes, IEEE Trans. Inf. Theory 47(2),
// 2001).
func TestFixedPointsErasure(t *testing.T) {
	r := rand.New(rand.NewPCG(27, 28))
	for range 20 {
		e, f := randomEnsemble(r, 60, 20), channel.BEC{}
		points := newFixedPoints(e, grid(t, 64), f, .3)
		for range 5 {
			x := .02 + .9*r.Float64()
			want := x / e.Lambda.At(1-e.Rho.At(1-x))
			messages := grid(t, 64).Project(f.Density(x))
			got, error := points.settle(messages, x, 1e-10)
			switch {
			case want >= 1:
				if !math.IsInf(got, 1) {
					t.Errorf("λ %s, ρ %s, x = %g: ε = %g, want none", e.Lambda, e.Rho, x, got)
				}
			case math.Abs(got-want) > 1e-9 || error > 1e-9:
				t.Errorf("λ %s, ρ %s, x = %g: ε = %.12g ± %g, want %.12g", e.Lambda, e.Rho, x, got, error, want)
			}
		}
	}
}

// The threshold from necks is the one that runs from below lead to on the same
// grid.
func TestNeckAgreesWithRuns(t *testing.T) {
	const tolerance = 2e-8
	r := rand.New(rand.NewPCG(29, 30))
	families := []channel.Family{channel.BIAWGN{}, channel.BSC{}, channel.Laplace{}, channel.Rayleigh{}}
	for i := range 16 {
		e, f := varied(r), families[i%len(families)]
		runs, err := onGrid(e, f, grid(t, 128), tolerance)
		if err != nil {
			t.Fatal(err)
		}
		if StabilityOf(e, f, 1).Bound == runs {
			continue
		}
		if a := located(t, e, f, 128); math.Abs(a.estimate-runs) > tolerance*runs {
			t.Errorf("%s, λ %s, ρ %s: %.10g by necks, %.10g by runs", f.Name(), e.Lambda, e.Rho, a.estimate, runs)
		}
	}
}

// At rate 1/100 messages say so little that an evolution near the threshold
// takes tens of thousands of iterations, and fixed points are found only up to
// rounding; necks still do without such runs. The value is by runs alone on
// 1024 points of a grid of the fourth order, 438,000 iterations.
func TestNeckAtLowRate(t *testing.T) {
	const byRuns, offBy = 7.78464992, 4e-6
	e := ensembles.Ensemble{
		Lambda: distribution(t, "2:0.682408,3:0.183319,4:0.013935,6:0.120338"),
		Rho:    distribution(t, "2:0.529553,3:0.470447"),
	}
	got := quantizedThreshold(t, e, channel.BIAWGN{})
	if d := math.Abs(got.Value - byRuns); d > got.Uncertainty+offBy || got.Uncertainty > DefaultTolerance*got.Value {
		t.Errorf("σ = %.9g ± %.2g, by runs %.9g", got.Value, got.Uncertainty, byRuns)
	}
	if got.Iterations > 100_000 {
		t.Errorf("%d iterations", got.Iterations)
	}
}

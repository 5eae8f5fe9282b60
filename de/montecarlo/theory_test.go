package montecarlo

import (
	"context"
	"flag"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/tanner"
)

// go test -run 'ScalingLaw|Evolution|Waterfall' -v -study ./de/montecarlo
// takes more and longer measurements than the everyday tests and prints all.
var study = flag.Bool("study", false, "long measurements")

// scalingBias is how far the scaling law may be from the truth relative to the
// frame error rate: it leaves out terms of relative order n^(-1/3) in the
// argument of Q, which at n = 1024 the paper's own figures show as a few per
// cent.
const scalingBias = 0.1

// (3,6) on the BEC follows the scaling law of Amraoui, Montanari, Richardson
// & Urbanke (2009) over the waterfall. The law is for the average over the
// ensemble, so every few trials use another random graph.
func TestScalingLaw(t *testing.T) {
	e := ensembles.Regular(3, 6)
	threshold, x := critical(t, e)
	law, err := ScalingOf(e, threshold, x)
	if err != nil {
		t.Fatal(err)
	}
	graphs, frames := int64(20), int64(60)
	if *study {
		graphs, frames = 200, 300
	}
	for _, n := range []int{1024, 2048, 4096, 8192} {
		r, err := ensembles.Realize(e, n, nil)
		if err != nil {
			t.Fatal(err)
		}
		for _, target := range []float64{0.8, 0.5, 0.2, 0.05} {
			epsilon := parameterAt(law, n, target)
			var sum Measurement
			for k := range graphs {
				g, err := tanner.Build(context.Background(), r, tanner.Settings{Method: tanner.Randomized, Girth: 4, Seed: uint64(k)})
				if err != nil {
					t.Fatal(err)
				}
				m, _ := run(t, Trials{Graph: g, Family: channel.BEC{}, Parameter: epsilon, Seed: uint64(k)}, Measurement{}, Limits{Frames: frames})
				sum.Counts.Frames += m.Counts.Frames
				sum.Counts.FrameErrors += m.Counts.FrameErrors
			}
			have, want := sum.FrameErrorRate(0.999), law.FrameErrorRate(n, epsilon)
			if *study {
				t.Logf("n = %d, ε = %.5f: frame error rate %.4f (%.4f to %.4f), law %.4f", n, epsilon, have.Value, have.Low, have.High, want)
			}
			if want < have.Low*(1-scalingBias) || want > have.High*(1+scalingBias) {
				t.Errorf("n = %d, ε = %.5f: frame error rate %.4f (%.4f to %.4f), law %.4f", n, epsilon, have.Value, have.Low, have.High, want)
			}
		}
	}
}

// parameterAt inverts the law by bisection.
func parameterAt(law Scaling, n int, rate float64) float64 {
	low, high := 0.0, 1.0
	for range 60 {
		if middle := (low + high) / 2; law.FrameErrorRate(n, middle) < rate {
			low = middle
		} else {
			high = middle
		}
	}
	return low
}

// The error probability of messages and of decisions on large random graphs
// follows density evolution iteration by iteration: the closed recursion on
// the BEC, quantised densities on the others. It may miss by the confidence
// interval of the mean over graphs (Student's distribution, at a level that
// allows for all the comparisons), and by cycleBias, the effect of cycles,
// which is of the order of 1/length. Every frame has a graph of its own: what
// one graph deviates from the ensemble, where degrees differ, is of the order
// of the channel's own fluctuation and common to all frames.
func TestEvolutionFollowsDensityEvolution(t *testing.T) {
	const (
		cycleBias = 20 // divided by the length
		level     = 1e-5
	)
	length, graphs, iterations := 20_000, 12, 12
	if *study {
		length, graphs, iterations = 300_000, 20, 25
	}
	quantile := distuv.StudentsT{Sigma: 1, Nu: float64(graphs - 1)}.Quantile(1 - level/2)
	irregular, err := ensembles.New(
		ensembles.Normalize([]ensembles.Term{{Degree: 2, Fraction: .28}, {Degree: 3, Fraction: .3}, {Degree: 9, Fraction: .42}}),
		ensembles.Concentrated(7))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name      string
		e         ensembles.Ensemble
		f         channel.Family
		parameter float64
		engine    de.Engine
	}{
		{"(3,6) on the BEC", ensembles.Regular(3, 6), channel.BEC{}, 0.42, de.ExactEngine{}},
		{"irregular on the BEC", irregular, channel.BEC{}, 0.45, de.ExactEngine{}},
		{"(3,6) on the BSC", ensembles.Regular(3, 6), channel.BSC{}, 0.08, de.QuantizedEngine{}},
		{"(3,6) on the BI-AWGN", ensembles.Regular(3, 6), channel.BIAWGN{}, 0.87, de.QuantizedEngine{}},
	} {
		r, err := ensembles.Realize(c.e, length, nil)
		if err != nil {
			t.Fatal(err)
		}
		trace, err := c.engine.Trace(context.Background(), r.Ensemble(), c.f, c.parameter, iterations)
		if err != nil {
			t.Fatal(err)
		}
		if len(trace.Points) < iterations {
			t.Fatalf("%s: a trace of %d points", c.name, len(trace.Points))
		}
		messages, bits := make([][]float64, iterations+1), make([][]float64, iterations+1)
		for k := range graphs {
			g, err := tanner.Build(context.Background(), r, tanner.Settings{Method: tanner.Randomized, Girth: 4, Seed: uint64(k)})
			if err != nil {
				t.Fatal(err)
			}
			points, err := Trials{Graph: g, Family: c.f, Parameter: c.parameter, Seed: uint64(k)}.Evolve(context.Background(), iterations, 1, 0)
			if err != nil {
				t.Fatal(err)
			}
			for i, p := range points {
				messages[i] = append(messages[i], p.MessageError.Value)
				bits[i] = append(bits[i], p.BitError.Value)
			}
		}
		for i, want := range trace.Points[:min(iterations+1, len(trace.Points))] {
			for _, quantity := range []struct {
				name string
				have []float64
				want float64
			}{{"messages", messages[i], want.ErrorProbability}, {"bits", bits[i], want.BitErrorProbability}} {
				mean, deviation := stat.MeanStdDev(quantity.have, nil)
				interval := quantile * deviation / math.Sqrt(float64(graphs))
				if *study {
					t.Logf("%s, iteration %d, %s: %.6f ± %.6f, theory %.6f", c.name, i, quantity.name, mean, interval, quantity.want)
				}
				if off, allowed := math.Abs(mean-quantity.want), interval+cycleBias/float64(length); off > allowed {
					t.Errorf("%s, iteration %d: error probability of %s %.6f, theory %.6f: off by %.2g, allowed %.2g", c.name, i, quantity.name, mean, quantity.want, off, allowed)
				}
			}
		}
	}
}

func TestEvolveIsDeterministic(t *testing.T) {
	trials := trialsOf(t, channel.BIAWGN{}, 0.8, Flooding)
	a, err := trials.Evolve(context.Background(), 8, 7, 1)
	if err != nil {
		t.Fatal(err)
	}
	b, err := trials.Evolve(context.Background(), 8, 7, 3)
	if err != nil {
		t.Fatal(err)
	}
	for i := range a {
		if a[i] != b[i] {
			t.Errorf("iteration %d: %+v with one worker, %+v with three", i, a[i], b[i])
		}
	}
}

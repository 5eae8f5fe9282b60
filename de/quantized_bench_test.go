package de

import (
	"context"
	"fmt"
	"runtime"
	"testing"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
	"tannery/ensembles/catalog"
)

// benchmarkRows are the ensembles of the benchmarks.
var benchmarkRows = []string{"ru01-r50-d3", "rsu01-r50-d15", "rsu01-r50-d50", "cfru01-r50-d200", "cfru01-r50-d8000"}

func lookup(b *testing.B, name string) ensembles.Ensemble {
	entry, ok := catalog.Lookup(name)
	if !ok {
		b.Fatalf("%s: not in the catalogue", name)
	}
	return entry.Ensemble
}

// BenchmarkThreshold measures whole thresholds to the default tolerance.
func BenchmarkThreshold(b *testing.B) {
	for _, name := range benchmarkRows {
		e := lookup(b, name)
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			steps := 0
			for b.Loop() {
				steps = quantizedThreshold(b, e, channel.BIAWGN{}).Iterations
			}
			b.ReportMetric(float64(steps), "steps")
		})
	}
}

// BenchmarkThresholdBisection measures the plain way on the same kernel: one
// grid of the points that give five digits, and a bisection to 1e-5 of the
// parameter, by runs until the Bhattacharyya parameter is small or still.
func BenchmarkThresholdBisection(b *testing.B) {
	f := channel.BIAWGN{}
	g := grid(b, 256)
	for _, name := range benchmarkRows {
		e := lookup(b, name)
		b.Run(name, func(b *testing.B) {
			steps := 0
			for b.Loop() {
				steps = 0
				low, high := .5, 1.0
				for high-low > 1e-5 {
					middle := (low + high) / 2
					ok, n := plainRun(e, g, f, middle)
					steps += n
					if ok {
						low = middle
					} else {
						high = middle
					}
				}
			}
			b.ReportMetric(float64(steps), "steps")
		})
	}
}

// plainRun evolves until success, standstill or many iterations.
func plainRun(e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter float64) (ok bool, steps int) {
	v := NewEvolution(e, g, f.Density(parameter))
	b := v.Messages.Bhattacharyya()
	for steps < 20_000 && b > 1e-6 {
		v.Step()
		steps++
		next := v.Messages.Bhattacharyya()
		if !(next < b*(1-1e-9)) {
			return false, steps
		}
		b = next
	}
	return b <= 1e-6, steps
}

// BenchmarkEvolutionMemory measures what an evolution takes besides the shared
// grid, against the number of distinct degrees and the largest one.
func BenchmarkEvolutionMemory(b *testing.B) {
	g := grid(b, 1024)
	c := channel.BIAWGN{}.Density(.9)
	for _, terms := range []int{1, 10, 30} {
		for _, largest := range []int{100, 10_000} {
			var d []ensembles.Term
			for i := range terms {
				d = append(d, ensembles.Term{Degree: largest - terms + 1 + i, Fraction: 1})
			}
			e := ensembles.Ensemble{Lambda: ensembles.Normalize(d), Rho: ensembles.Concentrated(8)}
			b.Run(fmt.Sprintf("degrees=%d/largest=%d", terms, largest), func(b *testing.B) {
				b.ReportAllocs()
				var v *Evolution
				for b.Loop() {
					v = NewEvolution(e, g, c)
				}
				runtime.KeepAlive(v)
			})
		}
	}
}

// BenchmarkQuantizedTrace measures 50 iterations as `trace` shows them.
func BenchmarkQuantizedTrace(b *testing.B) {
	for b.Loop() {
		quantizedTrace(b, QuantizedEngine{}, ensembles.Regular(3, 6), channel.BIAWGN{}, .87, 50)
	}
}

// BenchmarkQuantizedLimited measures a threshold limited to 50 iterations.
func BenchmarkQuantizedLimited(b *testing.B) {
	for b.Loop() {
		if _, err := Limited(context.Background(), QuantizedEngine{}, ensembles.Regular(3, 6), channel.BIAWGN{}, 50, 1e-6); err != nil {
			b.Fatal(err)
		}
	}
}

package density

import (
	"fmt"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// stepSizes are the numbers of points of the benchmarks. Thresholds mostly
// take 128 to 512.
var stepSizes = []int{256, 1 << 10, 1 << 11, 1 << 12, 1 << 13, 1 << 14, 1 << 15}

// BenchmarkStep measures one step of (3,6) on the BI-AWGN channel.
func BenchmarkStep(b *testing.B) {
	for _, points := range stepSizes {
		b.Run(fmt.Sprintf("points=%d", points), func(b *testing.B) {
			benchmarkStep(b, points, ensembles.Regular(3, 6))
		})
	}
}

// BenchmarkStepPlain measures the same step on gonum's transforms.
func BenchmarkStepPlain(b *testing.B) {
	for _, points := range stepSizes {
		b.Run(fmt.Sprintf("points=%d", points), func(b *testing.B) {
			g, messages, checks := stepStart(b, points)
			p := newPlainStep(g, ensembles.Regular(3, 6), messages)
			b.ReportAllocs()
			for b.Loop() {
				p.check(checks, messages)
				p.variable(messages, checks)
			}
		})
	}
}

// BenchmarkStepTerms measures a step against the number of distinct variable
// degrees, and BenchmarkStepDegree against the largest one.
func BenchmarkStepTerms(b *testing.B) {
	for _, terms := range []int{1, 3, 10, 30} {
		b.Run(fmt.Sprintf("degrees=%d", terms), func(b *testing.B) {
			var d []ensembles.Term
			for i := range terms {
				d = append(d, ensembles.Term{Degree: 2 + i, Fraction: 1})
			}
			benchmarkStep(b, 1<<10, ensembles.Ensemble{Lambda: ensembles.Normalize(d), Rho: ensembles.Concentrated(8)})
		})
	}
}

func BenchmarkStepDegree(b *testing.B) {
	for _, largest := range []int{10, 100, 1000, 10_000} {
		b.Run(fmt.Sprintf("largest=%d", largest), func(b *testing.B) {
			d := ensembles.Distribution{{Degree: 3, Fraction: .5}, {Degree: largest, Fraction: .5}}
			benchmarkStep(b, 1<<10, ensembles.Ensemble{Lambda: d, Rho: ensembles.Concentrated(8)})
		})
	}
}

func benchmarkStep(b *testing.B, points int, e ensembles.Ensemble) {
	g, messages, checks := stepStart(b, points)
	v, c := g.NewVariableNode(e.Lambda, messages), g.NewCheckNode(e.Rho)
	b.ReportAllocs()
	for b.Loop() {
		c.Apply(checks, messages)
		v.Apply(messages, checks)
	}
}

// stepStart returns a grid, the density of a channel near the threshold of
// (3,6) on it, and another density.
func stepStart(b *testing.B, points int) (*Grid, *Density, *Density) {
	g, err := NewGrid(points)
	if err != nil {
		b.Fatal(err)
	}
	return g, g.Project(channel.BIAWGN{}.Density(.88)), g.NewDensity()
}

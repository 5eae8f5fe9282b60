package optimize

import (
	"fmt"
	"testing"

	"tannery/de/channel"
)

func benchmarkSearch(b *testing.B, p Problem) {
	var r Result
	for b.Loop() {
		r = mustSearch(b, p, Settings{Workers: 2})
	}
	b.ReportMetric(float64(r.Stats.Evaluations), "evaluations")
	b.ReportMetric(r.Limit-r.Threshold.Value, "gap")
}

func BenchmarkBECSearch(b *testing.B) {
	for _, largest := range []int{10, 20, 100, 1000, 10000} {
		b.Run(fmt.Sprintf("degree=%d", largest), func(b *testing.B) {
			benchmarkSearch(b, Problem{Channel: channel.BEC{}, Rate: 0.5, VariableDegrees: DegreesUpTo(largest)})
		})
	}
}

func BenchmarkGaussianSearch(b *testing.B) {
	for _, largest := range []int{10, 15, 100, 1000} {
		b.Run(fmt.Sprintf("degree=%d", largest), func(b *testing.B) {
			benchmarkSearch(b, Problem{Channel: channel.BIAWGN{}, Rate: 0.5, VariableDegrees: DegreesUpTo(largest)})
		})
	}
}

package ensembles

import (
	"math"
	"math/bits"
	"slices"
	"testing"
)

// All subsets by counting through the bit patterns: every one is delivered
// once, and none before a cheaper one.
func TestCheapestSubsetsAgainstAllSubsets(t *testing.T) {
	r := seeded(11)
	for range 200 {
		costs := make([]float64, r.IntN(11))
		for i := range costs {
			costs[i] = float64(r.IntN(9) - 4) // with ties and negative ones
		}
		size := r.IntN(len(costs) + 1)
		var want []float64
		for pattern := range 1 << len(costs) {
			if bits.OnesCount(uint(pattern)) == size {
				var sum float64
				for i, c := range costs {
					sum += c * float64(pattern>>i&1)
				}
				want = append(want, sum)
			}
		}
		slices.Sort(want)
		seen := map[int]bool{}
		var got []float64
		for _, subset := range cheapestSubsets(costs, size, math.MaxInt) {
			pattern, sum := 0, 0.0
			for _, i := range subset {
				pattern |= 1 << i
				sum += costs[i]
			}
			if seen[pattern] || len(subset) != size {
				t.Fatalf("%v: %v twice or not of size %d", costs, subset, size)
			}
			seen[pattern] = true
			got = append(got, sum)
		}
		if !slices.Equal(got, want) {
			t.Fatalf("%v, size %d: costs %v, want %v", costs, size, got, want)
		}
		limit := r.IntN(5)
		if n := len(cheapestSubsets(costs, size, limit)); n != min(limit, len(want)) {
			t.Fatalf("%d subsets at a limit of %d", n, limit)
		}
	}
}

package channel

import (
	"math"
	"testing"
)

func TestSolve(t *testing.T) {
	for _, c := range []struct {
		name      string
		low, high float64
		f         func(float64) float64
		want      float64
	}{
		{"line", 0, 3, func(x float64) float64 { return x - 1 }, 1},
		{"falling", 0, 3, func(x float64) float64 { return 2 - x*x }, math.Sqrt2},
		{"at the low end", 1, 3, func(x float64) float64 { return x - 1 }, 1},
		{"at the high end", 1, 3, func(x float64) float64 { return x - 3 }, 3},
		{"flat", -1, 2, func(x float64) float64 { return math.Pow(x-1, 9) }, 1},
		{"jump", 0, 1, func(x float64) float64 { return math.Copysign(1, x-0.3) }, 0.3},
		{"pole", 0, 1, func(x float64) float64 { return 1/x - 1e6 }, 1e-6},
		{"nearly out of reach", 1, 3, func(x float64) float64 { return x - (1 - 1e-17) }, 1},
		{"cosine", 0, 1, func(x float64) float64 { return math.Cos(x) - x }, 0.7390851332151607}, // common practice
	} {
		evaluations := 0
		got := solve(c.low, c.high, 0, func(x float64) float64 { evaluations++; return c.f(x) })
		if math.Abs(got-c.want) > 1e-15*c.want || evaluations > 120 {
			t.Errorf("%s: %v after %d evaluations; want %v", c.name, got, evaluations, c.want)
		}
	}
}

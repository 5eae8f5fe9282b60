package montecarlo

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The standard library, exact to one unit in the last place, is the oracle.
func TestHalvings(t *testing.T) {
	worst := 0.0
	for x := 0.0; x <= 1000; x += 1.1e-3 {
		want := math.Exp2(-x)
		worst = max(worst, math.Abs(halvings(x)/want-1))
	}
	if t.Logf("relative error at most %.2g", worst); worst > exponentialError {
		t.Errorf("relative error %g, want at most %g", worst, exponentialError)
	}
	if p := halvings(0); p != 1 {
		t.Errorf("of 0: %v, want exactly 1", p)
	}
}

func TestOctaves(t *testing.T) {
	worst := 0.0
	random := rand.New(rand.NewPCG(6, 1))
	check := func(a, b float64) {
		want := math.Log2(a / b)
		if r := a / b; r < 2 {
			want = math.Log1p((a-b)/b) / math.Ln2
		}
		worst = max(worst, math.Abs(octaves(a, b)-want))
	}
	for range 1_000_000 {
		b := math.Ldexp(1+random.Float64(), random.IntN(600)-500)
		check(b*(1+random.Float64()), b)
		check(b*math.Exp(300*random.Float64()), b)
		check(b*(1+1e-9*random.Float64()), b)
	}
	// Around the half octaves, where k changes and the rest is largest.
	for f := 1.0; f < 2; f += 1e-4 {
		for g := 1.0; g < 2; g += 1e-2 {
			check(2*f, g)
		}
	}
	if t.Logf("absolute error at most %.2g", worst); worst > logarithmError {
		t.Errorf("absolute error %g, want at most %g", worst, logarithmError)
	}
	for _, x := range []float64{1, 1.3, 7e100} {
		if y := octaves(x, x); y != 0 {
			t.Errorf("of %v/%v: %v, want exactly 0", x, x, y)
		}
	}
}

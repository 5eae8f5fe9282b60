package de

import (
	"math"
	"math/rand/v2"
	"testing"

	"tannery/ensembles"
)

// Kudekar, Richardson & Urbanke, IEEE Trans. Inf. Theory 57(2), 2011, Lemma 4:
// read for (3,6), (4,8) and (5,10), computed by its formula for the others.
func TestMAPUpperBoundRegular(t *testing.T) {
	for _, test := range []struct {
		dv, dc int
		want   float64
	}{
		{3, 4, .7460097}, {3, 5, .5909894}, {3, 6, .4881509}, {3, 9, .3196532},
		{3, 12, .2373249}, {4, 6, .6656556}, {4, 8, .4977409}, {4, 10, .3971373},
		{5, 10, .4994858},
	} {
		if got := MAPUpperBound(ensembles.Regular(test.dv, test.dc)); math.Abs(got-test.want) > 0.51e-7 {
			t.Errorf("(%d,%d): %.9f, want %.7f", test.dv, test.dc, got, test.want)
		}
	}
}

// largestFixedPoint iterates the recursion from x = 1, the second method.
func largestFixedPoint(e ensembles.Ensemble, epsilon float64) (y float64) {
	x := epsilon
	for {
		y, _, _, _ = check(e.Rho, x)
		next := epsilon * e.Lambda.At(y)
		if next > x*(1-1e-9) || next < 1e-9 {
			return y
		}
		x = next
	}
}

// The area under the BP EXIT curve, by iteration and the midpoint rule, equals
// the rate; ensembles of several jumps are among the random ones.
func TestMAPUpperBoundArea(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	all := []ensembles.Ensemble{ // with a jump above the bound
		{Lambda: distribution(t, "2:0.3,3:0.3,14:0.4"), Rho: distribution(t, "7:1")},
		{Lambda: distribution(t, "2:0.32,6:0.38,23:0.04,85:0.26"), Rho: distribution(t, "5:0.52,7:0.48")},
	}
	for range 60 {
		all = append(all, randomEnsemble(r, 200, 20))
	}
	severalJumps := 0
	for _, e := range all {
		rate := e.DesignRate()
		if rate < .02 {
			continue
		}
		bound := MAPUpperBound(e)
		if bp := erasureThreshold(t, e).Value; bound < bp*(1-1e-12) {
			t.Errorf("%v: %.12g, below the BP threshold %.12g", e, bound, bp)
		}
		if bound > 1-rate+1e-12 {
			t.Errorf("%v: %.12g, above the Shannon limit %.12g", e, bound, 1-rate)
		}
		nodes := e.Lambda.Nodes()
		var area, last float64
		jumps := 0
		const n = 2000
		for i := range n {
			epsilon := bound + (1-bound)*(float64(i)+.5)/n
			y := largestFixedPoint(e, epsilon)
			exit := y * nodes.At(y)
			area += exit * (1 - bound) / n
			if i > 0 && exit-last > .05 {
				jumps++
			}
			last = exit
		}
		if jumps > 0 {
			severalJumps++
		}
		// A jump of up to 1 falls somewhere in a step.
		if math.Abs(area-rate) > 2./n {
			t.Errorf("%v: area from %.9f is %.6f, rate %.6f", e, bound, area, rate)
		}
	}
	if severalJumps < 2 {
		t.Errorf("%d ensembles had a jump above the bound, want at least 2", severalJumps)
	}
}

func BenchmarkMAPUpperBound(b *testing.B) {
	e := ensembles.Regular(3, 6)
	for b.Loop() {
		MAPUpperBound(e)
	}
}

package de

import (
	"context"
	"math"
	"slices"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// twoTunnels is a family of ensembles with two tight places which swap as the
// share of the largest degree grows.
func twoTunnels(t *testing.T, largest int, share float64) ensembles.Ensemble {
	t.Helper()
	d, err := ensembles.NewDistribution(
		ensembles.Term{Degree: 3, Fraction: 1 - share},
		ensembles.Term{Degree: largest, Fraction: share})
	if err != nil {
		t.Fatal(err)
	}
	return ensembles.Ensemble{Lambda: d, Rho: distribution(t, "5:1")}
}

// Where two tunnels are equally tight the threshold has a kink, and both are
// listed. The share at which they swap is found by bisection on which one the
// engine lists first; the swap of the values is checked by scanning.
func TestExactTwoTunnels(t *testing.T) {
	for _, largest := range []int{38, 60, 1000, 10000} {
		where := func(share float64) float64 {
			return erasureThreshold(t, twoTunnels(t, largest, share)).Critical[0].Entropy
		}
		low, high := .1, .55
		atLow, atHigh := where(low), where(high)
		if !(atLow < .4 && atHigh > .6) {
			t.Fatalf("degree %d: critical at %g and %g, want a swap", largest, atLow, atHigh)
		}
		for high-low > 1e-15 {
			middle := (low + high) / 2
			if middle == low || middle == high {
				break
			}
			if x := where(middle); math.Abs(math.Log(x/atLow)) < math.Abs(math.Log(x/atHigh)) {
				low, atLow = middle, x
			} else {
				high, atHigh = middle, x
			}
		}
		for _, offset := range []float64{-1e-3, -1e-6, -1e-9, 0, 1e-9, 1e-6, 1e-3} {
			e := twoTunnels(t, largest, low+offset)
			got := erasureThreshold(t, e)
			if len(got.Critical) < 2 {
				t.Fatalf("degree %d%+g: critical %v, want two", largest, offset, got.Critical)
			}
			if gap := got.Critical[1].Slack; gap > 10*math.Abs(offset)+1e-13 || gap < math.Abs(offset)/10-1e-13 {
				t.Errorf("degree %d%+g: slack of the second %g", largest, offset, gap)
			}
			least := math.Inf(1)
			for v := 0.0; v < 20; v += 1e-3 {
				least = math.Min(least, erasureAtLog(&e, -v).f)
			}
			if got.Value > least || got.Value < least*(1-1e-5) {
				t.Errorf("degree %d%+g: %.15g, scan %.15g", largest, offset, got.Value, least)
			}
			for _, c := range got.Critical {
				if c.Entropy == 0 {
					continue
				}
				// They are fixed points: x = ε(1+slack)·λ(1-ρ(1-x)).
				y, _, _, _ := check(e.Rho, c.Entropy)
				if x := got.Value * (1 + c.Slack) * e.Lambda.At(y); math.Abs(x/c.Entropy-1) > 1e-10 {
					t.Errorf("degree %d%+g: %v is no fixed point", largest, offset, c)
				}
			}
		}
	}
}

// The same under the Gaussian approximation: both places are listed near the
// swap, the value is the least of a scan, and it has no jump there.
func TestGaussianTwoTunnels(t *testing.T) {
	swaps := 0
	for _, largest := range []int{38, 60, 1000} {
		var last Threshold
		for share := .1; share < .55; share += .01 {
			e := twoTunnels(t, largest, share)
			got, err := GaussianEngine{}.Threshold(context.Background(), e, channel.BIAWGN{})
			if err != nil {
				t.Fatal(err)
			}
			search := tunnelSearch{e: &e}
			for v := math.Log(.05); v < math.Log(1500); v += 2e-3 {
				search.at(v, 1)
			}
			scan := math.Min(sigmaOfMean(search.best.s), StabilityOf(e, channel.BIAWGN{}, 1).Bound)
			if got.Value > scan*(1+1e-12) || got.Value < scan*(1-1e-5) {
				t.Errorf("degree %d, share %g: σ = %.12f, scan %.12f", largest, share, got.Value, scan)
			}
			if !slices.IsSortedFunc(got.Critical, func(a, b Critical) int {
				if a.Slack < b.Slack {
					return -1
				}
				return 1
			}) || len(got.Critical) == 0 || got.Critical[0].Slack > 1e-9 {
				t.Errorf("degree %d, share %g: critical %v", largest, share, got.Critical)
			}
			if last.Value > 0 && math.Abs(got.Critical[0].Entropy-last.Critical[0].Entropy) > .1 {
				swaps++
			}
			last = got
		}
	}
	if swaps == 0 {
		t.Error("no tunnels swapped")
	}
}

package de

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

func distribution(t testing.TB, text string) ensembles.Distribution {
	t.Helper()
	d, err := ensembles.ParseDistribution(text)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

func erasureThreshold(t testing.TB, e ensembles.Ensemble) Threshold {
	t.Helper()
	got, err := ExactEngine{}.Threshold(context.Background(), e, channel.BEC{})
	if err != nil {
		t.Fatal(err)
	}
	return got
}

// Regular thresholds on the BEC: min x/(1-(1-x)^(dc-1))^(dv-1), computed to
// seven digits; the method is from Luby et al. (2001) and Richardson &
// Urbanke (2001).
func TestExactRegular(t *testing.T) {
	for _, test := range []struct {
		dv, dc int
		want   float64
	}{
		{3, 4, .6474256}, {3, 5, .5175702}, {3, 6, .4294398}, {3, 9, .2828368},
		{3, 12, .2104754}, {4, 6, .5061323}, {4, 8, .3834466}, {4, 10, .3079449},
		{5, 10, .3415500},
	} {
		got := erasureThreshold(t, ensembles.Regular(test.dv, test.dc))
		if math.Abs(got.Value-test.want) > 0.51e-7 {
			t.Errorf("(%d,%d): %.9f, want %.7f", test.dv, test.dc, got.Value, test.want)
		}
		if !(got.Uncertainty <= 1e-12) {
			t.Errorf("(%d,%d): uncertainty %g, want at most 1e-12", test.dv, test.dc, got.Uncertainty)
		}
		if len(got.Critical) != 1 || got.Critical[0].Slack != 0 {
			t.Errorf("(%d,%d): critical %v, want one with no slack", test.dv, test.dc, got.Critical)
		}
	}
}

// rightRegular is the sequence of Shokrollahi, New sequences of linear time
// erasure codes approaching the channel capacity, 1999 (recalled): with
// α = 1/(a-1) and n-1 terms, λᵢ₊₁ ∝ C(α,i)(-1)^(i+1), and the threshold is the
// normalising sum itself.
func rightRegular(a, n int) (e ensembles.Ensemble, threshold float64) {
	alpha := 1 / float64(a-1)
	var terms []ensembles.Term
	binomial := 1.0 // C(α,i)(-1)^(i+1)
	for i := 1; i < n; i++ {
		if i == 1 {
			binomial = alpha
		} else {
			binomial *= (float64(i-1) - alpha) / float64(i)
		}
		terms = append(terms, ensembles.Term{Degree: i + 1, Fraction: binomial})
		threshold += binomial
	}
	return ensembles.Ensemble{
		Lambda: ensembles.Normalize(terms),
		Rho:    ensembles.Distribution{{Degree: a, Fraction: 1}},
	}, threshold
}

func TestExactRightRegular(t *testing.T) {
	for _, test := range []struct {
		a, n            int
		threshold, rate float64 // computed
	}{
		{5, 8, .504894, .461797}, {6, 13, .480896, .499103},
		{8, 50, .481990, .512965}, {9, 100, .483562, .513928},
	} {
		e, want := rightRegular(test.a, test.n)
		if math.Abs(want-test.threshold) > 0.51e-6 || math.Abs(e.DesignRate()-test.rate) > 0.51e-6 {
			t.Fatalf("(%d,%d): sequence has threshold %.7f and rate %.7f, want %.6f and %.6f",
				test.a, test.n, want, e.DesignRate(), test.threshold, test.rate)
		}
		got := erasureThreshold(t, e)
		if math.Abs(got.Value-want) > 1e-12 {
			t.Errorf("(%d,%d): %.15f, want %.15f", test.a, test.n, got.Value, want)
		}
		if !(got.Uncertainty <= 1e-10) {
			t.Errorf("(%d,%d): uncertainty %g, want at most 1e-10", test.a, test.n, got.Uncertainty)
		}
		// The threshold is the stability bound.
		if !slices.ContainsFunc(got.Critical, func(c Critical) bool { return c.Entropy == 0 && c.Slack < 1e-13 }) {
			t.Errorf("(%d,%d): critical %v, want the stability condition among them", test.a, test.n, got.Critical)
		}
	}
}

// heavyTail is the sequence of Luby, Mitzenmacher, Shokrollahi & Spielman
// (2001, recalled): λᵢ₊₁ = 1/(H(D)·i) for i = 1…D, and Poisson checks cut off
// where the rest is below rounding.
func heavyTail(d int, alpha float64) ensembles.Ensemble {
	var lambda, rho []ensembles.Term
	for i := 1; i <= d; i++ {
		lambda = append(lambda, ensembles.Term{Degree: i + 1, Fraction: 1 / float64(i)})
	}
	p := 1.0
	for i := 1; i < 30 || p > 1e-20; i++ {
		rho = append(rho, ensembles.Term{Degree: i, Fraction: p})
		p *= alpha / float64(i)
	}
	return ensembles.Ensemble{Lambda: ensembles.Normalize(lambda), Rho: ensembles.Normalize(rho)}
}

// With Poisson checks ρ(x) = e^(α(x-1)), and λ(y) ≤ -ln(1-y)/H(D) term by
// term, so λ(1-ρ(1-x)) ≤ αx/H(D) and the threshold is at least H(D)/α (the
// proof of Luby et al., 2001). The stability condition says it is at most
// 1/(λ₂ρ'(1)) = H(D)/α.
func TestExactHeavyTail(t *testing.T) {
	for _, d := range []int{4, 8, 30, 100} {
		const alpha = 5.6
		var harmonic float64
		for i := 1; i <= d; i++ {
			harmonic += 1 / float64(i)
		}
		got := erasureThreshold(t, heavyTail(d, alpha))
		if want := harmonic / alpha; math.Abs(got.Value-want) > 1e-12 {
			t.Errorf("D = %d: %.15f, want %.15f", d, got.Value, want)
		}
	}
}

// bigF is x/λ(1-ρ(1-x)) in 200-bit arithmetic.
func bigF(e ensembles.Ensemble, x float64) float64 {
	real := func(v float64) *big.Float { return new(big.Float).SetPrec(200).SetFloat64(v) }
	power := func(x *big.Float, n int) *big.Float {
		r, b := real(1), real(0).Set(x)
		for ; n > 0; n >>= 1 {
			if n&1 == 1 {
				r.Mul(r, b)
			}
			b.Mul(b, b)
		}
		return r
	}
	polynomial := func(d ensembles.Distribution, x *big.Float) *big.Float {
		sum := real(0)
		for _, t := range d {
			sum.Add(sum, real(0).Mul(real(t.Fraction), power(x, t.Degree-1)))
		}
		return sum
	}
	// The fractions sum to 1 but for rounding.
	r := polynomial(e.Rho, real(0).Sub(real(1), real(x)))
	y := real(1)
	y.Sub(y, r.Quo(r, polynomial(e.Rho, real(1))))
	f, _ := real(0).Quo(real(x), polynomial(e.Lambda, y)).Float64()
	return f
}

// randomEnsemble draws distributions of a few degrees up to the largest given.
func randomEnsemble(r *rand.Rand, largestVariable, largestCheck int) ensembles.Ensemble {
	draw := func(least, largest, terms int) ensembles.Distribution {
		var out []ensembles.Term
		for d := range terms {
			low := math.Log(float64(least))
			degree := int(math.Exp(low + r.Float64()*(math.Log(float64(largest+1))-low)))
			if d == 0 && r.IntN(3) > 0 {
				degree = least
			}
			out = append(out, ensembles.Term{Degree: degree, Fraction: r.ExpFloat64()})
		}
		// Merge equal degrees.
		sum := map[int]float64{}
		for _, t := range out {
			sum[t.Degree] += t.Fraction
		}
		out = out[:0]
		for d := least; d <= largest; d++ {
			if sum[d] > 0 {
				out = append(out, ensembles.Term{Degree: d, Fraction: sum[d]})
			}
		}
		return ensembles.Normalize(out)
	}
	return ensembles.Ensemble{
		Lambda: draw(2, largestVariable, 1+r.IntN(6)),
		Rho:    draw(2, largestCheck, 1+r.IntN(3)),
	}
}

func TestErasurePointAgainstLongArithmetic(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 300 {
		e := randomEnsemble(r, 10000, 10000)
		for _, x := range []float64{1e-12, 3e-9, 1e-6, 1e-4, .003, .05, .2, .5, .8, .99, 1 - 1e-6} {
			want := bigF(e, x)
			got := erasureAt(&e, x).f
			if want > 10 {
				continue // far above any threshold
			}
			if math.Abs(got/want-1) > evaluationError {
				t.Fatalf("%v: f(%g) = %.17g, want %.17g", e, x, got, want)
			}
		}
	}
}

// Scanning f on a dense grid in both ln x and ln(1-x) and refining is the
// second method.
func TestExactAgainstScan(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for range 200 {
		e := randomEnsemble(r, 1+int(math.Pow(10, 1+3*r.Float64())), 2+int(math.Pow(10, 1+2*r.Float64())))
		got := erasureThreshold(t, e)
		least := 1.0
		for i := 0; i <= 6000; i++ {
			v := 30 * float64(i) / 6000
			least = math.Min(least, erasureAt(&e, math.Exp(-v)).f)
			if v > 0 {
				least = math.Min(least, erasureAt(&e, -math.Expm1(-v)).f)
			}
		}
		if got.Value > least*(1+2e-13) || got.Value < least*(1-1e-4) {
			t.Errorf("%v: %.15g, scan %.15g", e, got.Value, least)
		}
		if got.Uncertainty > 1e-12 {
			t.Errorf("%v: uncertainty %g after %d points", e, got.Uncertainty, got.Iterations)
		}
	}
}

func TestExactErrors(t *testing.T) {
	_, err := ExactEngine{}.Threshold(context.Background(), ensembles.Regular(3, 6), channel.BSC{})
	var wrong *ErrChannel
	if !errors.As(err, &wrong) || wrong.Channel != "bsc" || wrong.Method != Exact {
		t.Errorf("BSC: %v, want ErrChannel", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := (ExactEngine{}).Threshold(ctx, ensembles.Regular(3, 6), channel.BEC{}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// benchmarked holds ensembles of three to six degrees, of one largest degree
// after another with the same number of terms.
var benchmarked = []struct{ name, lambda, rho string }{
	{"regular", "3:1", "6:1"},
	{"terms=3", "2:0.3,3:0.3,10:0.4", "6:1"},
	{"terms=4", "2:0.25105,3:0.30938,4:0.00104,10:0.43853", "7:0.63676,8:0.36324"},
	{"terms=5", "2:0.2,3:0.2,5:0.1,8:0.15,20:0.35", "8:1"},
	// Nearly flat: the outcome of a design for ε = 0.45.
	{"terms=5,flat", "2:0.31746031746031744,3:0.12075804290167375,4:0.15131030086443908,8:0.21382666578490211,20:0.1966446729886676", "8:1"},
	{"terms=6", "2:0.2,3:0.2,5:0.1,8:0.1,20:0.25,50:0.15", "9:1"},
	{"largest=10", "2:0.25,3:0.2,5:0.15,10:0.4", "7:1"},
	{"largest=100", "2:0.25,3:0.2,5:0.15,100:0.4", "7:1"},
	{"largest=1000", "2:0.25,3:0.2,5:0.15,1000:0.4", "7:1"},
	{"largest=10000", "2:0.25,3:0.2,5:0.15,10000:0.4", "7:1"},
}

func BenchmarkExact(b *testing.B) {
	for _, test := range benchmarked {
		b.Run(test.name, func(b *testing.B) {
			benchmarkThreshold(b, ExactEngine{}, ensembles.Ensemble{
				Lambda: distribution(b, test.lambda), Rho: distribution(b, test.rho)}, channel.BEC{})
		})
	}
	// The flattest there are, whose certificate needs many points.
	for _, n := range []int{8, 50} {
		b.Run(fmt.Sprintf("rightregular/terms=%d", n-1), func(b *testing.B) {
			e, _ := rightRegular(8, n)
			benchmarkThreshold(b, ExactEngine{}, e, channel.BEC{})
		})
	}
}

func benchmarkThreshold(b *testing.B, engine Engine, e ensembles.Ensemble, f channel.Family) {
	b.ReportAllocs()
	var got Threshold
	for b.Loop() {
		var err error
		if got, err = engine.Threshold(context.Background(), e, f); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(got.Iterations), "points")
}

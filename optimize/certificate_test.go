package optimize

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

func certificateOf(t *testing.T, p Problem) *Certificate {
	t.Helper()
	return mustSearch(t, p, Settings{Evaluations: 12}).Certificate
}

// Whatever is changed in favour of the bound must be found.
func TestTamperedCertificates(t *testing.T) {
	good := certificateOf(t, Problem{
		Channel: channel.BEC{}, Rate: 0.5, VariableDegrees: DegreesUpTo(12),
		Limits: Limits{StabilityMargin: 0.3, DegreeTwoParity: true},
	})
	if err := good.Verify(); err != nil {
		t.Fatal(err)
	}
	for name, change := range map[string]func(c *Certificate){
		"a lower bound":           func(c *Certificate) { c.Bound -= 1e-9 },
		"a bound above 1":         func(c *Certificate) { c.Bound = 1.5 },
		"no bound":                func(c *Certificate) { c.Bound = math.NaN() },
		"a larger alpha":          func(c *Certificate) { c.Alpha += 1e-9 },
		"an infinite alpha":       func(c *Certificate) { c.Alpha = math.Inf(1) },
		"a smaller alpha":         func(c *Certificate) { c.Alpha -= 1e-6 },
		"another beta":            func(c *Certificate) { c.Beta *= 1 + 1e-6 },
		"a NaN beta":              func(c *Certificate) { c.Beta = math.NaN() },
		"a weight more":           func(c *Certificate) { c.Weights[0] *= 1.001 },
		"a weight less":           func(c *Certificate) { c.Weights[0] *= 0.999 },
		"a negative weight":       func(c *Certificate) { c.Weights[0] *= -1 },
		"a point moved":           func(c *Certificate) { c.Points[len(c.Points)-1] *= 0.99 },
		"a point outside":         func(c *Certificate) { c.Points[0] = 1 },
		"a point without weight":  func(c *Certificate) { c.Points = append(c.Points, 0.5) },
		"another rate":            func(c *Certificate) { c.Rate -= 1e-6 },
		"no rate":                 func(c *Certificate) { c.Rate = 1 },
		"another rho":             func(c *Certificate) { c.Rho = ensembles.Distribution{{Degree: 9, Fraction: 1}} },
		"a rho that does not sum": func(c *Certificate) { c.Rho[0].Fraction *= 1.1 },
		"degrees out of order":    func(c *Certificate) { slices.Reverse(c.VariableDegrees) },
		"no degrees":              func(c *Certificate) { c.VariableDegrees = nil },
		"no margin":               func(c *Certificate) { c.StabilityMargin = 0 },
		"parity not a limit":      func(c *Certificate) { c.DegreeTwoParity, c.ParityWeight = false, 0.1 },
		"a negative row weight":   func(c *Certificate) { c.StabilityWeight = -0.1 },
	} {
		c := *good
		c.Points, c.Weights = slices.Clone(c.Points), slices.Clone(c.Weights)
		c.Rho, c.VariableDegrees = slices.Clone(c.Rho), slices.Clone(c.VariableDegrees)
		change(&c)
		if err := c.Verify(); err == nil {
			t.Errorf("%s: verified", name)
		}
	}
}

// A larger degree would help where the largest binds: the certificate does not
// speak for it.
func TestCertificateIsForItsDegrees(t *testing.T) {
	c := certificateOf(t, Problem{Channel: channel.BEC{}, Rate: 0.5, VariableDegrees: DegreesUpTo(12)})
	c.VariableDegrees = DegreesUpTo(13)
	if err := c.Verify(); err == nil {
		t.Error("verified for a degree that was not allowed")
	}
}

// No λ drawn at random, at the rate and with the degrees of the certificate,
// has a threshold above the bound.
func TestBoundHoldsForRandomLambda(t *testing.T) {
	r := rand.New(rand.NewPCG(21, 22))
	for _, rate := range []float64{0.2, 0.5, 0.8} {
		c := certificateOf(t, Problem{Channel: channel.BEC{}, Rate: rate, VariableDegrees: DegreesUpTo(10)})
		mean := c.Rho.Integral() / (1 - rate)
		closest := 0.
		for range 2000 {
			// A random mixture of pairs of degrees that have the mean.
			var terms [11]float64
			var total float64
			for range 1 + r.IntN(4) {
				low, high := 2+r.IntN(int(1/mean)-1), int(1/mean)+1+r.IntN(10-int(1/mean))
				f := (mean - 1/float64(high)) / (1/float64(low) - 1/float64(high))
				w := r.ExpFloat64()
				total += w
				terms[low] += w * f
				terms[high] += w * (1 - f)
			}
			threshold := 1.
			for k := 1; k <= 400; k++ {
				x := float64(k) / 400
				y := erasureY(c.Rho, x)
				sum := 0.
				for degree, f := range terms {
					if f > 0 {
						sum += f / total * math.Pow(y, float64(degree-1))
					}
				}
				threshold = min(threshold, x/sum)
			}
			threshold = min(threshold, total/(terms[2]*c.Rho.Derivative(1)))
			closest = max(closest, threshold/c.Bound)
			if threshold > c.Bound*(1+1e-4) { // the grid sees a little too much
				t.Fatalf("rate %v: λ %v has threshold %v, bound %v", rate, terms, threshold, c.Bound)
			}
		}
		if closest < 0.9 {
			t.Errorf("rate %v: the best random λ reaches only %v of the bound", rate, closest)
		}
	}
}

// The bound for a mean check degree is the inverse of the rate bound, rises
// with the degree to the Shannon limit, and for 6 at rate 1/2 is that of the
// formula (computed).
func TestMeanDegreeBound(t *testing.T) {
	for _, rate := range []float64{0.1, 0.5, 0.9} {
		last := 0.
		for _, a := range []float64{2.5, 4, 6.5, 10, 20, 50, 400} {
			epsilon := MeanDegreeBound(a, rate)
			if epsilon < last || epsilon > 1-rate {
				t.Errorf("rate %v, degree %v: %v after %v", rate, a, epsilon, last)
			}
			last = epsilon
			if epsilon == 0 {
				if a*(1-rate) > 1 {
					t.Errorf("rate %v, degree %v: no bound", rate, a)
				}
				continue
			}
			if got := 1 - epsilon/(1-math.Pow(1-epsilon, a)); math.Abs(got-rate) > 1e-12 {
				t.Errorf("rate %v, degree %v: bound %v is for rate %v", rate, a, epsilon, got)
			}
		}
		if last < (1-rate)*(1-1e-9) {
			t.Errorf("rate %v: %v at degree 400", rate, last)
		}
	}
}

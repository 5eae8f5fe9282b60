package ensembles

import (
	"fmt"
	"math"
	"testing"
)

func TestNewRefuses(t *testing.T) {
	three, six := Distribution{{3, 1}}, Distribution{{6, 1}}
	tests := []struct {
		lambda, rho Distribution
		want        string
	}{
		{nil, six, "lambda: must have at least one degree"},
		{three, nil, "rho: must have at least one degree"},
		{three, Distribution{{1, 0.1}, {6, 0.9}}, "rho: degree 1: must be at least 2"},
	}
	for _, test := range tests {
		if _, err := New(test.lambda, test.rho); err == nil || err.Error() != test.want {
			t.Errorf("New(%v, %v): %v, want %q", test.lambda, test.rho, err, test.want)
		}
	}
	if _, err := New(three, six); err != nil {
		t.Error(err)
	}
}

// The rate of a (dv,dc)-regular ensemble is 1 - dv/dc, from counting edges.
func TestRegularRate(t *testing.T) {
	for dv := 1; dv <= 12; dv++ {
		for dc := 2; dc <= 40; dc++ {
			e := Regular(dv, dc)
			if got, want := e.DesignRate(), 1-float64(dv)/float64(dc); math.Abs(got-want) > 1e-14*float64(dv) {
				t.Errorf("(%d,%d): rate %v, want %v", dv, dc, got, want)
			}
		}
	}
}

// Published rates: Richardson & Urbanke, IEEE Trans. Inf. Theory 47(2), 2001,
// and the right-regular sequences of Shokrollahi (1999) with check degree a
// and N terms, λᵢ = C(α,i)(-1)^(i+1)/S (recalled, the rates computed).
func TestPublishedRates(t *testing.T) {
	for _, c := range []struct {
		a, n int
		rate float64
	}{{5, 8, .461797}, {6, 13, .499103}, {8, 50, .512965}, {9, 100, .513928}} {
		alpha := 1 / float64(c.a-1)
		var terms []Term
		binomial := -1.0 // C(α,i)(-1)^(i+1)
		for i := 1; i < c.n; i++ {
			binomial *= -(alpha - float64(i-1)) / float64(i)
			terms = append(terms, Term{i + 1, binomial})
		}
		e := Ensemble{Normalize(terms), Distribution{{c.a, 1}}}
		if got := e.DesignRate(); math.Abs(got-c.rate) > 5e-7 {
			t.Errorf("right-regular (%d,%d): rate %.6f, want %.6f", c.a, c.n, got, c.rate)
		}
	}
}

// Both sides have the same number of edges: (1-rate)·check degree = variable
// degree, in the means over nodes.
func TestMeansAgreeWithRate(t *testing.T) {
	r := seeded(5)
	for range 200 {
		e := randomEnsemble(r, 8, 60)
		left := (1 - e.DesignRate()) * e.MeanCheckDegree()
		if math.Abs(left-e.MeanVariableDegree()) > 1e-12*left || e.EdgesPerBit() != e.MeanVariableDegree() {
			t.Fatalf("%v: %v edges per bit at the checks, %v at the variable nodes", e, left, e.MeanVariableDegree())
		}
	}
}

func ExampleEnsemble_DesignRate() {
	lambda, _ := ParseDistribution("2:0.25,3:0.25,8:0.5")
	rho, _ := ParseDistribution("7:1")
	e, err := New(lambda, rho)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("rate %.4f, %.3f edges per bit\n", e.DesignRate(), e.EdgesPerBit())
	// Output: rate 0.4725, 3.692 edges per bit
}

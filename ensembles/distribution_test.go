package ensembles

import (
	"fmt"
	"math"
	"math/big"
	"slices"
	"testing"
)

func TestParseDistributionRefuses(t *testing.T) {
	tests := []struct{ text, want string }{
		{"", `"": must be DEGREE:FRACTION, as in 2:0.3,3:0.7`},
		{"2", `"2": must be DEGREE:FRACTION, as in 2:0.3,3:0.7`},
		{"2:0.3,", `"": must be DEGREE:FRACTION, as in 2:0.3,3:0.7`},
		{"2.5:1", `degree "2.5": must be a whole number from 1 to 1000000`},
		{"02:1", `degree "02": must be a whole number from 1 to 1000000`},
		{"+2:1", `degree "+2": must be a whole number from 1 to 1000000`},
		{"0:1", `degree "0": must be a whole number from 1 to 1000000`},
		{"-3:1", `degree "-3": must be a whole number from 1 to 1000000`},
		{"1000001:1", `degree "1000001": must be a whole number from 1 to 1000000`},
		{"99999999999999999999:1", `degree "99999999999999999999": must be a whole number from 1 to 1000000`},
		{"3:half", `fraction "half" of degree 3: must be a number from 0 to 1`},
		{"3:0.5:0.5", `fraction "0.5:0.5" of degree 3: must be a number from 0 to 1`},
		{"3:1e999", `fraction "1e999" of degree 3: must be a number from 0 to 1`},
		{"3:NaN", "fraction NaN of degree 3: must be finite and not negative"},
		{"3:Inf", "fraction +Inf of degree 3: must be finite and not negative"},
		{"3:-0.5,4:1.5", "fraction -0.5 of degree 3: must be finite and not negative"},
		{"3:0.5,3:0.5", "degree 3: given twice"},
		{"3:0.5,4:0.4", "fractions sum to 0.9: must sum to 1 within 1e-06"},
		{"3:0.5,4:0.500002", "fractions sum to 1.000002: must sum to 1 within 1e-06"},
		{"3:0", "fractions sum to 0: must sum to 1 within 1e-06"},
	}
	for _, test := range tests {
		d, err := ParseDistribution(test.text)
		if err == nil || err.Error() != test.want {
			t.Errorf("ParseDistribution(%q) = %v, %v; want error %q", test.text, d, err, test.want)
		}
	}
}

func TestNewDistributionSortsAndNormalises(t *testing.T) {
	d, err := NewDistribution(Term{7, 0.5}, Term{2, 0.4999995}, Term{3, 0})
	if err != nil {
		t.Fatal(err)
	}
	if len(d) != 2 || d.Min() != 2 || d.Max() != 7 {
		t.Errorf("got %v, want the degrees 2 and 7", d)
	}
	if x := Excess(d); math.Abs(x) > 1e-15 {
		t.Errorf("the sum misses 1 by %g", x)
	}
	exact := Distribution{{2, 0.1}, {3, 0.2}, {4, 0.7}}
	if d, err := NewDistribution(exact...); err != nil || !slices.Equal(d, exact) {
		t.Errorf("got %v, %v; want %v as it is", d, err, exact)
	}
}

// The text form reads back to the same bits.
func TestDistributionTextRoundTrip(t *testing.T) {
	r := seeded(1)
	for range 300 {
		d := randomDistribution(r, 12, 1, 300)
		back, err := ParseDistribution(d.String())
		if err != nil || !slices.Equal(back, d) {
			t.Fatalf("%v came back as %v, %v", d, back, err)
		}
	}
}

// From edges to nodes and back gives the same fractions within the rounding
// of two quotients and of the sum, and the mean degree of both views is the same.
func TestPerspectiveRoundTrip(t *testing.T) {
	r := seeded(2)
	for range 300 {
		edges := randomDistribution(r, 12, 1, 1000)
		nodes := edges.Nodes()
		rounding := 4*0x1p-52 + math.Abs(Excess(edges)) // relative to the result
		for i, back := range nodes.Edges() {
			if math.Abs(back.Fraction-edges[i].Fraction) > rounding*edges[i].Fraction {
				t.Fatalf("%v came back with %v", edges, back)
			}
		}
		var mean float64
		for _, n := range nodes {
			mean += float64(n.Degree) * n.Fraction
		}
		if want := 1 / edges.Integral(); math.Abs(mean-want) > 1e-12*want {
			t.Fatalf("%v: mean degree %v over nodes, %v from the integral", edges, mean, want)
		}
	}
}

// Both perspectives are rational functions: exact arithmetic, rounded once,
// gives the same bits.
func TestPerspectiveIsExact(t *testing.T) {
	r := seeded(6)
	for range 200 {
		d := randomDistribution(r, 12, 1, 1000)
		weights := make([]*big.Rat, len(d))
		sum := new(big.Rat)
		for i, term := range d {
			weights[i] = new(big.Rat).SetFloat64(term.Fraction)
			weights[i].Quo(weights[i], big.NewRat(int64(term.Degree), 1))
			sum.Add(sum, weights[i])
		}
		for i, n := range d.Nodes() {
			if want, _ := weights[i].Quo(weights[i], sum).Float64(); n.Fraction != want {
				t.Fatalf("%v: %v of the nodes have degree %d, exactly %v", d, n.Fraction, n.Degree, want)
			}
		}
	}
}

// Whole numbers of nodes give exact fractions: those of the rate-1/2 code of
// ETSI EN 302 307, Annex B (recalled): 12960 nodes of degree 8, 19440 of
// degree 3, 32399 of degree 2 and one of degree 1.
func TestNodesOfStandardCode(t *testing.T) {
	counts := Counts{{1, 1}, {2, 32399}, {3, 19440}, {8, 12960}}
	nodes := counts.edges().Nodes()
	for i, c := range counts {
		want, _ := big.NewRat(int64(c.Nodes), int64(counts.Nodes())).Float64()
		if got := nodes[i].Fraction; math.Abs(got-want) > 0x1p-52*want {
			t.Errorf("degree %d: %v of the nodes, want %v", c.Degree, got, want)
		}
	}
}

// At and Derivative agree with Horner's rule on the dense polynomial, and
// Integral with the sum of the quotients in rational arithmetic.
func TestPolynomialAgreesWithHorner(t *testing.T) {
	r := seeded(3)
	for range 200 {
		d := randomDistribution(r, 8, 1, 60)
		x := r.Float64()
		var value, slope float64
		for degree := d.Max(); degree >= 1; degree-- {
			slope = slope*x + value
			value = value*x + d.Fraction(degree)
		}
		if got := d.At(x); math.Abs(got-value) > 1e-13 {
			t.Fatalf("%v at %v is %v, by Horner's rule %v", d, x, got, value)
		}
		if got := d.Derivative(x); math.Abs(got-slope) > 1e-12*float64(d.Max()) {
			t.Fatalf("derivative of %v at %v is %v, by Horner's rule %v", d, x, got, slope)
		}
		sum := new(big.Rat)
		for _, term := range d {
			q := new(big.Rat).SetFloat64(term.Fraction)
			sum.Add(sum, q.Quo(q, big.NewRat(int64(term.Degree), 1)))
		}
		if want, _ := sum.Float64(); math.Abs(d.Integral()-want) > 1e-15 {
			t.Fatalf("integral of %v is %v, exactly %v", d, d.Integral(), want)
		}
	}
}

func TestPower(t *testing.T) {
	for n := range 40 {
		for _, x := range []float64{0, 0.25, 0.5, 1, 2} { // powers of two: exact
			if got, want := Power(x, n), math.Pow(x, float64(n)); got != want {
				t.Errorf("Power(%v, %d) = %v, want %v", x, n, got, want)
			}
		}
	}
}

// Concentrated has the mean asked for, on one degree or two neighbours.
func TestConcentratedMean(t *testing.T) {
	r := seeded(4)
	for range 300 {
		mean := 1 + 50*r.Float64()
		if r.IntN(4) == 0 {
			mean = math.Floor(mean)
		}
		d := Concentrated(mean)
		if _, err := NewDistribution(d...); err != nil {
			t.Fatalf("mean %v: %v: %v", mean, d, err)
		}
		if d.Max()-d.Min() > 1 || math.Abs(1/d.Integral()-mean) > 1e-11*mean {
			t.Fatalf("mean %v: got %v of mean %v", mean, d, 1/d.Integral())
		}
	}
}

func TestFraction(t *testing.T) {
	d := Distribution{{2, 0.25}, {5, 0.75}}
	for degree, want := range map[int]float64{1: 0, 2: 0.25, 3: 0, 5: 0.75, 6: 0} {
		if got := d.Fraction(degree); got != want {
			t.Errorf("Fraction(%d) = %v, want %v", degree, got, want)
		}
	}
}

// Whatever is accepted is a distribution, and reads back to the same bits.
func FuzzParseDistribution(f *testing.F) {
	for _, text := range []string{"2:0.3,3:0.7", "3:1", " 2 : 1 ", "2:.5,3:5e-1", "2:0.9999999,3:0", "1:1e-300,2:1", "2:0x1p-1,3:0.5"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		d, err := ParseDistribution(text)
		if err != nil {
			return
		}
		if x := Excess(d); math.Abs(x) > roundingTolerance {
			t.Errorf("%q: the sum misses 1 by %g", text, x)
		}
		back, err := ParseDistribution(d.String())
		if err != nil || !slices.Equal(back, d) {
			t.Errorf("%q: %v came back as %v, %v", text, d, back, err)
		}
	})
}

func ExampleParseDistribution() {
	lambda, err := ParseDistribution("2:0.4,3:0.6")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("of the edges:", lambda)
	fmt.Println("of the nodes:", lambda.Nodes())
	// Output:
	// of the edges: 2:0.4,3:0.6
	// of the nodes: 2:0.5,3:0.5
}

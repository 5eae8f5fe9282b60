package ensembles

import (
	"fmt"
	"math"
	"reflect"
	"testing"
)

// erasureThreshold is the decoding threshold on the BEC, min x/λ(1-ρ(1-x)),
// over a grid: fine enough to tell roundings apart.
func erasureThreshold(e Ensemble) float64 {
	least := 1.0
	for i := 1; i <= 200; i++ {
		x := float64(i) / 200
		least = math.Min(least, x/e.Lambda.At(1-e.Rho.At(1-x)))
	}
	return least
}

// What can be counted by hand comes out so.
func TestRealizeByHand(t *testing.T) {
	dist := func(text string) Distribution {
		d, err := ParseDistribution(text)
		if err != nil {
			t.Fatal(err)
		}
		return d
	}
	tests := []struct {
		name            string
		e               Ensemble
		length          int
		variable, check Counts
	}{
		{"regular, even", Regular(3, 6), 100, Counts{{3, 100}}, Counts{{6, 50}}},
		{"regular, odd: 303 = 48·6 + 3·5", Regular(3, 6), 101, Counts{{3, 101}}, Counts{{5, 3}, {6, 48}}},
		{"regular, ten million", Regular(4, 8), 10_000_000, Counts{{4, 10_000_000}}, Counts{{8, 5_000_000}}},
		// Nodes half and half of degrees 2 and 4, mean 3.
		{"exact shares", Ensemble{dist("2:0.33333333333333333,4:0.66666666666666667"), dist("6:1")}, 100, Counts{{2, 50}, {4, 50}}, Counts{{6, 50}}},
		// 25.25 and 75.75 nodes: 26 and 75 make 352 edges, 8·44; 25 and 76 make 354.
		{"pure checks before the nearest rounding", Ensemble{Distribution{{2, 2. / 14}, {4, 12. / 14}}, dist("8:1")}, 101, Counts{{2, 26}, {4, 75}}, Counts{{8, 44}}},
	}
	for _, test := range tests {
		r, err := Realize(test.e, test.length, nil)
		if err != nil {
			t.Errorf("%s: %v", test.name, err)
			continue
		}
		if !reflect.DeepEqual(r.VariableNodes, test.variable) || !reflect.DeepEqual(r.CheckNodes, test.check) {
			t.Errorf("%s: got %v and %v, want %v and %v", test.name, r.VariableNodes, r.CheckNodes, test.variable, test.check)
		}
	}
}

// The profile of a standard code in whole nodes is found again: ETSI EN
// 302 307, Annex B, 64800 bits (recalled; edge counts balance exactly).
// Parity part: checks-1 nodes of degree 2 and one of degree 1; one check has
// one edge fewer.
func TestRealizeStandardCodes(t *testing.T) {
	const length = 64800
	for _, c := range []struct{ information, high, nodes, check int }{
		{16200, 12, 5400, 4}, {21600, 12, 7200, 5}, {25920, 12, 8640, 6}, {32400, 8, 12960, 7},
		{38880, 12, 12960, 11}, {43200, 13, 4320, 10}, {48600, 12, 5400, 14}, {51840, 11, 6480, 18},
		{54000, 13, 5400, 22}, {57600, 4, 7200, 27}, {58320, 4, 6480, 30},
	} {
		checks := length - c.information
		want := Realization{
			Length: length, Checks: checks, Edges: checks*c.check - 1,
			VariableNodes: Counts{{1, 1}, {2, checks - 1}, {3, c.information - c.nodes}, {c.high, c.nodes}},
			CheckNodes:    Counts{{c.check - 1, 1}, {c.check, checks - 1}},
		}
		if err := want.Validate(); err != nil {
			t.Errorf("%d information bits: %v", c.information, err)
			continue
		}
		got, err := Realize(want.Ensemble(), length, erasureThreshold)
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Errorf("%d information bits: got %v, %v; want %v", c.information, got, err, want)
		}
	}
}

// The laws of Realize over random ensembles and lengths: consistent counts,
// the nearest rate, one node at most between a variable count and its target,
// no foreign variable degree, and the same outcome every time.
func TestRealizeLaws(t *testing.T) {
	r := seeded(31)
	refused := 0
	const trials = 600
	for range trials {
		e := randomEnsemble(r, 1+r.IntN(12), 50)
		length := int(math.Exp(math.Log(100) + r.Float64()*math.Log(1e5)))
		got, err := Realize(e, length, erasureThreshold)
		if err != nil {
			if length > 50*50 {
				t.Errorf("%v at length %d: %v", e, length, err)
			}
			refused++
			continue
		}
		if err := got.Validate(); err != nil {
			t.Fatalf("%v at length %d: %v", e, length, err)
		}
		if miss := math.Abs(float64(got.Checks) - (1-e.DesignRate())*float64(length)); got.Length != length || miss > 0.5+1e-6 {
			t.Fatalf("%v at length %d: %d checks for a rate of %v", e, length, got.Checks, e.DesignRate())
		}
		if rate := got.Ensemble().DesignRate(); math.Abs(rate-got.DesignRate()) > 1e-12 {
			t.Fatalf("%v at length %d: the integer ensemble has rate %v, not %v", e, length, rate, got.DesignRate())
		}
		for _, c := range got.VariableNodes {
			target := float64(length) * e.Lambda.Nodes().Fraction(c.Degree)
			if target == 0 || math.Abs(float64(c.Nodes)-target) > 1+1e-6 {
				t.Fatalf("%v at length %d: %d nodes of degree %d, the profile asks for %.3f", e, length, c.Nodes, c.Degree, target)
			}
		}
		if again, _ := Realize(e, length, erasureThreshold); !reflect.DeepEqual(again, got) {
			t.Fatalf("%v at length %d: %v, and then %v", e, length, got, again)
		}
	}
	if refused > trials/2 {
		t.Errorf("%d of %d refused", refused, trials)
	}
}

// Every degree that deserves half a node has one, as far as random ensembles
// of few degrees let us ask.
func TestRealizeKeepsDegrees(t *testing.T) {
	r := seeded(32)
	for range 300 {
		e := randomEnsemble(r, 4, 20)
		length := 100 + r.IntN(400)
		got, err := Realize(e, length, nil)
		if err != nil {
			continue
		}
		for _, n := range e.Lambda.Nodes() {
			has := false
			for _, c := range got.VariableNodes {
				has = has || c.Degree == n.Degree
			}
			if target := n.Fraction * float64(length); target >= 0.5 && !has {
				t.Errorf("%v at length %d: no node of degree %d, which asks for %.3f", e, length, n.Degree, target)
			}
		}
	}
}

// A realization at twice its length has twice its counts.
func TestRealizeScales(t *testing.T) {
	r := seeded(33)
	for range 200 {
		e := randomEnsemble(r, 6, 30)
		small, err := Realize(e, 300+r.IntN(3000), nil)
		if err != nil {
			continue
		}
		large, err := Realize(small.Ensemble(), 2*small.Length, erasureThreshold)
		if err != nil {
			t.Fatal(err)
		}
		for i, c := range small.VariableNodes {
			if large.VariableNodes[i] != (Count{c.Degree, 2 * c.Nodes}) {
				t.Fatalf("%v at twice the length: %v", small, large)
			}
		}
		for i, c := range small.CheckNodes {
			if large.CheckNodes[i] != (Count{c.Degree, 2 * c.Nodes}) {
				t.Fatalf("%v at twice the length: %v", small, large)
			}
		}
	}
}

// No rounding down and up of both sides whose sockets match and that keeps
// the degrees has a greater score than the one chosen.
func TestRealizeAgainstAllRoundings(t *testing.T) {
	r := seeded(34)
	compared, several := 0, 0
	for range 600 {
		e := Ensemble{Lambda: randomDistribution(r, 6, 2, 12)}
		low := int(e.MeanVariableDegree() / (0.2 + 0.6*r.Float64()))
		e.Rho = randomDistribution(r, 4, low, low+3)
		length := 60 + r.IntN(200)
		got, err := Realize(e, length, erasureThreshold)
		if err != nil {
			continue
		}
		score := erasureThreshold(got.Ensemble())
		all := allRoundings(e, got.Length, got.Checks)
		for _, other := range all {
			if s := erasureThreshold(other.Ensemble()); s > score {
				t.Fatalf("%v at length %d: chose %v of threshold %v, but %v has %v", e, length, got, score, other, s)
			}
			compared++
		}
		if len(all) > 1 {
			several++
		}
	}
	if compared < 300 || several < 50 {
		t.Errorf("compared %d roundings, in %d cases several: too few to tell", compared, several)
	}
}

// allRoundings tries every way to round both sides down or up.
func allRoundings(e Ensemble, length, checks int) []Realization {
	sides := [2][]Counts{}
	for side, total := range []int{length, checks} {
		terms := []Distribution{e.Lambda, e.Rho}[side].Nodes()
		for pattern := range 1 << len(terms) {
			var counts Counts
			whole, keeps := false, true
			for i, n := range terms {
				target := float64(total) * n.Fraction
				nodes := int(math.Floor(target)) + pattern>>i&1
				whole = whole || math.Abs(target-math.Round(target)) < 1e-5
				keeps = keeps && (nodes > 0 || target < 0.5)
				if nodes > 0 {
					counts = append(counts, Count{n.Degree, nodes})
				}
			}
			if counts.Nodes() == total && keeps && !whole {
				sides[side] = append(sides[side], counts)
			}
		}
	}
	var all []Realization
	for _, v := range sides[0] {
		for _, c := range sides[1] {
			r := Realization{Length: length, Checks: checks, Edges: v.Sockets(), VariableNodes: v, CheckNodes: c}
			if r.Validate() == nil {
				all = append(all, r)
			}
		}
	}
	return all
}

// Where even and odd degrees cannot match, one check of a neighbouring
// degree is enough.
func TestRealizeWithNeighbour(t *testing.T) {
	// 101 nodes of degree 3 have 303 sockets; checks of even degree cannot.
	e := Ensemble{Distribution{{3, 1}}, Distribution{{4, 0.4}, {8, 0.6}}}
	got, err := Realize(e, 101, nil)
	if err != nil {
		t.Fatal(err)
	}
	odd := 0
	for _, c := range got.CheckNodes {
		odd += c.Nodes * (c.Degree % 2)
	}
	if odd != 1 || len(got.CheckNodes) != 3 {
		t.Errorf("check nodes %v: want degrees 4 and 8 and a single one of odd degree", got.CheckNodes)
	}
}

// Scores are expensive, and one of NaN is like any other.
func TestRealizeBoundsScores(t *testing.T) {
	e := randomEnsemble(seeded(35), 12, 50)
	for _, test := range []struct{ length, most int }{{2000, maxScored}, {longLength, maxScored}, {longLength + 1, maxScoredLong}, {10_000_000, maxScoredLong}} {
		calls := 0
		if _, err := Realize(e, test.length, func(Ensemble) float64 { calls++; return math.NaN() }); err != nil {
			t.Fatal(err)
		}
		if calls < 1 || calls > test.most {
			t.Errorf("length %d: %d scores, want from 1 to %d", test.length, calls, test.most)
		}
	}
}

func TestRealizeRefuses(t *testing.T) {
	high := Ensemble{Distribution{{2, 0.3}, {40, 0.7}}, Distribution{{8, 1}}}
	tests := []struct {
		name   string
		e      Ensemble
		length int
		want   string
	}{
		{"empty", Ensemble{}, 100, "lambda: must have at least one degree"},
		{"check degree 1", Ensemble{Distribution{{2, 1}}, Distribution{{1, 1}}}, 100, "rho: degree 1: must be at least 2"},
		{"length 0", Regular(3, 6), 0, "length 0: must be from 1 to 1000000000"},
		{"negative length", Regular(3, 6), -5, "length -5: must be from 1 to 1000000000"},
		{"length too large", Regular(3, 6), 2_000_000_000, "length 2000000000: must be from 1 to 1000000000"},
		{"no rate", Regular(3, 3), 100, "design rate 0: must be above 0"},
		{"negative rate", Regular(4, 2), 100, "design rate -1: must be above 0"},
		{"no check", Regular(3, 60), 5, "length 5: design rate 0.95 gives 0 checks; there must be at least one, and fewer than code bits"},
		{"no information", Regular(20, 21), 5, "length 5: design rate 0.047619 gives 5 checks; there must be at least one, and fewer than code bits"},
		{"variable degree above checks", high, 50, "length 50: variable degree 40 needs as many checks, there are 37; use a length of at least 54"},
		{"check degree above length", Regular(2, 30), 25, "length 25: check degree 30 needs as many code bits, there are 25; use a length of at least 30"},
		// 6 nodes of degree 6 would meet all of 6 checks, 3 of them of degree 2.
		{"repeated edges", Ensemble{Distribution{{1, 1. / 7}, {6, 6. / 7}}, Distribution{{2, 1. / 7}, {12, 6. / 7}}}, 12,
			"length 12: no whole numbers of nodes with these degrees make a graph in which no two nodes are joined twice; use a greater length or smaller degrees"},
	}
	for _, test := range tests {
		r, err := Realize(test.e, test.length, nil)
		if err == nil || err.Error() != test.want {
			t.Errorf("%s: got %v, %v; want error %q", test.name, r, err, test.want)
		}
	}
}

// Right-regular and heavy-tailed profiles have a hundred degrees, most of
// which deserve less than a node of a short code.
func TestRealizeManyDegrees(t *testing.T) {
	const largest = 99
	terms := make([]Term, largest)
	for i := range terms {
		terms[i] = Term{i + 2, 1 / float64(i+1)} // Luby and others (2001): ∝ 1/(degree-1)
	}
	lambda := Normalize(terms)
	for _, rate := range []float64{0.05, 0.5, 0.95} {
		e := Ensemble{lambda, Concentrated(1 / lambda.Integral() / (1 - rate))}
		for _, length := range []int{100, 300, 1000, 10_000, 1_000_000} {
			r, err := Realize(e, length, erasureThreshold)
			if err != nil {
				if length*int(100*(1-rate)) > 100*200 {
					t.Errorf("rate %v, length %d: %v", rate, length, err)
				}
				continue
			}
			if err := r.Validate(); err != nil {
				t.Errorf("rate %v, length %d: %v", rate, length, err)
			}
		}
	}
}

// No ensemble makes Realize fail in another way than with an error.
func FuzzRealize(f *testing.F) {
	f.Add("2:0.3,3:0.7", "6:1", 100, true)
	f.Add("3:1", "4:0.5,8:0.5", 101, false)
	f.Add("2:0.5,50:0.5", "8:0.25,9:0.5,12:0.25", 100, true)
	f.Add("1:1e-300,2:1", "2:1e-300,3:1", 1_000_000_000, true)
	f.Add("2:0.1,3:0.1,4:0.1,5:0.1,6:0.1,7:0.1,8:0.1,9:0.1,10:0.2", "20:0.5,40:0.5", 77, true)
	f.Fuzz(func(t *testing.T, lambda, rho string, length int, scored bool) {
		l, err := ParseDistribution(lambda)
		if err != nil {
			return
		}
		p, err := ParseDistribution(rho)
		if err != nil {
			return
		}
		var score func(Ensemble) float64
		if scored {
			score = erasureThreshold
		}
		r, err := Realize(Ensemble{l, p}, length, score)
		if err != nil {
			return
		}
		if err := r.Validate(); err != nil || r.Length != length {
			t.Errorf("Realize(%v, %v, %d) = %v: %v", l, p, length, r, err)
		}
	})
}

func ExampleRealize() {
	lambda, _ := ParseDistribution("2:0.3,3:0.3,10:0.4")
	rho, _ := ParseDistribution("8:1")
	r, err := Realize(Ensemble{lambda, rho}, 1000, erasureThreshold)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("variable nodes:", r.VariableNodes)
	fmt.Println("check nodes:", r.CheckNodes)
	fmt.Println("edges:", r.Edges, "rate:", r.DesignRate())
	// Output:
	// variable nodes: [{2 518} {3 344} {10 138}]
	// check nodes: [{8 431}]
	// edges: 3448 rate: 0.569
}

func BenchmarkRealize(b *testing.B) {
	lambda, err := ParseDistribution("2:0.23802,3:0.20997,4:0.03492,5:0.12015,7:0.01587,14:0.00480,15:0.37627")
	if err != nil {
		b.Fatal(err)
	}
	e := Ensemble{lambda, Distribution{{8, 0.98013}, {9, 0.01987}}}
	for _, length := range []int{100, 64_800, 10_000_000} {
		b.Run(fmt.Sprint(length), func(b *testing.B) {
			for b.Loop() {
				if _, err := Realize(e, length, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
		b.Run(fmt.Sprintf("%d/scored", length), func(b *testing.B) {
			calls := 0
			for b.Loop() {
				if _, err := Realize(e, length, func(e Ensemble) float64 { calls++; return erasureThreshold(e) }); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(calls)/float64(b.N), "scores/op")
		})
	}
}

package catalog

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"

	"tannery/ensembles"
)

func TestEntriesAreWhole(t *testing.T) {
	form := regexp.MustCompile(`^[a-z0-9]+(-closed)?-r\d\d-d\d+$`)
	seen := map[string]bool{}
	for _, e := range All() {
		if seen[e.Name] || !form.MatchString(e.Name) {
			t.Errorf("%s: twice, or not in the scheme", e.Name)
		}
		seen[e.Name] = true
		if e.Source == "" || e.Trust == "" {
			t.Errorf("%s: source %q, trust %q", e.Name, e.Source, e.Trust)
		}
		if _, err := ensembles.New(e.Ensemble.Lambda, e.Ensemble.Rho); err != nil {
			t.Errorf("%s: %v", e.Name, err)
		}
		for _, d := range []ensembles.Distribution{e.Ensemble.Lambda, e.Ensemble.Rho} {
			if math.Abs(ensembles.Excess(d)) > 1e-12 {
				t.Errorf("%s: sums to 1%+g", e.Name, ensembles.Excess(d))
			}
		}
		if r := e.Realization; r != nil {
			if err := r.Validate(); err != nil {
				t.Errorf("%s: %v", e.Name, err)
			}
		}
		found, ok := Lookup(e.Name)
		if !ok || found.Name != e.Name {
			t.Errorf("%s: not found by its name", e.Name)
		}
		data, err := ensembles.Profile{Title: e.Source, Ensemble: e.Ensemble, Realization: e.Realization}.Encode()
		if err != nil {
			t.Errorf("%s: %v", e.Name, err)
		}
		back, _, err := ensembles.DecodeProfile(e.Name, data)
		if err != nil || !slices.Equal(back.Ensemble.Lambda, e.Ensemble.Lambda) || !slices.Equal(back.Ensemble.Rho, e.Ensemble.Rho) {
			t.Errorf("%s: does not survive a file: %v", e.Name, err)
		}
	}
	if _, ok := Lookup("rsu01-r50-d16"); ok {
		t.Error("an entry that does not exist was found")
	}
}

// The rates that the sources print; names carry them in hundredths.
func TestDesignRates(t *testing.T) {
	want := map[string]float64{
		"ru01-r50-d3": 0.5, "ru01-r67-d3": 2. / 3, "rsu01-r50-d4": 0.5, "rsu01-r50-d50": 0.5,
		"cfru01-r50-d100": 0.5, "cfru01-r50-d200": 0.5, "cfru01-r50-d8000": 0.5,
		"elab09-r90-d21": 0.9, "elab09-r65-d51": 0.65, "elab09-r55-d31": 0.55, "bru04-r50-d4": 0.5,
		"s99-r46-d8": 0.461797, "s99-r50-d13": 0.499103, "s99-r51-d50": 0.512965, "s99-r51-d100": 0.513928,
		"lmss01-r50-d11": 0.5, "lmss01-r50-d31": 0.5, "lmss01-r50-d101": 0.5,
		"en302307-r25-d12": 0.25, "en302307-r50-d8": 0.5, "en302307-closed-r50-d8": 0.5, "en302307-r90-d4": 0.9,
		"80216e-r50-d6": 0.5, "80216e-r67-d4": 2. / 3, "80216e-r83-d4": 5. / 6, "80211n-r50-d11": 0.5,
	}
	for name, rate := range want {
		e, ok := Lookup(name)
		// Rates are nominal in the tables for the binary symmetric channel;
		// elsewhere five printed digits leave them good to 1e-4.
		tolerance := 1e-4
		if strings.HasPrefix(name, "elab09") {
			tolerance = 5e-4
		}
		if !ok || math.Abs(e.Ensemble.DesignRate()-rate) > tolerance {
			t.Errorf("%s: found %v, rate %v, want %v", name, ok, e.Ensemble.DesignRate(), rate)
		}
	}
}

// The profiles of standards have the lengths and the information bits that the
// standards state (recalled).
func TestStandards(t *testing.T) {
	for name, want := range map[string][2]int{
		"en302307-r25-d12": {64800, 16200}, "en302307-r33-d12": {64800, 21600}, "en302307-r40-d12": {64800, 25920},
		"en302307-r50-d8": {64800, 32400}, "en302307-r60-d12": {64800, 38880}, "en302307-r67-d13": {64800, 43200},
		"en302307-r75-d12": {64800, 48600}, "en302307-r80-d11": {64800, 51840}, "en302307-r83-d13": {64800, 54000},
		"en302307-r89-d4": {64800, 57600}, "en302307-r90-d4": {64800, 58320},
		"80216e-r50-d6": {2304, 1152}, "80216e-r75-d6": {2304, 1728}, "80211n-r50-d11": {1944, 972},
	} {
		e, ok := Lookup(name)
		if !ok || e.Realization == nil {
			t.Errorf("%s: not there", name)
			continue
		}
		r := e.Realization
		if r.Length != want[0] || r.Length-r.Checks != want[1] {
			t.Errorf("%s: %d bits with %d of information, want %v", name, r.Length, r.Length-r.Checks, want)
		}
		if bits := r.VariableNodes[0]; strings.HasPrefix(name, en302307) && bits != (ensembles.Count{Degree: 1, Nodes: 1}) {
			t.Errorf("%s: begins with %+v, want one bit of degree 1", name, bits)
		}
	}
}

// λ(1-ρ(1-x)) ≤ x/S everywhere, with equality at 0: the threshold is S, as
// printed (computed), and the stability condition reaches it.
func TestRightRegular(t *testing.T) {
	for _, c := range []struct {
		a, n      int
		threshold float64
	}{{5, 8, 0.504894}, {6, 13, 0.480896}, {8, 50, 0.481990}, {9, 100, 0.483562}, {3, 2, 0.5}} {
		e, s := RightRegular(c.a, c.n)
		if math.Abs(s-c.threshold) > 5e-7 {
			t.Errorf("(%d,%d): %v, want %v", c.a, c.n, s, c.threshold)
		}
		if product := s * e.Lambda.Fraction(2) * e.Rho.Derivative(1); math.Abs(product-1) > 1e-12 {
			t.Errorf("(%d,%d): stability %v at the threshold, want 1", c.a, c.n, product)
		}
		for i := 1; i <= 1000; i++ {
			x := float64(i) / 1000
			if f := s * e.Lambda.At(1-e.Rho.At(1-x)); f > x*(1+1e-12) {
				t.Errorf("(%d,%d): %v at %v, above it", c.a, c.n, f, x)
			}
		}
		// S = 1-(N/α)·C(α,N)·(-1)^(N+1), the closed form.
		alpha := 1 / float64(c.a-1)
		binomial := 1.
		for i := range c.n {
			binomial *= (alpha - float64(i)) / float64(i+1)
		}
		closed := 1 - float64(c.n)/alpha*binomial*math.Pow(-1, float64(c.n+1))
		if math.Abs(s-closed) > 1e-12 {
			t.Errorf("(%d,%d): sum %v, closed form %v", c.a, c.n, s, closed)
		}
	}
}

// Without the cuts the decoding condition holds up to ε = (1-R)·D/(D+1)
// (Luby et al., 2001); the cut at degree 2 may only cost as much as the mass
// it takes away.
func TestHeavyTail(t *testing.T) {
	for _, d := range []int{1, 3, 10, 30, 100, 300} {
		for _, rate := range []float64{0.25, 0.5, 0.75} {
			e := HeavyTail(d, rate)
			if math.Abs(e.DesignRate()-rate) > 1e-12 {
				t.Errorf("D = %d: rate %v, want %v", d, e.DesignRate(), rate)
			}
			if e.Rho.Min() != 2 || math.Abs(ensembles.Excess(e.Rho)) > 1e-12 {
				t.Errorf("D = %d: ρ from degree %d, excess %g", d, e.Rho.Min(), ensembles.Excess(e.Rho))
			}
			if d < 10 {
				continue
			}
			epsilon := 1.
			for i := 1; i <= 2000; i++ {
				x := float64(i) / 2000
				epsilon = min(epsilon, x/e.Lambda.At(1-e.Rho.At(1-x)))
			}
			if bound := (1 - rate) * float64(d) / float64(d+1); epsilon < bound-0.02 || epsilon > 1-rate {
				t.Errorf("D = %d, rate %v: threshold %v, want %v to %v", d, rate, epsilon, bound, 1-rate)
			}
		}
	}
}

// Resolutions come from the digits printed, zeros at the end among them.
func TestResolution(t *testing.T) {
	for text, want := range map[string]float64{"0.1670": 5e-5, "0.65": 5e-3, "0.9781869": 5e-8} {
		if got := resolution(text); math.Abs(got-want) > 1e-15 {
			t.Errorf("%s: %v, want %v", text, got, want)
		}
	}
}

func TestDecodeRefuses(t *testing.T) {
	if _, err := decode([]byte(strings.Replace(string(data), "variable: 3", "variabel: 3", 1))); err == nil {
		t.Error("a misspelt key was taken")
	}
	if _, err := decode([]byte(strings.Replace(string(data), "0.38354", "0.48354", 1))); err == nil {
		t.Error("fractions that sum to 1.1 were taken")
	}
}

func TestAtRate(t *testing.T) {
	for _, e := range AtRate(0.5) {
		if !strings.Contains(e.Name, "-r50-") {
			t.Errorf("%s is at rate 1/2", e.Name)
		}
	}
	if n := len(AtRate(0.5)); n < 20 {
		t.Errorf("%d ensembles of rate 1/2, want 20 at least", n)
	}
	if n := len(AtRate(0.99)); n != 0 {
		t.Errorf("%d ensembles of rate 0.99, want none", n)
	}
}

func ExampleLookup() {
	e, _ := Lookup("rsu01-r50-d15")
	published, _ := e.On("biawgn")
	fmt.Printf("rate %.3f, %d variable degrees, %s threshold σ = %v\n",
		e.Ensemble.DesignRate(), len(e.Ensemble.Lambda), published.Trust, published.Value)
	// Output: rate 0.500, 7 variable degrees, recalled threshold σ = 0.9622
}

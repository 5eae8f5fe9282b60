package channel

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// testFamilyMade is testFamily for a family made of atoms: its capacity at
// best is that of the base.
func testFamilyMade(t *testing.T, f Family, base Measured) {
	t.Helper()
	const tolerance = 1e-12
	best, worst := f.Range()
	if c, b, p := f.Capacity(best), f.Bhattacharyya(best), f.ErrorProbability(best); math.Abs(c-base.Capacity()) > tolerance ||
		math.Abs(b-base.Bhattacharyya()) > tolerance || math.Abs(p-base.ErrorProbability()) > tolerance {
		t.Errorf("at best: %v, %v, %v; want those of the base", c, b, p)
	}
	if c, b, p := f.Capacity(worst), f.Bhattacharyya(worst), f.ErrorProbability(worst); math.Abs(c) > tolerance || math.Abs(b-1) > tolerance || math.Abs(p-0.5) > tolerance {
		t.Errorf("at worst: %v, %v, %v; want 0, 1, 1/2", c, b, p)
	}
	previous := best
	for share := 0.999; share > 1e-7; share *= 0.8 {
		rate := share * base.Capacity()
		x, err := f.Inverse(rate)
		if err != nil {
			t.Fatal(err)
		}
		c, b, p := f.Capacity(x), f.Bhattacharyya(x), f.ErrorProbability(x)
		if math.Abs(c-rate) > tolerance {
			t.Errorf("Capacity(Inverse(%v)) = %v", rate, c)
		}
		if x <= previous || c >= f.Capacity(previous) || b <= f.Bhattacharyya(previous) || p <= f.ErrorProbability(previous) {
			t.Errorf("%v is not a worse channel than %v", x, previous)
		}
		previous = x
		d := f.Density(x)
		for i, a := range d.Atoms {
			if i > 0 && d.Atoms[i-1].Magnitude >= a.Magnitude {
				t.Errorf("at %v: atoms out of order: %v, %v", x, d.Atoms[i-1], a)
			}
		}
		for _, m := range []struct{ got, want float64 }{
			{meanOver(d, func(float64) float64 { return 1 }), 1},
			{1 - meanOver(d, entropyOf), c},
			{meanOver(d, func(x float64) float64 { return 1 / (1 + math.Exp(x)) }), p},
			{meanOver(d, func(x float64) float64 { return 1 / math.Cosh(x/2) }), b},
		} {
			if math.Abs(m.got-m.want) > tolerance {
				t.Errorf("at %v: mean %v over the density; want %v", x, m.got, m.want)
			}
		}
	}
	for _, rate := range []float64{base.Capacity() + 1e-9, 0, 1, math.NaN()} {
		if x, err := f.Inverse(rate); err == nil {
			t.Errorf("Inverse(%v) = %v; want an error", rate, x)
		}
	}
}

func TestFamiliesOfMeasured(t *testing.T) {
	for name, c := range map[string]llrMasses{
		"bsc":    {[]float64{-math.Log(9), math.Log(9)}, []float64{.1, .9}},
		"bec":    {[]float64{0, math.Inf(1)}, []float64{.3, .7}},
		"quiet":  {[]float64{0, 40, 700, math.Inf(1)}, []float64{1e-4, .3, .4, .2999}},
		"spread": symmetricAtoms(0, .1, .9, 2.2, 3.7, 11, 30),
	} {
		t.Run(name, func(t *testing.T) {
			m, warning, err := NewMeasured(name, c.llr, c.mass)
			if err != nil || warning != "" {
				t.Fatal(warning, err)
			}
			testFamilyMade(t, Erased{m}, m)
			testFamilyMade(t, Degraded{m}, m)
		})
	}
}

type llrMasses struct{ llr, mass []float64 }

// symmetricAtoms returns both signs of each magnitude, of equal masses.
func symmetricAtoms(magnitudes ...float64) (atoms llrMasses) {
	share := 1 / float64(len(magnitudes))
	for _, x := range magnitudes {
		atoms.llr = append(atoms.llr, x, -x)
		atoms.mass = append(atoms.mass, share/(1+math.Exp(-x)), share/(1+math.Exp(x)))
	}
	return atoms
}

// TestDegradedIsBSC: a noiseless channel followed by a BSC is that BSC.
func TestDegradedIsBSC(t *testing.T) {
	m, _, err := NewMeasured("", []float64{math.Inf(1)}, []float64{1})
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range []float64{0, 1e-12, .01, .11, .3, .4999, .5} {
		f := Degraded{m}
		if a, b := f.Capacity(p), (BSC{}).Capacity(p); math.Abs(a-b) > 1e-15 {
			t.Errorf("p = %v: capacity %v; want %v", p, a, b)
		}
		if a, b := f.Density(p).Atoms[0].Magnitude, (BSC{}).Density(p).Atoms[0].Magnitude; a != b && math.Abs(a/b-1) > 1e-14 {
			t.Errorf("p = %v: LLR %v; want %v", p, a, b)
		}
	}
	if name := (Degraded{m}).Name(); name != "measured" {
		t.Errorf("name %q", name)
	}
}

// TestMeasuredSamples draws LLRs of a BI-AWGN channel: they pass as symmetric
// however few, and their capacity is within the sampling noise of the
// channel's. The same LLRs scaled by a wrong noise variance do not pass.
func TestMeasuredSamples(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 2001))
	const sigma = 0.98
	for _, n := range []int{1, 10, 100, 10_000, 100_000} {
		llr, counts, scaled := make([]float64, n), make([]float64, n), make([]float64, n)
		for i := range llr {
			llr[i] = 2 * (1 + sigma*rng.NormFloat64()) / (sigma * sigma)
			counts[i], scaled[i] = 1, 2*llr[i]
		}
		m, warning, err := NewMeasuredFromCounts("samples", llr, counts)
		if err != nil {
			t.Errorf("%d samples: %v", n, err)
			continue
		}
		// 1-h(1/(1+e^x)) lies within (0,1), so its deviation is at most 1/2
		if c, want := m.Capacity(), (BIAWGN{}).Capacity(sigma); math.Abs(c-want) > 4*0.5/math.Sqrt(float64(n)) {
			t.Errorf("%d samples: capacity %v; want about %v", n, c, want)
		}
		if n >= 100 && warning == "" {
			t.Errorf("%d samples: no warning of their distance %v", n, m.Distance)
		}
		if _, _, err := NewMeasuredFromCounts("scaled", scaled, counts); n >= 10_000 && err == nil {
			t.Errorf("%d samples of twice the LLR pass", n)
		}
	}
}

func TestMeasuredSymmetry(t *testing.T) {
	atoms := symmetricAtoms(0.5, 1.5, 4)
	shift := func(by float64) []float64 { // moves mass from +1.5 to -1.5
		mass := append([]float64(nil), atoms.mass...)
		mass[2], mass[3] = mass[2]-by, mass[3]+by
		return mass
	}
	exact, warning, err := NewMeasured("", atoms.llr, atoms.mass)
	if err != nil || warning != "" || exact.Distance > 1e-15 {
		t.Errorf("symmetric: distance %v, %q, %v", exact.Distance, warning, err)
	}
	m, warning, err := NewMeasured("", atoms.llr, shift(0.005))
	if err != nil || !strings.Contains(warning, "0.005") || math.Abs(m.Distance-0.005) > 1e-15 {
		t.Errorf("off by 0.005: distance %v, %q, %v", m.Distance, warning, err)
	}
	if math.Abs(m.Capacity()-exact.Capacity()) > 1e-15 {
		t.Errorf("symmetrised: capacity %v; the magnitudes say %v", m.Capacity(), exact.Capacity())
	}
	if _, _, err := NewMeasured("", atoms.llr, shift(0.02)); err == nil || !strings.Contains(err.Error(), "0.02") || !strings.Contains(err.Error(), "0.01 ") {
		t.Errorf("off by 0.02: %v; want an error with distance and tolerance", err)
	}
	// certainty of the wrong bit
	if _, _, err := NewMeasured("", []float64{math.Inf(-1), math.Inf(1)}, []float64{.1, .9}); err == nil {
		t.Error("mass at -Inf passes")
	}
	for name, c := range map[string]llrMasses{
		"none":     {},
		"ragged":   {[]float64{1}, []float64{.5, .5}},
		"NaN":      {[]float64{math.NaN()}, []float64{1}},
		"negative": {[]float64{1, 2}, []float64{2, -1}},
		"sum":      {[]float64{0}, []float64{.9}},
		"infinite": {[]float64{0}, []float64{math.Inf(1)}},
	} {
		if m, _, err := NewMeasured("", c.llr, c.mass); err == nil {
			t.Errorf("%s: %v; want an error", name, m)
		}
	}
	if m, _, err := NewMeasuredFromCounts("", []float64{1}, []float64{0}); err == nil {
		t.Errorf("no samples: %v; want an error", m)
	}
}

// TestMeasuredMatrix: a BI-AWGN channel quantised to 8 levels is symmetric,
// with the capacity that the general search finds; the Z-channel is not.
func TestMeasuredMatrix(t *testing.T) {
	cuts := []float64{math.Inf(-1), -1.5, -.8, -.3, 0, .3, .8, 1.5, math.Inf(1)}
	rows := make([][]float64, 2)
	for i := 1; i < len(cuts); i++ {
		rows[0] = append(rows[0], tail((cuts[i-1]-1)/0.9)-tail((cuts[i]-1)/0.9))
		rows[1] = append(rows[1], tail((cuts[i-1]+1)/0.9)-tail((cuts[i]+1)/0.9))
	}
	// outputs in no order, and one that never occurs
	rows[0][0], rows[0][5], rows[1][0], rows[1][5] = rows[0][5], rows[0][0], rows[1][5], rows[1][0]
	rows[0], rows[1] = append(rows[0], 0), append(rows[1], 0)
	c, _, err := NewDMC(rows)
	if err != nil {
		t.Fatal(err)
	}
	m, err := c.Measured("eight levels")
	if err != nil {
		t.Fatal(err)
	}
	r := checkDMC(t, "eight levels", rows)
	if math.Abs(m.Capacity()-r.Lower) > 1e-12 || len(m.Density().Atoms) != 4 {
		t.Errorf("capacity %v, %d atoms; want %v and 4", m.Capacity(), len(m.Density().Atoms), r.Lower)
	}
	if limit := (BIAWGN{}).Capacity(0.9); m.Capacity() >= limit || m.Capacity() < 0.95*limit {
		t.Errorf("capacity %v; the channel has %v", m.Capacity(), limit)
	}
	testFamilyMade(t, Erased{m}, m)

	bec, _, _ := NewDMC([][]float64{{.7, .3, 0}, {0, .3, .7}})
	if m, err := bec.Measured(""); err != nil || math.Abs(m.Capacity()-.7) > 1e-15 {
		t.Errorf("bec: %v, %v", m, err)
	}
	for name, transitions := range map[string][][]float64{
		"z-channel":    zChannel(.5),
		"lopsided bsc": {{.9, .1}, {.2, .8}},
		"one input":    {{.5, .5}},
		"three inputs": {{.9, .1}, {.1, .9}, {.5, .5}},
	} {
		c, _, _ := NewDMC(transitions)
		if m, err := c.Measured(""); err == nil {
			t.Errorf("%s: %v; want an error", name, m)
		}
	}
}

package channel

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// sweep returns parameters of the family from nearly perfect to nearly
// useless, in increasing order, each with the capacity it was found at.
func sweep(t *testing.T, f Family, most float64) (parameters, capacities []float64) {
	t.Helper()
	rates := []float64{1 - 1e-9, 1 - 1e-6, .9999, .999, .99, .95}
	for r := .925; r > 0.05; r -= 0.025 {
		rates = append(rates, r)
	}
	rates = append(rates, .02, .01, 1e-3, 1e-4, 1e-5, 1e-6)
	for _, rate := range rates {
		rate *= most
		x, err := f.Inverse(rate)
		if err != nil {
			t.Fatalf("%s: Inverse(%v): %v", f.Name(), rate, err)
		}
		parameters, capacities = append(parameters, x), append(capacities, rate)
	}
	return parameters, capacities
}

// integrate returns ∫ k(x) dx over (0, end) by Gauss's rule on panels that
// double in width, so that it follows both the unit scale of the kernels and
// the scale of the density.
func integrate(k func(float64) float64, end float64) float64 {
	const first, last, points = 1. / 64, 1 << 40, 64
	sum := 0.0
	for low, high := 0.0, first; low < end && low < last; low, high = high, 2*high {
		sum += quad.Fixed(k, low, math.Min(high, end), points, quad.Legendre{}, 1)
	}
	return sum
}

// meanOver returns the mean of k over the density, atoms and all.
func meanOver(d Density, k func(magnitude float64) float64) float64 {
	sum := 0.0
	for _, a := range d.Atoms {
		sum += a.Mass * k(a.Magnitude)
	}
	if d.PDF != nil {
		sum += integrate(func(x float64) float64 { return d.PDF(x) * k(x) }, d.End)
	}
	return sum
}

// entropyOf is h(1/(1+e^x)) by definition, apart from the code it checks.
func entropyOf(x float64) float64 {
	q := 1 / (1 + math.Exp(x))
	if q == 0 {
		return 0
	}
	return -q*math.Log2(q) - (1-q)*math.Log2(1-q)
}

// testFamily checks the laws that Family states, and the closed forms
// against means over the density. most is the capacity of the best channel.
func testFamily(t *testing.T, f Family, most float64) {
	// The oracle's quadrature and rounding; the requirement is 1e-9.
	const tolerance = 1e-12
	parameters, capacities := sweep(t, f, most)
	best, worst := f.Range()
	if c := f.Capacity(best); math.Abs(c-most) > tolerance {
		t.Errorf("capacity %v at the best parameter; want %v", c, most)
	}
	if c, b, p := f.Capacity(worst), f.Bhattacharyya(worst), f.ErrorProbability(worst); c != 0 || b != 1 || p != 0.5 {
		t.Errorf("at the worst parameter: capacity %v, Bhattacharyya %v, error %v; want 0, 1, 1/2", c, b, p)
	}
	parameters = append(append([]float64{best}, parameters...), worst)
	capacities = append(append([]float64{most}, capacities...), 0)
	for i, x := range parameters {
		c, b, p := f.Capacity(x), f.Bhattacharyya(x), f.ErrorProbability(x)
		if math.Abs(c-capacities[i]) > tolerance {
			t.Errorf("Capacity(Inverse(%v)) = %v", capacities[i], c)
		}
		if i > 0 {
			y := parameters[i-1]
			if y >= x {
				t.Errorf("capacity %v at %v, %v at %v: parameters not increasing", capacities[i-1], y, capacities[i], x)
			}
			if c > f.Capacity(y) || b < f.Bhattacharyya(y) || p < f.ErrorProbability(y) {
				t.Errorf("%v is a better channel than %v", x, y)
			}
		}
		// 1-C ≤ B, 2P ≤ 1-C (Hellman & Raviv, IEEE Trans. Inf. Theory 16(4),
		// 1970; from memory), C ≤ √(1-B²) (Arıkan, IEEE Trans. Inf. Theory
		// 55(7), 2009; from memory).
		if 1-c > b+tolerance || 2*p > 1-c+tolerance || c > math.Sqrt(1-b*b)+1e-7 {
			t.Errorf("at %v: capacity %v, Bhattacharyya %v, error %v break the bounds between them", x, c, b, p)
		}
		d := f.Density(x)
		for j, a := range d.Atoms {
			if j > 0 && d.Atoms[j-1].Magnitude >= a.Magnitude || !(a.Mass >= 0) || !(a.Magnitude >= 0) {
				t.Errorf("at %v: atoms %v", x, d.Atoms)
			}
		}
		for _, m := range []struct {
			what      string
			got, want float64
		}{
			{"mass", meanOver(d, func(float64) float64 { return 1 }), 1},
			{"capacity", 1 - meanOver(d, entropyOf), c},
			{"error probability", meanOver(d, func(x float64) float64 { return 1 / (1 + math.Exp(x)) }), p},
			{"Bhattacharyya", meanOver(d, func(x float64) float64 { return 1 / math.Cosh(x/2) }), b},
		} {
			if !(math.Abs(m.got-m.want) <= tolerance) {
				t.Errorf("at %v: %s of the density is %v; want %v", x, m.what, m.got, m.want)
			}
		}
		if snr, ok := f.SNR(x); ok && i > 0 {
			if previous, _ := f.SNR(parameters[i-1]); !(snr < previous) {
				t.Errorf("SNR %v at %v, %v at %v", previous, parameters[i-1], snr, x)
			}
		}
	}
	for _, rate := range []float64{0, 1, -1, 2, math.NaN(), math.Inf(1)} {
		if x, err := f.Inverse(rate); err == nil {
			t.Errorf("Inverse(%v) = %v; want an error", rate, x)
		}
	}
}

func TestFamilyLaws(t *testing.T) {
	for _, f := range families {
		t.Run(f.Name(), func(t *testing.T) { testFamily(t, f, 1) })
	}
}

func TestByName(t *testing.T) {
	for i, name := range Names() {
		if f, err := ByName(name); err != nil || f != families[i] {
			t.Errorf("ByName(%q) = %v, %v", name, f, err)
		}
	}
	if _, err := ByName("awgn"); err == nil {
		t.Error("ByName accepts an unknown name")
	}
}

func TestParameterAtBhattacharyya(t *testing.T) {
	for _, f := range families {
		for _, b := range []float64{1e-3, .1, .5, .9, .999} {
			x := ParameterAtBhattacharyya(f, b)
			if got := f.Bhattacharyya(x); got > b || b-got > 1e-12 {
				t.Errorf("%s: Bhattacharyya parameter %v at %v; want %v", f.Name(), got, x, b)
			}
		}
	}
}

func BenchmarkCapacity(b *testing.B) {
	for _, f := range families {
		x, _ := f.Inverse(0.5)
		b.Run(f.Name(), func(b *testing.B) {
			for b.Loop() {
				f.Capacity(x)
			}
		})
	}
}

func BenchmarkInverse(b *testing.B) {
	for _, f := range families {
		b.Run(f.Name(), func(b *testing.B) {
			for b.Loop() {
				_, _ = f.Inverse(0.75)
			}
		})
	}
}

func BenchmarkBhattacharyya(b *testing.B) {
	for _, f := range families {
		x, _ := f.Inverse(0.5)
		b.Run(f.Name(), func(b *testing.B) {
			for b.Loop() {
				f.Bhattacharyya(x)
			}
		})
	}
}

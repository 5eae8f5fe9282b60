package density

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// transformTolerance is some hundred roundings of values of about the square
// root of the length, relative to it.
const transformTolerance = 3e-14

// The complex transform against gonum's, and the way back.
func TestFFT(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for n := 4; n <= 1<<15; n *= 2 {
		x := make([]complex128, n)
		for k := range x {
			x[k] = complex(r.NormFloat64(), r.NormFloat64())
		}
		want := fourier.NewCmplxFFT(n).Coefficients(nil, x)
		f := newFFT(n)
		got := append([]complex128(nil), x...)
		f.forward(got)
		tolerance := transformTolerance * math.Sqrt(float64(n)) * math.Log2(float64(n))
		for k := range want {
			if d := cmplx.Abs(got[f.position[k]] - want[k]); d > tolerance {
				t.Fatalf("length %d, coefficient %d: off by %g", n, k, d)
			}
		}
		f.inverse(got)
		for k := range x {
			if d := cmplx.Abs(got[k]/complex(float64(n), 0) - x[k]); d > tolerance {
				t.Fatalf("length %d, value %d: comes back off by %g", n, k, d)
			}
		}
	}
}

// The cosine transform against gonum's, which is of the same type, and twice.
func TestCosine(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for n := MinPoints; n <= 1<<15; n *= 2 {
		x := make([]float64, n+1)
		for k := range x {
			x[k] = r.NormFloat64()
		}
		want := fourier.NewDCT(n+1).Transform(nil, x)
		c := newCosine(n)
		got := make([]float64, n+1)
		c.transform(got, x)
		// The odd coefficients are a running sum, whose rounding grows.
		tolerance := 10 * transformTolerance * math.Sqrt(float64(n)) * math.Log2(float64(n))
		for k := range want {
			if d := math.Abs(got[k] - want[k]); d > tolerance {
				t.Fatalf("size %d, coefficient %d: off by %g", n, k, d)
			}
		}
		c.transform(got, got)
		for k := range x {
			if d := math.Abs(got[k]/float64(2*n) - x[k]); d > tolerance {
				t.Fatalf("size %d, value %d: comes back off by %g", n, k, d)
			}
		}
	}
}

// apply raises a circular convolution to a polynomial: of a mass on one cell
// it makes masses on its multiples.
func TestLevelApply(t *testing.T) {
	g := grid(t, MinPoints)
	v := g.levels[0]
	size := g.points * g.cells
	p := newPolynomial(distribution(t, "2:0.25,3:0.25,6:0.5"))
	for _, cell := range []int{0, 1, 5, size / 4, size/2 + 3, size - 1} {
		cells := make([]float64, size)
		cells[cell] = 1
		z := complexView(cells)
		v.fft.forward(z)
		v.apply(z, p)
		v.fft.inverse(z)
		want := make([]float64, size)
		for _, s := range []struct {
			power int
			mass  float64
		}{{1, .25}, {2, .25}, {5, .5}} {
			want[cell*s.power%size] += s.mass
		}
		for j, w := range want {
			if d := math.Abs(cells[j]/float64(size/2) - w); d > 1e-13 {
				t.Fatalf("mass on cell %d: cell %d is off by %g", cell, j, d)
			}
		}
	}
}

func BenchmarkFFT(b *testing.B) {
	for _, n := range []int{256, 1 << 10, 1 << 12, 1 << 14} {
		x := make([]complex128, n)
		x[1] = 1
		b.Run(fmt.Sprintf("length=%d", n), func(b *testing.B) {
			f := newFFT(n)
			for b.Loop() {
				f.forward(x)
				clear(x)
			}
		})
		b.Run(fmt.Sprintf("plain/length=%d", n), func(b *testing.B) {
			f := fourier.NewCmplxFFT(n)
			for b.Loop() {
				f.Coefficients(x, x)
				clear(x)
			}
		})
	}
}

func BenchmarkCosine(b *testing.B) {
	for _, n := range []int{256, 1 << 10, 1 << 12, 1 << 14} {
		x := make([]float64, n+1)
		b.Run(fmt.Sprintf("size=%d", n), func(b *testing.B) {
			c := newCosine(n)
			for b.Loop() {
				c.transform(x, x)
			}
		})
		b.Run(fmt.Sprintf("plain/size=%d", n), func(b *testing.B) {
			c := fourier.NewDCT(n + 1)
			for b.Loop() {
				c.Transform(x, x)
			}
		})
	}
}

package density

import (
	"math"
	"math/cmplx"
)

// fft is a complex Fourier transform of a power-of-two length, in place.
//
// forward decimates in frequency and leaves coefficient k at position[k];
// inverse decimates in time and takes the coefficients from there. A
// convolution only multiplies coefficient by coefficient, so nothing is ever
// put into natural order. Radix 4 throughout, with one radix-2 pass where the
// length is not a power of 4 (Cooley & Tukey, Math. Comp. 19, 1965; Gentleman
// & Sande, AFIPS 1966).
type fft struct {
	n        int
	passes   []pass
	position []int32
}

// pass is one radix-4 pass over blocks of 4·len(twiddles) values.
type pass struct {
	twiddles [][3]complex128 // e^(-2πij/L)^1, ^2, ^3 for j < L/4
}

func newFFT(n int) *fft {
	f := &fft{n: n, position: make([]int32, n)}
	length := n
	for ; length >= 4; length /= 4 {
		p := pass{twiddles: make([][3]complex128, length/4)}
		for j := range p.twiddles {
			for m := 1; m <= 3; m++ {
				p.twiddles[j][m-1] = unitRoot(m*j, length)
			}
		}
		f.passes = append(f.passes, p)
	}
	for k := range f.position {
		at, rest, block := 0, k, n
		for block >= 4 {
			block /= 4
			at += rest % 4 * block
			rest /= 4
		}
		f.position[k] = int32(at + rest)
	}
	return f
}

// unitRoot returns e^(-2πik/n), exact on the axes.
func unitRoot(k, n int) complex128 {
	k %= n
	switch {
	case k == 0:
		return 1
	case 4*k == n:
		return -1i
	case 2*k == n:
		return -1
	case 4*k == 3*n:
		return 1i
	}
	return cmplx.Rect(1, -2*math.Pi*float64(k)/float64(n))
}

// forward transforms x, of length n, into scrambled order.
func (f *fft) forward(x []complex128) {
	for _, p := range f.passes {
		q := len(p.twiddles)
		if q == 1 {
			quartets(x)
			return
		}
		for at := 0; at < len(x); at += 4 * q {
			x0, x1, x2, x3 := x[at:at+q], x[at+q:at+2*q], x[at+2*q:at+3*q], x[at+3*q:at+4*q]
			x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
			w := p.twiddles[:len(x0)]
			for j, a := range x0 {
				b, c, d := x1[j], x2[j], x3[j]
				sum, diff := a+c, a-c
				sum2, diff2 := b+d, b-d
				turned := complex(imag(diff2), -real(diff2)) // -i·(b-d)
				x0[j] = sum + sum2
				x1[j] = (diff + turned) * w[j][0]
				x2[j] = (sum - sum2) * w[j][1]
				x3[j] = (diff - turned) * w[j][2]
			}
		}
	}
	pairs(x)
}

// inverse undoes forward up to the factor n.
func (f *fft) inverse(x []complex128) {
	last := len(f.passes) - 1
	if len(f.passes[last].twiddles) == 1 {
		quartetsBack(x)
		last--
	} else {
		pairs(x)
	}
	for i := last; i >= 0; i-- {
		p := f.passes[i]
		q := len(p.twiddles)
		for at := 0; at < len(x); at += 4 * q {
			x0, x1, x2, x3 := x[at:at+q], x[at+q:at+2*q], x[at+2*q:at+3*q], x[at+3*q:at+4*q]
			x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
			w := p.twiddles[:len(x0)]
			for j, a := range x0 {
				b, c, d := times(x1[j], w[j][0]), times(x2[j], w[j][1]), times(x3[j], w[j][2])
				sum, diff := a+c, a-c
				sum2, diff2 := b+d, b-d
				turned := complex(-imag(diff2), real(diff2)) // i·(b-d)
				x0[j] = sum + sum2
				x1[j] = diff + turned
				x2[j] = sum - sum2
				x3[j] = diff - turned
			}
		}
	}
}

// times returns x times the conjugate of w.
func times(x, w complex128) complex128 {
	return complex(real(x)*real(w)+imag(x)*imag(w), imag(x)*real(w)-real(x)*imag(w))
}

// pairs is the radix-2 pass that remains where n is twice a power of 4.
func pairs(x []complex128) {
	for ; len(x) >= 2; x = x[2:] {
		x[0], x[1] = x[0]+x[1], x[0]-x[1]
	}
}

// quartets is the last radix-4 pass, which needs no twiddles.
func quartets(x []complex128) {
	for ; len(x) >= 4; x = x[4:] {
		a, b, c, d := x[0], x[1], x[2], x[3]
		sum, diff := a+c, a-c
		sum2, diff2 := b+d, b-d
		turned := complex(imag(diff2), -real(diff2))
		x[0], x[1], x[2], x[3] = sum+sum2, diff+turned, sum-sum2, diff-turned
	}
}

// quartetsBack is quartets for the inverse.
func quartetsBack(x []complex128) {
	for ; len(x) >= 4; x = x[4:] {
		a, b, c, d := x[0], x[1], x[2], x[3]
		sum, diff := a+c, a-c
		sum2, diff2 := b+d, b-d
		turned := complex(-imag(diff2), real(diff2))
		x[0], x[1], x[2], x[3] = sum+sum2, diff+turned, sum-sum2, diff-turned
	}
}

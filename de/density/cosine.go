package density

import "math"

// cosine is the discrete cosine transform of type I of N+1 values, N a power
// of two: the Fourier transform of the even sequence of period 2N that they
// are half of,
//
//	X[n] = x[0] + (-1)ⁿ x[N] + 2 Σ_{k=1}^{N-1} x[k] cos(πkn/N).
//
// It is its own inverse up to the factor 2N. It takes one real transform of
// length N, that is, a complex one of length N/2 (Cooley, Lewis & Welch,
// J. Sound Vib. 12, 1970): with
//
//	y[k] = (x[k]+x[N-k])/2 - sin(πk/N)(x[k]-x[N-k])
//
// with transform Y, the even coefficients of x are X[2n] = 2·Re Y[n], and the
// odd ones follow from X[2n+1] = X[2n-1] - 2·Im Y[n], starting from X[1],
// which is summed directly.
type cosine struct {
	n       int
	fft     *fft
	work    []complex128
	sine    []float64    // sin(πk/N) for k ≤ N/2
	cos     []float64    // cos(πk/N) for k ≤ N
	unravel []complex128 // e^(-2πik/N) for k ≤ N/4
}

func newCosine(n int) *cosine {
	c := &cosine{
		n:       n,
		fft:     newFFT(n / 2),
		work:    make([]complex128, n/2),
		sine:    make([]float64, n/2+1),
		cos:     make([]float64, n+1),
		unravel: make([]complex128, n/4+1),
	}
	for k := range c.sine {
		c.sine[k] = math.Sin(math.Pi * float64(k) / float64(n))
	}
	for k := range c.cos {
		c.cos[k] = math.Cos(math.Pi * float64(k) / float64(n))
	}
	for k := range c.unravel {
		c.unravel[k] = unitRoot(k, n)
	}
	return c
}

// transform sets dst to the transform of src; both have N+1 values and may be
// the same slice.
func (c *cosine) transform(dst, src []float64) {
	n := c.n
	// y[k] for k and N-k at once; pairs of neighbours make complex values.
	first := (src[0] - src[n]) // X[1] = x[0] - x[N] + 2 Σ x[k] cos(πk/N)
	odd := 0.0
	w := c.work
	for k := 0; k < n/2; k += 2 {
		// The values at k, k+1 and their mirror images at N-k, N-k-1.
		a0, b0 := src[k], src[n-k]
		a1, b1 := src[k+1], src[n-k-1]
		w[k/2] = complex((a0+b0)/2-c.sine[k]*(a0-b0), (a1+b1)/2-c.sine[k+1]*(a1-b1))
		odd += c.cos[k] * (a0 - b0)
		odd += c.cos[k+1] * (a1 - b1)
	}
	for k := n / 2; k < n; k += 2 {
		a0, b0 := src[k], src[n-k]
		a1, b1 := src[k+1], src[n-k-1]
		w[k/2] = complex((a0+b0)/2-c.sine[n-k]*(a0-b0), (a1+b1)/2-c.sine[n-k-1]*(a1-b1))
	}
	odd = 2*odd - first // the term k=0 was counted twice
	c.fft.forward(w)
	// Unravel the real transform Y[m], m ≤ N/2, from the complex one.
	half := n / 2
	z := w[0]
	dst[0] = 2 * (real(z) + imag(z))
	dst[n] = 2 * (real(z) - imag(z))
	// dst[2m] = 2·Re Y[m]; keep 2·Im Y[m] at dst[2m+1] for the summation.
	for m := 1; m <= half/2; m++ {
		zm, zr := w[c.fft.position[m]], w[c.fft.position[half-m]]
		sum := complex(real(zm)+real(zr), imag(zm)-imag(zr))
		diff := complex(imag(zm)+imag(zr), real(zr)-real(zm)) // -i(zm - conj zr)
		turned := diff * c.unravel[m]
		ym := sum + turned // 2·Y[m]
		yr := sum - turned // 2·conj Y[half-m]
		dst[2*m] = real(ym)
		dst[2*m+1] = imag(ym)
		if m < half-m {
			dst[2*(half-m)] = real(yr)
			dst[2*(half-m)+1] = -imag(yr)
		}
	}
	dst[1] = odd
	for m := 1; m < half; m++ {
		odd -= dst[2*m+1]
		dst[2*m+1] = odd
	}
}

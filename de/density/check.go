package density

import (
	"math"
	"unsafe"

	"tannery/ensembles"
)

// CheckNode turns the density of messages from variable nodes into that of
// messages from check nodes of the degree distribution ρ: the mixture over
// degrees j of the combination of j-1 independent messages, whose
// u = -ln tanh(x/2) adds and whose signs multiply. Erased messages have
// u = ∞, certain ones u = 0.
//
// A CheckNode holds working space: use one per goroutine.
type CheckNode struct {
	grid       *Grid
	polynomial polynomial
	cells      []float64
}

// NewCheckNode returns the operation for the edge-perspective distribution
// rho, degrees at least 2.
func (g *Grid) NewCheckNode(rho ensembles.Distribution) *CheckNode {
	return &CheckNode{grid: g, polynomial: newPolynomial(rho), cells: make([]float64, g.points*g.cells)}
}

// Apply sets dst to the density of the outgoing messages for incoming ones of
// density src. Both must be of the operation's grid, and different.
func (c *CheckNode) Apply(dst, src *Density) {
	if dst == src {
		panic("density: CheckNode.Apply: dst and src must differ")
	}
	var known float64 // mass of the u that the coarsest level answers for
	work := complexView(c.cells)
	clear(dst.even)
	// A sum below a level's range has all its terms there, so that no more
	// mass can come of it than ρ of the mass there, all counted positive.
	node, inRange := len(src.even), math.Abs(src.infinite)
	for l := len(c.grid.levels) - 1; l >= 0; l-- {
		v := c.grid.levels[l]
		for node > v.fromNode {
			node--
			inRange += math.Abs(src.even[node]) * c.grid.bulge[node]
		}
		if l > 0 && c.polynomial.at(inRange) < negligible {
			continue
		}
		v.spread(c.cells, src.even, src.infinite)
		v.fft.forward(work)
		v.apply(work, c.polynomial)
		v.fft.inverse(work)
		v.collect(dst.even, c.cells)
		if l == 0 {
			known = dot(v.keep, c.cells)
		}
	}
	// Erased is what the coarsest level does not know. What rounding under the
	// damping adds to the least magnitudes it takes away here, which are as
	// good as erased.
	dst.even[0] += 1 - known
	dst.settle()
}

// negligible is the mass below which a level is left out. Its messages, all
// of them reliable, then count as certain.
const negligible = 1e-13

// complexView reads a real sequence of even length as one of half as many
// complex values, real and imaginary parts in turn.
func complexView(x []float64) []complex128 {
	return unsafe.Slice((*complex128)(unsafe.Pointer(unsafe.SliceData(x))), len(x)/2)
}

// apply replaces the transform of a real sequence by its polynomial, value by
// value. The transform of size real values comes as that of size/2 complex
// ones, Z; with E and O those of the even- and odd-numbered values,
//
//	E[k] = (Z[k] + Z*[n-k])/2,  O[k] = (Z[k] - Z*[n-k])/2i,
//	X[k] = E[k] + w^k O[k],     X*[n-k] = E[k] - w^k O[k],  n = size/2,
//
// and the way back is the same with w^-k.
func (v *level) apply(z []complex128, p polynomial) {
	n := len(z)
	at := v.fft.position[:n]
	x0 := p.at(real(z[0]) + imag(z[0]))
	xn := p.at(real(z[0]) - imag(z[0]))
	z[0] = complex((x0+xn)/2, (x0-xn)/2)
	for k := 1; k <= n/2; k++ {
		zk, zr := z[at[k]], z[at[n-k]]
		even := complex((real(zk)+real(zr))/2, (imag(zk)-imag(zr))/2)
		odd := complex((imag(zk)+imag(zr))/2, (real(zr)-real(zk))/2)
		w := v.unravel[k]
		turned := odd * w
		xk, xr := p.atPair(even+turned, even-turned) // the latter conjugate, at n-k
		even = complex((real(xk)+real(xr))/2, (imag(xk)+imag(xr))/2)
		odd = times(complex((real(xk)-real(xr))/2, (imag(xk)-imag(xr))/2), w)
		// Z[k] = E + iO, Z[n-k] = E* + iO*.
		z[at[k]] = complex(real(even)-imag(odd), imag(even)+real(odd))
		z[at[n-k]] = complex(real(even)+imag(odd), real(odd)-imag(even))
	}
}

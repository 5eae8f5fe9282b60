package linprog

import "math"

// kernel is the part of a basis that matters: the basic columns S in the rows
// R whose slack is nonbasic. The rest of the basis matrix is the identity. It
// is square, K = A[R,S], and mostly far smaller than the basis.
type kernel struct {
	rows, columns []int
	k             [][]float64 // K
	lu            [][]float64 // K = P L U in place
	swap          []int       // row exchanged with e in step e
}

// singularTolerance is the least pivot of a kernel whose entries are about 1;
// below it, less than half the digits of a solution would be right even after
// refinement.
const singularTolerance = 1e-14

// newKernel factors the kernel of a basis by Gaussian elimination with partial
// pivoting; false if it is not square or is singular.
func newKernel(w *dictionary, b Basis) (*kernel, bool) {
	k := &kernel{}
	for i, s := range b.Rows {
		if s != Basic {
			k.rows = append(k.rows, i)
		}
	}
	for j, s := range b.Columns {
		if s == Basic {
			k.columns = append(k.columns, j)
		}
	}
	n := len(k.rows)
	if n != len(k.columns) {
		return nil, false
	}
	for _, i := range k.rows {
		row := make([]float64, n)
		for f, j := range k.columns {
			row[f] = w.a[i][j]
		}
		k.k = append(k.k, row)
		k.lu = append(k.lu, append([]float64(nil), row...))
	}
	k.swap = make([]int, n)
	for e := range n {
		best := e
		for i := e + 1; i < n; i++ {
			if math.Abs(k.lu[i][e]) > math.Abs(k.lu[best][e]) {
				best = i
			}
		}
		k.lu[e], k.lu[best], k.swap[e] = k.lu[best], k.lu[e], best
		pivot := k.lu[e][e]
		if !(math.Abs(pivot) > singularTolerance) {
			return nil, false
		}
		for i := e + 1; i < n; i++ {
			if f := k.lu[i][e] / pivot; f != 0 {
				k.lu[i][e] = f
				axpy(k.lu[i][e+1:], -f, k.lu[e][e+1:])
			}
		}
	}
	return k, true
}

// solve replaces x by K⁻¹x.
func (k *kernel) solve(x []float64) {
	n := len(k.lu)
	for e, s := range k.swap {
		x[e], x[s] = x[s], x[e]
	}
	for i := range n {
		for j := range i {
			x[i] -= k.lu[i][j] * x[j]
		}
	}
	for i := n - 1; i >= 0; i-- {
		for j := i + 1; j < n; j++ {
			x[i] -= k.lu[i][j] * x[j]
		}
		x[i] /= k.lu[i][i]
	}
}

// solveTransposed replaces x by K⁻ᵀx.
func (k *kernel) solveTransposed(x []float64) {
	n := len(k.lu)
	for i := range n {
		x[i] /= k.lu[i][i]
		axpy(x[i+1:], -x[i], k.lu[i][i+1:])
	}
	for i := n - 1; i > 0; i-- {
		axpy(x[:i], -x[i], k.lu[i][:i])
	}
	for e := n - 1; e >= 0; e-- {
		s := k.swap[e]
		x[e], x[s] = x[s], x[e]
	}
}

// refinements is the number of steps of iterative refinement with residuals
// in twice the precision (Wilkinson, Rounding Errors in Algebraic Processes,
// 1963): each multiplies the error by about 2⁻⁵³ times the condition number,
// so three leave a relative error of rounding size up to condition 1e10 and a
// residual of rounding size always.
const refinements = 3

// refined returns K⁻¹b, or K⁻ᵀb if transposed.
func (k *kernel) refined(b []float64, transposed bool) []float64 {
	solve, entry := k.solve, func(i, j int) float64 { return k.k[i][j] }
	if transposed {
		solve, entry = k.solveTransposed, func(i, j int) float64 { return k.k[j][i] }
	}
	x := append([]float64(nil), b...)
	solve(x)
	residual := make([]float64, len(b))
	for range refinements {
		for i := range residual {
			var s accumulator
			s.add(b[i])
			for j, v := range x {
				s.addProduct(-entry(i, j), v)
			}
			residual[i] = s.sum()
		}
		solve(residual)
		for i, v := range residual {
			x[i] += v
		}
	}
	return x
}

// accumulator sums as if in twice the working precision (Ogita, Rump & Oishi,
// SIAM J. Sci. Comput. 26(6), 2005, algorithms Sum2 and Dot2).
type accumulator struct{ high, low float64 }

func (s *accumulator) add(v float64) {
	sum := s.high + v
	part := sum - s.high
	s.low += (s.high - (sum - part)) + (v - part)
	s.high = sum
}

func (s *accumulator) addProduct(a, b float64) {
	product := a * b
	s.add(product)
	s.low += math.FMA(a, b, -product)
}

func (s *accumulator) sum() float64 { return s.high + s.low }

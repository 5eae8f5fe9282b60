package linprog

import "math"

// dictionary is the state of the simplex method: every basic variable, and
// the objective, as an affine function of the nonbasic ones,
//
//	x_B = β - T x_N,   z = z₀ + d x_N,
//
// for the scaled programme "maximise c·x, A x + s = b, 0 ≤ (x, s) ≤ u", in
// which rows AtLeast are negated and the slack of a row Equal has u = 0. A
// nonbasic variable is at 0: one at its upper bound is replaced by its
// complement u - x and marked flipped (Dantzig, Econometrica 23, 1955).
type dictionary struct {
	// The scaled programme.
	a           [][]float64 // by row, column
	b, c        []float64
	ux, us      []float64 // upper bounds of columns and slacks
	rowScale    []float64 // Rᵢ, negative for AtLeast
	columnScale []float64 // Cⱼ > 0
	rhsScale    float64   // xⱼ = Cⱼx'ⱼ/rhsScale
	costScale   float64   // negative when minimising

	// The dictionary proper. A variable j ≥ 0 is a column, ^i the slack of
	// row i.
	t               [][]float64 // by basic, nonbasic
	beta            []float64   // by basic
	d               []float64   // by nonbasic
	basic, nonbasic []int
	flippedX        []bool
	flippedS        []bool

	pivots int
}

// newDictionary scales the programme and builds the dictionary of the basis,
// or of all slacks if that is empty or singular.
func newDictionary(p *Program, start Basis) *dictionary {
	w := &dictionary{}
	w.rowScale, w.columnScale = scales(p.a, p.Columns())
	w.rhsScale = powerOfTwo(largest(p.Rows(), func(i int) float64 { return p.rhs[i] * w.rowScale[i] }))
	w.costScale = 1
	for i := range p.a {
		w.takeRow(p, i)
	}
	for j := range p.cost {
		w.takeColumn(p, j)
	}
	w.price(p)
	if len(start.Rows) != p.Rows() || len(start.Columns) != p.Columns() || !w.build(start) {
		w.build(slackBasis(p.Rows(), p.Columns()))
	}
	return w
}

func slackBasis(rows, columns int) Basis {
	b := Basis{make([]State, columns), make([]State, rows)}
	for i := range b.Rows {
		b.Rows[i] = Basic
	}
	return b
}

// takeRow scales row i of the programme, whose factor is known, with the
// columns whose factors are known.
func (w *dictionary) takeRow(p *Program, i int) {
	us := math.Inf(1)
	switch p.relation[i] {
	case AtLeast:
		w.rowScale[i] = -w.rowScale[i]
	case Equal:
		us = 0
	}
	row := make([]float64, len(w.columnScale))
	for j, v := range w.columnScale {
		row[j] = p.a[i][j] * w.rowScale[i] * v
	}
	w.a = append(w.a, row)
	w.b = append(w.b, p.rhs[i]*w.rowScale[i]*w.rhsScale)
	w.us = append(w.us, us)
	w.flippedS = append(w.flippedS, false)
}

func (w *dictionary) takeColumn(p *Program, j int) {
	w.c = append(w.c, 0)
	w.ux = append(w.ux, p.upper[j]/w.columnScale[j]*w.rhsScale)
	w.flippedX = append(w.flippedX, false)
}

// price scales the costs afresh.
func (w *dictionary) price(p *Program) {
	w.costScale = powerOfTwo(largest(p.Columns(), func(j int) float64 { return p.cost[j] * w.columnScale[j] }))
	if p.Goal == Minimize {
		w.costScale = -w.costScale
	}
	for j, v := range w.columnScale {
		w.c[j] = p.cost[j] * v * w.costScale
	}
}

// basis reads the basis off the dictionary.
func (w *dictionary) basis() Basis {
	b := Basis{make([]State, len(w.c)), make([]State, len(w.b))}
	for _, v := range w.basic {
		if v >= 0 {
			b.Columns[v] = Basic
		} else {
			b.Rows[^v] = Basic
		}
	}
	for _, v := range w.nonbasic {
		if w.flipped(v) {
			if v >= 0 {
				b.Columns[v] = AtUpper
			} else if w.us[^v] > 0 {
				b.Rows[^v] = AtUpper
			}
		}
	}
	return b
}

func (w *dictionary) upper(v int) float64 {
	if v >= 0 {
		return w.ux[v]
	}
	return w.us[^v]
}

func (w *dictionary) flipped(v int) bool {
	if v >= 0 {
		return w.flippedX[v]
	}
	return w.flippedS[^v]
}

func (w *dictionary) toggle(v int) {
	if v >= 0 {
		w.flippedX[v] = !w.flippedX[v]
	} else {
		w.flippedS[^v] = !w.flippedS[^v]
	}
}

// build sets up the dictionary of a basis from the data; false if the basis
// is singular.
func (w *dictionary) build(b Basis) bool {
	k, ok := newKernel(w, b)
	if !ok {
		return false
	}
	w.basic, w.nonbasic = w.basic[:0], w.nonbasic[:0]
	w.basic = append(w.basic, k.columns...)
	for j, s := range b.Columns {
		w.flippedX[j] = false
		if s != Basic {
			w.nonbasic = append(w.nonbasic, j)
		}
	}
	for i, s := range b.Rows {
		w.flippedS[i] = false
		if s == Basic {
			w.basic = append(w.basic, ^i)
		} else {
			w.nonbasic = append(w.nonbasic, ^i)
		}
	}
	m, n := len(w.basic), len(w.nonbasic)
	w.t, w.beta = make([][]float64, m), make([]float64, m)
	for r := range w.t {
		w.t[r] = make([]float64, n, n+4)
	}
	// Basic columns: K⁻¹ times what stands in the kernel's rows.
	column := make([]float64, len(k.rows))
	for q, v := range w.nonbasic {
		for e, i := range k.rows {
			column[e] = 0
			if v >= 0 {
				column[e] = w.a[i][v]
			} else if i == ^v {
				column[e] = 1
			}
		}
		k.solve(column)
		for e := range column {
			w.t[e][q] = column[e]
		}
	}
	for e, i := range k.rows {
		column[e] = w.b[i]
	}
	k.solve(column)
	copy(w.beta, column)
	// Basic slacks: their row less the basic columns in it.
	for r := len(k.columns); r < m; r++ {
		w.expressRow(r, ^w.basic[r], k.columns)
	}
	for q, v := range w.nonbasic {
		if v >= 0 && b.Columns[v] == AtUpper || v < 0 && b.Rows[^v] == AtUpper && w.us[^v] > 0 {
			w.flipNonbasic(q)
		}
	}
	w.reprice()
	return true
}

// expressRow fills row r of the dictionary with the slack of row i as a
// function of the nonbasic variables; basicColumns are in the first rows of
// the dictionary, in this order, and nothing is flipped.
func (w *dictionary) expressRow(r, i int, basicColumns []int) {
	row := w.t[r]
	for q, v := range w.nonbasic {
		row[q] = 0
		if v >= 0 {
			row[q] = w.a[i][v]
		}
	}
	value := w.b[i]
	for e, j := range basicColumns {
		if f := w.a[i][j]; f != 0 {
			axpy(row, -f, w.t[e])
			value -= f * w.beta[e]
		}
	}
	w.beta[r] = value
}

// axpy adds f·x to y, which must be as long as x.
func axpy(y []float64, f float64, x []float64) {
	y = y[:len(x)]
	for q, v := range x {
		y[q] += f * v
	}
}

// reprice computes d from the costs and the dictionary.
func (w *dictionary) reprice() {
	w.d = w.d[:0]
	for _, v := range w.nonbasic {
		w.d = append(w.d, w.costOf(v))
	}
	for r, v := range w.basic {
		if f := w.costOf(v); f != 0 {
			axpy(w.d, -f, w.t[r])
		}
	}
}

// costOf returns the cost of a variable, or of its complement if flipped.
func (w *dictionary) costOf(v int) float64 {
	if v < 0 {
		return 0
	}
	if w.flippedX[v] {
		return -w.c[v]
	}
	return w.c[v]
}

// flipNonbasic moves a nonbasic variable to its other bound.
func (w *dictionary) flipNonbasic(q int) {
	u := w.upper(w.nonbasic[q])
	for r, row := range w.t {
		w.beta[r] -= row[q] * u
		row[q] = -row[q]
	}
	if q < len(w.d) {
		w.d[q] = -w.d[q]
	}
	w.toggle(w.nonbasic[q])
}

// flipBasic replaces a basic variable by its complement.
func (w *dictionary) flipBasic(r int) {
	w.beta[r] = w.upper(w.basic[r]) - w.beta[r]
	for q := range w.t[r] {
		w.t[r][q] = -w.t[r][q]
	}
	w.toggle(w.basic[r])
}

// pivot lets nonbasic q enter and basic r leave at 0.
func (w *dictionary) pivot(r, q int) {
	w.pivots++
	row := w.t[r]
	inverse := 1 / row[q]
	row[q] = 1
	for j := range row {
		row[j] *= inverse
	}
	value := w.beta[r] * inverse
	w.beta[r] = value
	for i, other := range w.t {
		if f := other[q]; i != r && f != 0 {
			other[q] = 0
			axpy(other, -f, row)
			w.beta[i] -= f * value
		}
	}
	if f := w.d[q]; f != 0 {
		w.d[q] = 0
		axpy(w.d, -f, row)
	}
	w.basic[r], w.nonbasic[q] = w.nonbasic[q], w.basic[r]
}

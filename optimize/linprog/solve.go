package linprog

import "math"

// rebuilds is how often an answer that the data do not confirm sends the
// dictionary back to be built anew from its basis. One is nearly always
// enough, as it removes the drift of all pivots before.
const rebuilds = 8

// confirmation is how far, in the scaled programme, the answer computed from
// the data may violate a bound or a reduced cost and be confirmed: twice what
// the dictionary was allowed.
const confirmation = 2 * feasibility

// Solve settles the programme, starting from the basis of the last answer or
// the one given to StartFrom. It returns ErrNumerical if rounding keeps it
// from an answer that its data confirm. Certify measures how well they do.
func (p *Program) Solve() (Solution, error) {
	w := p.work
	if w == nil {
		w = newDictionary(p, p.from)
		p.work = w
	} else {
		w.follow(p)
	}
	before := w.pivots
	limit := before + w.pivotLimit()
	for range rebuilds {
		status, at := w.settle(limit)
		if status == Undecided {
			break
		}
		basis := w.basis()
		k, ok := newKernel(w, basis)
		if !ok {
			// Pivots too small have led to a singular basis: start over.
			w.build(slackBasis(p.Rows(), p.Columns()))
			continue
		}
		s, confirmed := w.finish(p, k, basis, status, at)
		if confirmed {
			s.Pivots = w.pivots - before
			return s, nil
		}
		w.build(basis)
	}
	p.work, p.from = nil, Basis{}
	return Solution{}, ErrNumerical
}

// settle pivots until the dictionary is optimal, or shows that there is no
// solution or no end. Where the dictionary is neither feasible nor dual
// feasible, it is made dual feasible by a bounding row if there is one.
// Otherwise columns that price out are given an artificial negative cost for
// the dual simplex, which then finds a feasible basis or proves that there is
// none, for which the costs do not matter; the primal simplex goes on with the
// true costs.
func (w *dictionary) settle(limit int) (status Status, at int) {
	feasible := w.chooseLeaving(true) < 0
	if !feasible || w.pivots == 0 {
		feasible = !w.bound() && feasible
	}
	if !feasible {
		for q := range w.d {
			if u := w.upper(w.nonbasic[q]); w.d[q] > 0 && u > 0 {
				if !math.IsInf(u, 1) {
					w.flipNonbasic(q)
				} else {
					// Distinct costs keep the dual from being degenerate.
					_, fraction := math.Modf(float64(w.order(w.nonbasic[q])+1) * math.Phi)
					w.d[q] = -0.5 - fraction
				}
			}
		}
		status, at = w.dual(limit)
		w.reprice()
		if status != Optimal {
			return status, at
		}
	}
	return w.primal(limit)
}

// bound makes the dictionary dual feasible by one pivot, and tells whether it
// could. If a row has positive entries wherever the reduced cost is positive,
// then the row bounds the objective, and the column with the largest ratio of
// the two makes all reduced costs at most 0. In the design programme Σ λᵢ = 1
// is such a row. The dual simplex then goes straight for the points where the
// constraint is worst, where the primal would walk from point to neighbouring
// point. Of several rows the one with the least bound is taken.
func (w *dictionary) bound() bool {
	row, column, least := -1, -1, math.Inf(1)
	for r := range w.t {
		q, ok := w.bounds(r)
		if !ok {
			continue
		}
		if v := w.beta[r] * w.d[q] / w.t[r][q]; v < least {
			row, column, least = r, q, v
		}
	}
	if row < 0 {
		return false
	}
	w.pivot(row, column)
	return true
}

// bounds returns the column on which to pivot if row r bounds the objective.
func (w *dictionary) bounds(r int) (column int, ok bool) {
	column = -1
	for q, d := range w.d {
		if d <= feasibility || w.upper(w.nonbasic[q]) == 0 {
			continue
		}
		v := w.t[r][q]
		if v <= smallPivot {
			return -1, false
		}
		if column < 0 || d*w.t[r][column] > w.d[column]*v {
			column = q
		}
	}
	if column < 0 {
		return -1, false
	}
	ratio := w.d[column] / w.t[r][column]
	for q, d := range w.d {
		if d-ratio*w.t[r][q] > feasibility && w.upper(w.nonbasic[q]) > 0 {
			return -1, false
		}
	}
	return column, true
}

// follow takes in the columns and rows added since the last Solve, keeping
// the basis: new columns are nonbasic, the slacks of new rows basic.
func (w *dictionary) follow(p *Program) {
	for j := len(w.c); j < p.Columns(); j++ {
		factor := powerOfTwo(largest(len(w.rowScale), func(i int) float64 { return p.a[i][j] * w.rowScale[i] }))
		w.columnScale = append(w.columnScale, factor)
		w.takeColumn(p, j)
		w.c[j] = p.cost[j] * factor * w.costScale
		for i := range w.a {
			w.a[i] = append(w.a[i], p.a[i][j]*w.rowScale[i]*factor)
		}
		w.appendColumn(j)
	}
	for i := len(w.b); i < p.Rows(); i++ {
		w.rowScale = append(w.rowScale, powerOfTwo(largest(p.Columns(), func(j int) float64 { return p.a[i][j] * w.columnScale[j] })))
		w.takeRow(p, i)
		w.appendRow(i)
	}
	if (w.costScale < 0) != (p.Goal == Minimize) {
		w.price(p)
		w.reprice()
	}
}

// appendColumn adds column j as nonbasic: its entries are those of the basis
// inverse, which stand in the columns of the slacks, times its coefficients.
func (w *dictionary) appendColumn(j int) {
	entry := make([]float64, len(w.basic))
	d := w.c[j]
	for q, v := range w.nonbasic {
		if v >= 0 || w.a[^v][j] == 0 {
			continue
		}
		f := w.a[^v][j]
		if w.flippedS[^v] {
			f = -f
		}
		for r := range entry {
			entry[r] += f * w.t[r][q]
		}
		d += f * w.d[q]
	}
	for r, v := range w.basic {
		if v < 0 {
			if w.flippedS[^v] {
				entry[r] -= w.a[^v][j]
			} else {
				entry[r] += w.a[^v][j]
			}
		}
	}
	for r := range w.t {
		w.t[r] = append(w.t[r], entry[r])
	}
	w.d = append(w.d, d)
	w.nonbasic = append(w.nonbasic, j)
}

// appendRow adds row i with its slack basic.
func (w *dictionary) appendRow(i int) {
	row := make([]float64, len(w.nonbasic), len(w.nonbasic)+4)
	value := w.b[i]
	for q, v := range w.nonbasic {
		if v >= 0 {
			row[q] = w.a[i][v]
			if w.flippedX[v] {
				value -= row[q] * w.ux[v]
				row[q] = -row[q]
			}
		}
	}
	for r, v := range w.basic {
		if v < 0 || w.a[i][v] == 0 {
			continue
		}
		f := w.a[i][v]
		if w.flippedX[v] {
			value -= f * w.ux[v]
			f = -f
		}
		axpy(row, -f, w.t[r])
		value -= f * w.beta[r]
	}
	w.t = append(w.t, row)
	w.beta = append(w.beta, value)
	w.basic = append(w.basic, ^i)
}

package linprog

import "math"

// finish computes the answer from the data and the basis, and tells whether
// it confirms the status. at is the basic row that proves infeasibility or
// the nonbasic variable along which there is no end.
func (w *dictionary) finish(p *Program, k *kernel, basis Basis, status Status, at int) (Solution, bool) {
	s := Solution{Status: status, Basis: basis}
	if status == Infeasible {
		return s, w.proveInfeasible(k, at, &s)
	}
	x, confirmed := w.values(k, basis)
	s.X = make([]float64, len(x))
	for j, v := range x {
		s.X[j] = min(max(v/w.rhsScale*w.columnScale[j], 0), p.upper[j])
	}
	if status == Unbounded {
		return s, w.proveUnbounded(k, at, &s) && confirmed
	}
	cost := make([]float64, len(k.columns))
	for e, j := range k.columns {
		cost[e] = w.c[j]
	}
	y := make([]float64, len(w.b))
	for e, v := range k.refined(cost, true) {
		i := k.rows[e]
		y[i] = v
		if w.us[i] > 0 {
			confirmed = confirmed && v >= -confirmation
			y[i] = max(v, 0)
		}
	}
	s.Dual, s.Reduced = make([]float64, len(y)), make([]float64, len(x))
	for i, v := range y {
		s.Dual[i] = v * w.rowScale[i] / w.costScale
	}
	var objective accumulator
	for j, state := range basis.Columns {
		objective.addProduct(p.cost[j], s.X[j])
		if state == Basic {
			continue
		}
		var d accumulator
		d.add(w.c[j])
		for _, i := range k.rows {
			d.addProduct(-y[i], w.a[i][j])
		}
		v := d.sum()
		s.Reduced[j] = v / w.columnScale[j] / w.costScale
		if w.ux[j] > 0 && (state == AtLower && v > confirmation || state == AtUpper && v < -confirmation) {
			confirmed = false
		}
	}
	s.Objective = objective.sum()
	return s, confirmed
}

// values returns the columns of the scaled programme at the basis, and
// whether all of them and all slacks are within their bounds.
func (w *dictionary) values(k *kernel, basis Basis) (x []float64, within bool) {
	x = make([]float64, len(w.c))
	for j, state := range basis.Columns {
		if state == AtUpper {
			x[j] = w.ux[j]
		}
	}
	b := make([]float64, len(k.rows))
	for e, i := range k.rows {
		b[e] = w.slack(i, x)
		if basis.Rows[i] == AtUpper {
			b[e] -= w.us[i]
		}
	}
	within = true
	for e, v := range k.refined(b, false) {
		j := k.columns[e]
		x[j] = v
		within = within && v >= -confirmation && v <= w.ux[j]+confirmation
	}
	for i, state := range basis.Rows {
		if state == Basic {
			v := w.slack(i, x)
			within = within && v >= -confirmation && v <= w.us[i]+confirmation
		}
	}
	return x, within
}

// slack returns bᵢ - aᵢ·x of the scaled programme.
func (w *dictionary) slack(i int, x []float64) float64 {
	var s accumulator
	s.add(w.b[i])
	for j, v := range x {
		if v != 0 {
			s.addProduct(-w.a[i][j], v)
		}
	}
	return s.sum()
}

// proveInfeasible fills s.Farkas from basic row r of the dictionary: the
// multipliers of the rows whose combination gives it, which are the entries
// of the basis inverse.
func (w *dictionary) proveInfeasible(k *kernel, r int, s *Solution) bool {
	y := make([]float64, len(w.b))
	unit := make([]float64, len(k.columns))
	v := w.basic[r]
	for e, j := range k.columns {
		if j == v {
			unit[e] = 1
		} else if v < 0 {
			unit[e] = -w.a[^v][j]
		}
	}
	sign := 1.0
	if w.flipped(v) {
		sign = -1
	}
	for e, value := range k.refined(unit, true) {
		y[k.rows[e]] = sign * value
	}
	if v < 0 {
		y[^v] = sign
	}
	s.Farkas = make([]float64, len(y))
	for i := range y {
		if w.us[i] > 0 {
			y[i] = max(y[i], 0)
		}
		s.Farkas[i] = y[i] * w.rowScale[i]
	}
	// y·A x ≤ y·b must be false even where the left side is least.
	var least accumulator
	for i, v := range y {
		least.addProduct(-v, w.b[i])
	}
	for j, u := range w.ux {
		var d accumulator
		for i, v := range y {
			if v != 0 {
				d.addProduct(v, w.a[i][j])
			}
		}
		if v := d.sum(); v < 0 && u > 0 {
			if math.IsInf(u, 1) {
				if v < -smallPivot*(1+norm(y)) {
					return false
				}
				continue
			}
			least.addProduct(v, u)
		}
	}
	return least.sum() > 0
}

// norm returns the largest magnitude.
func norm(y []float64) float64 {
	return largest(len(y), func(i int) float64 { return y[i] })
}

// proveUnbounded fills s.Ray: nonbasic q rises and the basics follow.
func (w *dictionary) proveUnbounded(k *kernel, q int, s *Solution) bool {
	v := w.nonbasic[q]
	sign := 1.0
	if w.flipped(v) {
		sign = -1
	}
	column := make([]float64, len(k.rows))
	for e, i := range k.rows {
		if v >= 0 {
			column[e] = -sign * w.a[i][v]
		} else if ^v == i {
			column[e] = -sign
		}
	}
	s.Ray = make([]float64, len(w.c))
	var gain accumulator
	for e, value := range k.refined(column, false) {
		j := k.columns[e]
		if math.IsInf(w.ux[j], 1) {
			value = max(value, 0)
		} else {
			value = 0
		}
		s.Ray[j] = value * w.columnScale[j]
		gain.addProduct(value, w.c[j])
	}
	if v >= 0 {
		s.Ray[v] = sign * w.columnScale[v]
		gain.addProduct(sign, w.c[v])
	}
	return gain.sum() > 0
}

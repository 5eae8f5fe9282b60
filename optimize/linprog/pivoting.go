package linprog

import "math"

// The tolerances are for the scaled programme, whose entries, right sides and
// costs are around 1.
const (
	// feasibility is how far a basic variable may be outside its bounds, and
	// a reduced cost above 0, and still count as settled. It is a thousand
	// times the rounding of a few dozen pivots, and a tenth of what a caller
	// who wants ten right digits can see.
	feasibility = 1e-11
	// smallPivot is the least magnitude of a pivot: what is smaller may be
	// rounding of zero, and would multiply the errors of the dictionary.
	smallPivot = 1e-9
	// patience is the number of degenerate pivots in a row before the rule of
	// choice, which is fast but may cycle, gives way to one that cannot.
	patience = 40
)

// pivotLimit bounds the pivots of one Solve: the simplex method takes a few
// times m+n in practice (Chvátal, 1983, chapter 4), so hitting it means
// cycling by rounding.
func (w *dictionary) pivotLimit() int { return 5000 + 200*(len(w.basic)+len(w.nonbasic)) }

// order puts variables in a fixed sequence for Bland's rule.
func (w *dictionary) order(v int) int {
	if v >= 0 {
		return v
	}
	return len(w.c) + ^v
}

// primal runs the primal simplex from a feasible dictionary: Optimal,
// Unbounded (along nonbasic entering), or Undecided when the limit is hit.
// The entering variable is the one of largest reduced cost (Dantzig), the
// leaving one by Harris's two passes (Mathematical Programming 5, 1973): of
// those that block within the tolerance, the one with the largest pivot.
// After a run of degenerate pivots it follows Bland's rule (Mathematics of
// Operations Research 2, 1977), which cannot cycle, until a step is made.
func (w *dictionary) primal(limit int) (status Status, entering int) {
	stalled := 0
	for w.pivots < limit {
		bland := stalled > patience
		q := w.chooseEntering(bland)
		if q < 0 {
			return Optimal, -1
		}
		r, step, atUpper := w.primalRatio(q, bland)
		if u := w.upper(w.nonbasic[q]); u <= step && !math.IsInf(u, 1) {
			w.pivots++
			w.flipNonbasic(q)
			stalled = 0
			continue
		}
		if r < 0 {
			return Unbounded, q
		}
		if atUpper {
			w.flipBasic(r)
		}
		stalled++
		if step > feasibility {
			stalled = 0
		}
		w.pivot(r, q)
	}
	return Undecided, -1
}

func (w *dictionary) chooseEntering(bland bool) int {
	best, value := -1, feasibility
	for q, d := range w.d {
		if d <= feasibility || w.upper(w.nonbasic[q]) == 0 {
			continue
		}
		switch {
		case bland:
			if best < 0 || w.order(w.nonbasic[q]) < w.order(w.nonbasic[best]) {
				best = q
			}
		case d > value:
			best, value = q, d
		}
	}
	return best
}

// primalRatio returns the basic variable that blocks nonbasic q first, -1 if
// none does, and how far q may go until then.
func (w *dictionary) primalRatio(q int, bland bool) (leaving int, step float64, atUpper bool) {
	slack := feasibility
	if bland {
		slack = 0
	}
	// room returns the distance of row r to the bound it moves to, and the
	// speed at which it does.
	room := func(r int) (distance, speed float64, up bool) {
		speed = w.t[r][q]
		switch {
		case speed > smallPivot:
			return max(w.beta[r], 0), speed, false
		case speed < -smallPivot:
			return max(w.upper(w.basic[r])-w.beta[r], 0), -speed, true
		}
		return math.Inf(1), 1, false
	}
	most := math.Inf(1)
	for r := range w.t {
		distance, speed, _ := room(r)
		most = min(most, (distance+slack)/speed)
	}
	leaving, step = -1, math.Inf(1)
	if math.IsInf(most, 1) {
		return leaving, step, false
	}
	greatest := 0.0
	for r := range w.t {
		distance, speed, up := room(r)
		if distance/speed > most {
			continue
		}
		better := speed > greatest
		if bland && leaving >= 0 {
			better = w.order(w.basic[r]) < w.order(w.basic[leaving])
		}
		if better {
			leaving, step, atUpper, greatest = r, distance/speed, up, speed
		}
	}
	return leaving, step, atUpper
}

// dual runs the dual simplex from a dictionary whose reduced costs are at
// most 0: Optimal when it is feasible, Infeasible (proved by basic row
// leaving), or Undecided when the limit is hit. The leaving variable is the
// one farthest outside its bounds relative to the length of its row, which is
// the steepest edge (Forrest & Goldfarb, Mathematical Programming 57, 1992)
// and costs little in a dictionary; the ratio test and the guard against
// cycling are as in primal.
func (w *dictionary) dual(limit int) (status Status, leaving int) {
	stalled := 0
	for w.pivots < limit {
		bland := stalled > patience
		r := w.chooseLeaving(bland)
		if r < 0 {
			return Optimal, -1
		}
		if w.beta[r] > 0 {
			w.flipBasic(r)
		}
		q, step := w.dualRatio(r, bland)
		if q < 0 {
			return Infeasible, r
		}
		stalled++
		if step > feasibility {
			stalled = 0
		}
		w.d[q] = min(w.d[q], 0)
		w.pivot(r, q)
	}
	return Undecided, -1
}

func (w *dictionary) chooseLeaving(bland bool) int {
	best, value := -1, 0.0
	for r, beta := range w.beta {
		outside := max(-beta, beta-w.upper(w.basic[r]))
		if outside <= feasibility {
			continue
		}
		if bland {
			if best < 0 || w.order(w.basic[r]) < w.order(w.basic[best]) {
				best = r
			}
			continue
		}
		length := 1.0
		for _, v := range w.t[r] {
			length += v * v
		}
		if v := outside * outside / length; v > value {
			best, value = r, v
		}
	}
	return best
}

// dualRatio returns the nonbasic variable whose reduced cost reaches 0 first
// when basic r, below 0, rises; -1 if nothing can make it rise.
func (w *dictionary) dualRatio(r int, bland bool) (entering int, step float64) {
	slack := feasibility
	if bland {
		slack = 0
	}
	row := w.t[r]
	most := math.Inf(1)
	for q, v := range row {
		if v < -smallPivot && w.upper(w.nonbasic[q]) > 0 {
			most = min(most, (max(-w.d[q], 0)+slack)/-v)
		}
	}
	entering = -1
	greatest := 0.0
	for q, v := range row {
		if v >= -smallPivot || w.upper(w.nonbasic[q]) == 0 {
			continue
		}
		ratio := max(-w.d[q], 0) / -v
		if ratio > most {
			continue
		}
		better := -v > greatest
		if bland && entering >= 0 {
			better = w.order(w.nonbasic[q]) < w.order(w.nonbasic[entering])
		}
		if better {
			entering, step, greatest = q, ratio, -v
		}
	}
	return entering, step
}

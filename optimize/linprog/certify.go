package linprog

import (
	"fmt"
	"math"
)

// Certificate tells how well a Solution is confirmed by the programme's data
// alone. Sums are made in twice the working precision. Violations are relative
// to the largest numbers at hand once the programme is equilibrated, that is
// rows and columns are scaled by powers of two to entries of at most about 1:
// that of a row to the largest variable and right side, that of a reduced cost
// to the largest multiplier and cost, the gap to the product of both.
type Certificate struct {
	// Primal is the largest violation of a row or a bound by X. 0 is perfect.
	Primal float64
	// Dual is the largest violation of a sign by Dual or a reduced cost (or by
	// Farkas, or by Ray in a row).
	Dual float64
	// Gap is the difference of the objective and the dual objective where
	// the solution is Optimal. Where it is Infeasible or Unbounded it is
	// negative if Farkas or Ray does prove that: minus the proof's margin.
	Gap float64
}

// Worst returns the largest of the three numbers: how far the solution is
// from being proved.
func (c Certificate) Worst() float64 { return max(c.Primal, c.Dual, c.Gap) }

// Certify checks a solution against the data: that X satisfies the
// constraints, that Dual satisfies those of the dual programme, and that
// their objectives agree, which together prove X optimal; or that Farkas
// proves that there is no solution, or Ray that there is no end. It uses
// nothing of how the solution was found. It is an error if the solution does
// not have the shape of the programme.
func Certify(p *Program, s Solution) (Certificate, error) {
	m, n := p.Rows(), p.Columns()
	check := func(what string, v []float64, want int) error {
		if len(v) != want {
			return fmt.Errorf("linprog: solution with %d %s: must have %d", len(v), what, want)
		}
		return nil
	}
	e := equilibrate(p)
	switch s.Status {
	case Optimal:
		if err := check("variables", s.X, n); err != nil {
			return Certificate{}, err
		}
		if err := check("multipliers", s.Dual, m); err != nil {
			return Certificate{}, err
		}
		dual, gap := e.checkDual(s)
		return Certificate{e.checkPrimal(s.X), dual, gap}, nil
	case Infeasible:
		if err := check("Farkas multipliers", s.Farkas, m); err != nil {
			return Certificate{}, err
		}
		dual, gap := e.checkFarkas(s.Farkas)
		return Certificate{0, dual, gap}, nil
	case Unbounded:
		if err := check("variables", s.X, n); err != nil {
			return Certificate{}, err
		}
		if err := check("ray entries", s.Ray, n); err != nil {
			return Certificate{}, err
		}
		dual, gap := e.checkRay(s.Ray)
		return Certificate{e.checkPrimal(s.X), dual, gap}, nil
	}
	return Certificate{}, fmt.Errorf("linprog: solution that is %s: must be settled", s.Status)
}

// equilibrated is a programme with the scale of its rows and columns.
type equilibrated struct {
	*Program
	row, column []float64
	side, cost  float64 // largest magnitudes of scaled right sides and costs
}

func equilibrate(p *Program) equilibrated {
	e := equilibrated{Program: p}
	e.row, e.column = scales(p.a, p.Columns())
	e.side = largest(p.Rows(), func(i int) float64 { return e.row[i] * p.rhs[i] })
	e.cost = largest(p.Columns(), func(j int) float64 { return e.column[j] * p.cost[j] })
	return e
}

// variables returns the scale of rows at x, multipliers that of reduced costs
// at y, never 0.
func (e equilibrated) variables(x []float64) float64 {
	return nonzero(max(e.side, largest(len(x), func(j int) float64 { return x[j] / e.column[j] })))
}

func (e equilibrated) multipliers(y []float64) float64 {
	return nonzero(max(e.cost, largest(len(y), func(i int) float64 { return y[i] / e.row[i] })))
}

func nonzero(v float64) float64 {
	if v == 0 {
		return 1
	}
	return v
}

// excess returns by how much a value that should relate to 0 does not.
func (r Relation) excess(v float64) float64 {
	switch r {
	case AtMost:
		return max(v, 0)
	case AtLeast:
		return max(-v, 0)
	}
	return math.Abs(v)
}

// wrong returns by how much a multiplier of a maximising programme lacks the
// sign it must have.
func (r Relation) wrong(y float64) float64 {
	switch r {
	case AtMost:
		return max(-y, 0)
	case AtLeast:
		return max(y, 0)
	}
	return 0
}

func (e equilibrated) checkPrimal(x []float64) float64 {
	scale := e.variables(x)
	worst := 0.0
	for i, row := range e.a {
		var s accumulator
		s.add(-e.rhs[i])
		for j, v := range row {
			s.addProduct(v, x[j])
		}
		worst = max(worst, e.relation[i].excess(s.sum())*e.row[i]/scale)
	}
	for j, v := range x {
		worst = max(worst, -v/e.column[j]/scale, (v-e.upper[j])/e.column[j]/scale)
	}
	return worst
}

func (e equilibrated) checkDual(s Solution) (dual, gap float64) {
	sign := 1.0
	if e.Goal == Minimize {
		sign = -1
	}
	scale := e.multipliers(s.Dual)
	// The dual objective b·y + Σ uⱼ max(dⱼ, 0), less c·x.
	var difference accumulator
	for i, y := range s.Dual {
		dual = max(dual, e.relation[i].wrong(sign*y)/e.row[i]/scale)
		difference.addProduct(e.rhs[i], y)
	}
	for j, c := range e.Program.cost {
		var d accumulator
		d.add(c)
		for i, y := range s.Dual {
			d.addProduct(-e.a[i][j], y)
		}
		if v := sign * d.sum(); v > 0 {
			if math.IsInf(e.upper[j], 1) {
				dual = max(dual, v*e.column[j]/scale)
			} else {
				difference.addProduct(sign*v, e.upper[j])
			}
		}
		difference.addProduct(-c, s.X[j])
	}
	return dual, math.Abs(difference.sum()) / scale / e.variables(s.X)
}

func (e equilibrated) checkFarkas(y []float64) (dual, gap float64) {
	scale := nonzero(largest(len(y), func(i int) float64 { return y[i] / e.row[i] }))
	var margin accumulator // y·b less the least of y·A x
	for i, v := range y {
		dual = max(dual, e.relation[i].wrong(v)/e.row[i]/scale)
		margin.addProduct(e.rhs[i], v)
	}
	for j, u := range e.upper {
		var d accumulator
		for i, v := range y {
			d.addProduct(e.a[i][j], v)
		}
		if v := d.sum(); v < 0 {
			if math.IsInf(u, 1) {
				dual = max(dual, -v*e.column[j]/scale)
			} else {
				margin.addProduct(-v, u)
			}
		}
	}
	return dual, margin.sum() / scale / nonzero(e.side)
}

func (e equilibrated) checkRay(ray []float64) (dual, gap float64) {
	scale := nonzero(largest(len(ray), func(j int) float64 { return ray[j] / e.column[j] }))
	for i, row := range e.a {
		var s accumulator
		for j, v := range row {
			s.addProduct(v, ray[j])
		}
		dual = max(dual, e.relation[i].excess(s.sum())*e.row[i]/scale)
	}
	var gain accumulator
	for j, v := range ray {
		gain.addProduct(e.Program.cost[j], v)
		if v < 0 || v > 0 && !math.IsInf(e.upper[j], 1) {
			dual = max(dual, math.Abs(v)/e.column[j]/scale)
		}
	}
	gap = gain.sum() / scale / nonzero(e.cost)
	if e.Goal == Maximize {
		gap = -gap
	}
	return dual, gap
}

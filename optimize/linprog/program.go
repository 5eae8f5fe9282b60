package linprog

import (
	"fmt"
	"math"
	"slices"
)

// Goal says whether the objective is to be made large or small.
type Goal int

// The goals.
const (
	Maximize Goal = iota
	Minimize
)

// Relation is how a row's left side relates to its right side.
type Relation int

// The relations.
const (
	AtMost  Relation = iota // Σ aⱼxⱼ ≤ b
	AtLeast                 // Σ aⱼxⱼ ≥ b
	Equal                   // Σ aⱼxⱼ = b
)

// Program is a linear programme: Goal of c·x subject to rows that relate a·x
// to b, and 0 ≤ x ≤ upper. The zero value has no columns and no rows, and
// maximises. Add to it and change it at any time; Solve starts from the basis
// of the answer before. It is not safe for concurrent use.
type Program struct {
	// Goal may be changed between calls of Solve.
	Goal Goal

	cost, upper []float64   // by column
	a           [][]float64 // by row, then column
	relation    []Relation  // by row
	rhs         []float64   // by row

	work *dictionary // nil until solved, or after a change it cannot follow
	from Basis       // where to start when work is nil; empty: all slacks
}

// Columns returns the number of columns (variables).
func (p *Program) Columns() int { return len(p.cost) }

// Rows returns the number of rows (constraints).
func (p *Program) Rows() int { return len(p.a) }

// AddColumn adds a variable x ≥ 0 with its cost and its coefficient in each
// row there is (any number of rows, 0 too), and returns its index. It is an
// error if a number is not finite or the coefficients are not as many as the
// rows.
func (p *Program) AddColumn(cost float64, coefficients ...float64) (int, error) {
	if len(coefficients) != p.Rows() {
		return 0, fmt.Errorf("linprog: column with %d coefficients: must have %d, one for each row", len(coefficients), p.Rows())
	}
	if err := finite("cost", cost); err != nil {
		return 0, err
	}
	if err := finite("coefficient", coefficients...); err != nil {
		return 0, err
	}
	p.cost = append(p.cost, cost)
	p.upper = append(p.upper, math.Inf(1))
	for i, v := range coefficients {
		p.a[i] = append(p.a[i], v)
	}
	return p.Columns() - 1, nil
}

// AddRow adds a constraint with a coefficient for each column there is, and
// returns its index. It is an error if a number is not finite or the
// coefficients are not as many as the columns.
func (p *Program) AddRow(relation Relation, rhs float64, coefficients ...float64) (int, error) {
	if len(coefficients) != p.Columns() {
		return 0, fmt.Errorf("linprog: row with %d coefficients: must have %d, one for each column", len(coefficients), p.Columns())
	}
	if relation < AtMost || relation > Equal {
		return 0, fmt.Errorf("linprog: relation %d: must be AtMost, AtLeast or Equal", relation)
	}
	if err := finite("right side", rhs); err != nil {
		return 0, err
	}
	if err := finite("coefficient", coefficients...); err != nil {
		return 0, err
	}
	p.a = append(p.a, slices.Clone(coefficients))
	p.relation = append(p.relation, relation)
	p.rhs = append(p.rhs, rhs)
	return p.Rows() - 1, nil
}

// SetCost changes the cost of a column; the next Solve starts with the primal
// simplex from the last basis.
func (p *Program) SetCost(column int, cost float64) error {
	if err := p.inColumns(column); err != nil {
		return err
	}
	if err := finite("cost", cost); err != nil {
		return err
	}
	p.cost[column] = cost
	p.forget()
	return nil
}

// SetRHS changes the right side of a row; the next Solve starts with the dual
// simplex from the last basis.
func (p *Program) SetRHS(row int, rhs float64) error {
	if err := p.inRows(row); err != nil {
		return err
	}
	if err := finite("right side", rhs); err != nil {
		return err
	}
	p.rhs[row] = rhs
	p.forget()
	return nil
}

// SetUpper changes the upper bound of a column, +Inf at first. It must not be
// negative.
func (p *Program) SetUpper(column int, upper float64) error {
	if err := p.inColumns(column); err != nil {
		return err
	}
	if !(upper >= 0) {
		return fmt.Errorf("linprog: upper bound %v: must be 0 or more, or +Inf", upper)
	}
	p.upper[column] = upper
	p.forget()
	return nil
}

// SetCoefficient changes the coefficient of a column in a row.
func (p *Program) SetCoefficient(row, column int, value float64) error {
	if err := p.inRows(row); err != nil {
		return err
	}
	if err := p.inColumns(column); err != nil {
		return err
	}
	if err := finite("coefficient", value); err != nil {
		return err
	}
	p.a[row][column] = value
	p.forget()
	return nil
}

// StartFrom makes the next Solve start from the basis, which may come from
// another Program with as many rows and columns. A basis that turns out to be
// singular is given up for that of all slacks.
func (p *Program) StartFrom(b Basis) error {
	if len(b.Columns) != p.Columns() || len(b.Rows) != p.Rows() {
		return fmt.Errorf("linprog: basis of %d columns and %d rows: must have %d and %d",
			len(b.Columns), len(b.Rows), p.Columns(), p.Rows())
	}
	basics := 0
	for _, s := range slices.Concat(b.Columns, b.Rows) {
		if s == Basic {
			basics++
		}
	}
	if basics != p.Rows() {
		return fmt.Errorf("linprog: basis with %d basic columns and rows: must have %d, the number of rows", basics, p.Rows())
	}
	p.work = nil
	p.from = Basis{slices.Clone(b.Columns), slices.Clone(b.Rows)}
	return nil
}

// forget drops the dictionary but keeps its basis as the start of the next.
func (p *Program) forget() {
	if p.work != nil {
		p.from = p.work.basis()
		p.work = nil
	}
}

func (p *Program) inColumns(j int) error {
	if j < 0 || j >= p.Columns() {
		return fmt.Errorf("linprog: column %d: must be from 0 to %d", j, p.Columns()-1)
	}
	return nil
}

func (p *Program) inRows(i int) error {
	if i < 0 || i >= p.Rows() {
		return fmt.Errorf("linprog: row %d: must be from 0 to %d", i, p.Rows()-1)
	}
	return nil
}

func finite(what string, values ...float64) error {
	for _, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("linprog: %s %v: must be finite", what, v)
		}
	}
	return nil
}

package linprog

import "errors"

// Status is how a programme was settled.
type Status int

// The statuses.
const (
	Undecided  Status = iota // no answer: Solve returned an error
	Optimal                  // X is best
	Infeasible               // no x satisfies the rows; Farkas proves it
	Unbounded                // the objective has no end along Ray from X
)

// String returns the status in words.
func (s Status) String() string {
	return [...]string{"undecided", "optimal", "infeasible", "unbounded"}[s]
}

// ErrNumerical is returned by Solve when rounding, or a run of degenerate
// pivots without end, keeps it from settling the programme.
var ErrNumerical = errors.New("linprog: the programme is too badly conditioned to be settled")

// State is where a column or the slack of a row stands in a basis.
type State int

// The states. A row whose slack is AtLower holds with equality.
const (
	AtLower State = iota
	AtUpper
	Basic
)

// Basis is the state of each column and of the slack of each row; as many are
// Basic as there are rows.
type Basis struct {
	Columns []State
	Rows    []State
}

// Solution is the outcome of Solve, computed from the programme's data and
// the final basis alone.
type Solution struct {
	Status Status
	// Objective is c·X where Status is Optimal.
	Objective float64
	// X holds the variables, one per column, within their bounds, where
	// Status is Optimal or Unbounded.
	X []float64
	// Dual holds the multiplier of each row where Status is Optimal: the
	// derivative of Objective by the row's right side. When maximising it
	// is ≥ 0 for AtMost and ≤ 0 for AtLeast; when minimising the reverse.
	Dual []float64
	// Reduced holds the reduced cost of each column where Status is
	// Optimal: the derivative of Objective by the variable, held away from
	// its present bound; 0 for basic columns. Cost = Dual·A + Reduced.
	Reduced []float64
	// Ray is the direction in which the objective has no end where Status is
	// Unbounded: X + s·Ray satisfies all constraints for every s ≥ 0.
	Ray []float64
	// Farkas holds multipliers of the rows that prove infeasibility where
	// Status is Infeasible: ≥ 0 for AtMost, ≤ 0 for AtLeast, and the
	// combination y·A x ≤ y·b of the rows is false for all 0 ≤ x ≤ upper.
	Farkas []float64
	// Basis is the final basis; see Program.StartFrom.
	Basis Basis
	// Pivots is the number of basis changes and bound flips.
	Pivots int
}

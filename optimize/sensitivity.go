package optimize

import (
	"context"
	"math"
	"slices"
	"sync"

	"tannery/ensembles"
)

// sensitivity is how the margins of an ensemble change with the fractions of
// its degrees and with the channel parameters, by differences: an ensemble
// with a little more of a degree is evolved in full, so that everything that
// the change does to the density along the tunnel is in the answer.
type sensitivity struct {
	variables, checks []int // the degrees considered, ascending
	// One matrix for each yardstick, of a row for each of its places with a
	// column for each variable degree, each check degree, and the parameter.
	slopes [][][]float64
}

const (
	// fractionStep is the fraction of edges that is moved to a degree for
	// the difference, and parameterStep how far the channel parameter is
	// moved, relative to it. Margins are smooth to about 1e-11.
	fractionStep  = 1e-4
	parameterStep = 1e-4
)

// sense evolves an ensemble with each change, as many at once as there are
// workers. It returns the number of evolutions.
func sense(ctx context.Context, e ensembles.Ensemble, at []reading, by []yardstick, variables, checks []int, workers int) (sensitivity, int, error) {
	s := sensitivity{variables: variables, checks: checks}
	columns := len(variables) + len(checks) + 1
	type task struct{ yardstick, column int }
	var tasks []task
	for y := range by {
		for c := range columns {
			tasks = append(tasks, task{y, c})
		}
	}
	results := make([][]float64, len(tasks))
	failures := make([]error, len(tasks))
	var wait sync.WaitGroup
	next := make(chan int)
	for range max(workers, 1) {
		wait.Go(func() {
			for n := range next {
				t := tasks[n]
				changed, parameter, step := e, at[t.yardstick].parameter, fractionStep
				switch v, c := t.column, t.column-len(variables); {
				case v < len(variables):
					changed.Lambda = withMore(e.Lambda, variables[v])
				case c < len(checks):
					changed.Rho = withMore(e.Rho, checks[c])
				default:
					step = -parameterStep * parameter
					parameter += step
				}
				m, err := by[t.yardstick].margins(ctx, changed, parameter, at[t.yardstick].places)
				if failures[n] = err; err != nil {
					continue
				}
				for k := range m {
					m[k] = (m[k] - at[t.yardstick].margins[k]) / step
				}
				results[n] = m
			}
		})
	}
	for n := range tasks {
		next <- n
	}
	close(next)
	wait.Wait()
	for _, err := range failures {
		if err != nil {
			return s, 0, err
		}
	}
	for y := range by {
		rows := make([][]float64, len(at[y].places))
		for k := range rows {
			rows[k] = make([]float64, columns)
			for c := range columns {
				rows[k][c] = results[y*columns+c][k]
			}
		}
		s.slopes = append(s.slopes, rows)
	}
	return s, len(tasks), nil
}

// withMore moves fractionStep of all edges to a degree.
func withMore(d ensembles.Distribution, degree int) ensembles.Distribution {
	out := make(ensembles.Distribution, 0, len(d)+1)
	for _, t := range d {
		out = append(out, ensembles.Term{Degree: t.Degree, Fraction: t.Fraction * (1 - fractionStep)})
	}
	at, found := slices.BinarySearchFunc(out, degree, func(t ensembles.Term, n int) int { return t.Degree - n })
	if !found {
		out = slices.Insert(out, at, ensembles.Term{Degree: degree})
	}
	out[at].Fraction += fractionStep
	return out
}

// usable tells whether a row of slopes is known in all columns.
func usable(row []float64) bool {
	for _, v := range row {
		if math.IsNaN(v) {
			return false
		}
	}
	return true
}

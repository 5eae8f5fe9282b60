package channel

import (
	"errors"
	"fmt"
	"math"
)

// DMC is a discrete memoryless channel. Treat it as immutable.
type DMC struct {
	// Inputs and Outputs are labels, for people; nil if there are none.
	Inputs, Outputs []string
	// Transitions[x][y] is the probability of output y when x is sent. There
	// are as many rows as inputs, all of the same length, each summing to 1.
	Transitions [][]float64
}

const (
	// MaxSymbols is the largest number of inputs, and of outputs, of a DMC.
	// Its square fits memory and its cube the patience of a person.
	MaxSymbols = 1024
	// RowTolerance is how far a row of transition probabilities, or a list
	// of masses, may miss 1 and still be normalised: six digits were printed.
	RowTolerance = 1e-6
	// roundingTolerance is how far a sum may miss 1 without being mentioned.
	roundingTolerance = 1e-12
)

// NewDMC checks the transition probabilities and normalises rows that miss 1
// by at most RowTolerance; a warning tells of those that miss it by more than
// rounding. Its error tells all that is wrong.
func NewDMC(transitions [][]float64) (c DMC, warnings []string, err error) {
	if n := len(transitions); n < 1 || n > MaxSymbols {
		return DMC{}, nil, fmt.Errorf("%d rows: must be from 1 to %d, one for each input", n, MaxSymbols)
	}
	width := len(transitions[0])
	if width < 1 || width > MaxSymbols {
		return DMC{}, nil, fmt.Errorf("row 1: %d columns: must be from 1 to %d, one for each output", width, MaxSymbols)
	}
	var errs []error
	for i, row := range transitions {
		normalised, warning, err := checkRow(row, width)
		if err != nil {
			errs = append(errs, fmt.Errorf("row %d: %w", i+1, err))
		}
		if warning != "" {
			warnings = append(warnings, fmt.Sprintf("row %d: %s", i+1, warning))
		}
		c.Transitions = append(c.Transitions, normalised)
	}
	if err := errors.Join(errs...); err != nil {
		return DMC{}, nil, err
	}
	return c, warnings, nil
}

// checkRow returns the row divided by its sum.
func checkRow(row []float64, width int) (normalised []float64, warning string, err error) {
	if len(row) != width {
		return nil, "", fmt.Errorf("%d columns: must be %d, as in the first row", len(row), width)
	}
	for j, p := range row {
		if !(p >= 0 && p <= 1) {
			return nil, "", fmt.Errorf("column %d: probability %v: must be from 0 to 1", j+1, p)
		}
	}
	normalised, warning, ok := normalise(row)
	if !ok {
		return nil, "", fmt.Errorf("%s: must be %s", warning, sumAllowed)
	}
	return normalised, warning, nil
}

// sumAllowed says what normalise accepts.
var sumAllowed = fmt.Sprintf("a sum of 1 within %g", RowTolerance)

// normalise returns non-negative masses divided by their sum, with a warning
// if that changes them by more than rounding; ok is false, and the warning
// tells why, if the sum misses 1 by more than RowTolerance.
func normalise(masses []float64) (normalised []float64, warning string, ok bool) {
	sum := 0.0
	for _, p := range masses {
		sum += p
	}
	if !(math.Abs(sum-1) <= RowTolerance+roundingTolerance) {
		return nil, fmt.Sprintf("a sum of %.9g", sum), false
	}
	if math.Abs(sum-1) > roundingTolerance {
		warning = fmt.Sprintf("a sum of %.9g, normalised to 1", sum)
	}
	normalised = make([]float64, len(masses))
	for i, p := range masses {
		normalised[i] = p / sum
	}
	return normalised, warning, true
}

package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"tannery/ensembles/document"
)

// rangeOption is an option that takes several real numbers: one or more with
// commas between them, or FROM:TO:STEP.
type rangeOption struct {
	values []float64
	allow  document.Range
}

const (
	// maxRange is the largest number of values.
	maxRange = 1000
	// rangeDigits is to how many digits the steps of a range are rounded, so
	// that 0.36:0.46:0.02 gives the 0.42 that a list gives.
	rangeDigits = 12
	// rangeSlack is how much of a step the last value may be beyond TO.
	rangeSlack = 1e-6
)

// Set implements pflag.Value.
func (o *rangeOption) Set(text string) error {
	o.values = nil
	wrong := fmt.Errorf("at most %d different numbers with commas between them, or FROM:TO:STEP with a STEP that leads from FROM to TO; each %s", maxRange, o.allow)
	if parts := strings.Split(text, ":"); len(parts) == 3 {
		var n [3]float64
		for i, part := range parts {
			v, err := document.ParseFloat(part)
			if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
				return wrong
			}
			n[i] = v
		}
		steps := (n[1]-n[0])/n[2] + rangeSlack
		if n[2] == 0 || !(steps >= 0 && steps < maxRange) {
			return wrong
		}
		for i := range int(steps) + 1 {
			v, _ := strconv.ParseFloat(strconv.FormatFloat(n[0]+float64(i)*n[2], 'g', rangeDigits, 64), 64)
			o.values = append(o.values, v)
		}
	} else {
		for part := range strings.SplitSeq(text, ",") {
			v, err := document.ParseFloat(strings.TrimSpace(part))
			if err != nil {
				return wrong
			}
			o.values = append(o.values, v)
		}
	}
	seen := map[float64]bool{}
	for i, v := range o.values {
		o.values[i] = v + 0 // which makes 0 of -0
		if !o.allow.Contains(v) || seen[v] || len(o.values) > maxRange {
			return wrong
		}
		seen[v] = true
	}
	return nil
}

// Type names the value in help texts.
func (o *rangeOption) Type() string { return "NUMBERS" }

// String returns nothing: there is no default.
func (o *rangeOption) String() string { return "" }

package channel

import (
	"cmp"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"tannery/ensembles/document"
)

// maxCount is the largest count: above it floating point skips whole numbers.
const maxCount = 1 << 53

// llrAllowed and the ranges say what the columns of a measured density hold.
const llrAllowed = "a number, inf or -inf"

// ReadMeasured reads a density of LLR values that were measured while zeros
// were sent; the name stands for the file in messages, and its base for a
// missing title. As CSV, the first row names the columns: llr and, beside it,
// mass (probabilities that sum to 1) or counts (whole numbers of samples);
// llr alone is a list of samples. Lines that begin with # are comments. As
// YAML:
//
//	kind: density
//	version: 1
//	title: soft output of the harbour receiver   # optional
//	llr: [-1.5, 1.5, inf]
//	mass: [0.1, 0.4, 0.5]     # or counts: [100, 400, 500], or neither
//
// The values are checked and symmetrised as NewMeasured and
// NewMeasuredFromCounts say, with a warning. The error tells every problem
// of form with its file, line and column.
func ReadMeasured(name string, r io.Reader) (m Measured, warnings []string, err error) {
	data, err := readAll(name, r)
	if err != nil {
		return Measured{}, nil, err
	}
	var v measuredValues
	if isYAML(name, data) {
		v, err = valuesFromYAML(name, data)
	} else {
		v, err = valuesFromCSV(name, data)
	}
	if err != nil {
		return Measured{}, nil, err
	}
	base := filepath.Base(name)
	v.title = cmp.Or(v.title, strings.TrimSuffix(base, filepath.Ext(base)))
	var warning string
	if v.masses != nil {
		m, warning, err = NewMeasured(v.title, v.llr, v.masses)
	} else {
		m, warning, err = NewMeasuredFromCounts(v.title, v.llr, v.counts)
	}
	if err != nil {
		return Measured{}, nil, fmt.Errorf("%s: %w", name, err)
	}
	if warning != "" {
		warnings = append(warnings, name+": "+warning)
	}
	return m, warnings, nil
}

// measuredValues are as in the file, with either masses or counts.
type measuredValues struct {
	title               string
	llr, masses, counts []float64
}

func valuesFromCSV(name string, data []byte) (v measuredValues, err error) {
	t := readTable(name, data)
	if len(t.rows) == 0 {
		return v, t.err()
	}
	const header = "a first row that names the columns: llr,mass or llr,counts or llr"
	var names []string
	for _, at := range t.rows[0] {
		names = append(names, strings.ToLower(at.text))
	}
	var weights *[]float64
	kind := probability
	switch strings.Join(names, ",") {
	case "llr":
	case "llr,mass":
		weights = &v.masses
	case "llr,counts":
		weights, kind = &v.counts, document.FromTo(0, maxCount)
	default:
		t.refuse(t.rows[0][0], quoted(strings.Join(names, ",")), header)
		return v, t.err()
	}
	if len(t.rows) == 1 && len(t.problems) == 0 {
		t.refuse(t.rows[0][0], "no values", "at least one row of numbers")
	}
	for _, row := range t.rows[1:] {
		if len(row) != len(names) {
			t.refuse(row[0], fmt.Sprintf("%d columns", len(row)), fmt.Sprintf("%d, as in the first row", len(names)))
			continue
		}
		x, ok := parseLLR(row[0].text)
		if !ok {
			t.refuse(row[0], quoted(row[0].text), llrAllowed)
		}
		v.llr = append(v.llr, x)
		switch weights {
		case nil:
			v.counts = append(v.counts, 1)
		case &v.masses:
			v.masses = append(v.masses, t.number(row[1], kind))
		default:
			if strings.Trim(row[1].text, "0123456789") != "" {
				t.refuse(row[1], quoted(row[1].text), "a whole number of at least 0")
			} else {
				v.counts = append(v.counts, t.number(row[1], kind))
			}
		}
	}
	return v, t.err()
}

func valuesFromYAML(name string, data []byte) (v measuredValues, err error) {
	doc := document.Parse(name, data)
	root := doc.Kind("density", 1)
	if title := root.Optional("title"); title.Present() {
		v.title = title.String()
	}
	for _, item := range root.Required("llr").List("a list, each item " + llrAllowed) {
		x, ok := parseLLR(item.String())
		if !ok {
			item.RefuseAsIs(llrAllowed)
		}
		v.llr = append(v.llr, x)
	}
	mass, counts := root.Optional("mass"), root.Optional("counts")
	switch {
	case mass.Present() && counts.Present():
		counts.Refuse("counts beside mass", "one of mass and counts")
	case mass.Present():
		v.masses = mass.Floats(probability)
		matchLength(mass, len(v.masses), len(v.llr))
	case counts.Present():
		list := counts.List("a list of whole numbers")
		for _, item := range list {
			v.counts = append(v.counts, float64(item.Int(0, maxCount)))
		}
		matchLength(counts, len(list), len(v.llr))
	default:
		for range v.llr {
			v.counts = append(v.counts, 1)
		}
	}
	if err := doc.Err(); err != nil {
		return v, err
	}
	if len(v.llr) == 0 {
		return v, fmt.Errorf("%s: %w", name, errors.New("llr: found an empty list; allowed: at least one value"))
	}
	return v, nil
}

// matchLength reports a list that is not as long as that of the LLR values.
func matchLength(v document.Value, n, values int) {
	if n != values {
		v.Refuse(fmt.Sprintf("%d items", n), fmt.Sprintf("%d, as in llr", values))
	}
}

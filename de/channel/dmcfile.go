package channel

import (
	"fmt"
	"io"

	"tannery/ensembles/document"
)

var probability = document.FromTo(0, 1)

// ReadDMC reads a transition matrix; the name stands for the file in
// messages. As CSV, rows are inputs and columns are outputs; a first row
// without any number labels the outputs, and lines that begin with # are
// comments. As YAML:
//
//	kind: channel
//	version: 1
//	title: quantised telemetry link   # optional
//	transitions: [[0.9, 0.1], [0.2, 0.8]]
//	inputs: [zero, one]               # optional
//	outputs: [zero, one]              # optional
//
// Rows may miss 1 by at most RowTolerance: they are normalised, and a warning
// says so. The error tells every problem with its file, line and column.
func ReadDMC(name string, r io.Reader) (c DMC, warnings []string, err error) {
	data, err := readAll(name, r)
	if err != nil {
		return DMC{}, nil, err
	}
	if isYAML(name, data) {
		return dmcFromYAML(name, data)
	}
	return dmcFromCSV(name, data)
}

func dmcFromCSV(name string, data []byte) (c DMC, warnings []string, err error) {
	t := readTable(name, data)
	if len(t.rows) > 0 && isHeader(t.rows[0]) {
		for _, label := range t.rows[0] {
			c.Outputs = append(c.Outputs, label.text)
		}
		if t.rows = t.rows[1:]; len(t.rows) == 0 {
			t.refuse(cell{line: 1, column: 1}, "a row of labels and no other", "rows of numbers")
		}
	}
	if len(t.rows) > MaxSymbols {
		t.refuse(t.rows[MaxSymbols][0], fmt.Sprintf("%d rows", len(t.rows)), fmt.Sprintf("at most %d", MaxSymbols))
		return DMC{}, nil, t.err()
	}
	for i, row := range t.rows {
		width := len(t.rows[0])
		if c.Outputs != nil {
			width = len(c.Outputs)
		}
		before := len(t.problems)
		switch {
		case len(row) > MaxSymbols:
			t.refuse(row[MaxSymbols], fmt.Sprintf("%d columns", len(row)), fmt.Sprintf("at most %d", MaxSymbols))
		case len(row) != width:
			t.refuse(row[0], fmt.Sprintf("%d columns", len(row)), fmt.Sprintf("%d, as in the first row", width))
		}
		probabilities := make([]float64, len(row))
		for j, at := range row {
			if len(t.problems) < MaxSymbols {
				probabilities[j] = t.number(at, probability)
			}
		}
		if len(t.problems) > before {
			continue
		}
		normalised, warning, ok := normalise(probabilities)
		if !ok {
			t.refuse(row[0], warning, sumAllowed)
		} else if warning != "" {
			t.warn(row[0], fmt.Sprintf("row %d: %s", i+1, warning))
		}
		c.Transitions = append(c.Transitions, normalised)
	}
	if err := t.err(); err != nil {
		return DMC{}, nil, err
	}
	return c, t.warnings, nil
}

// isHeader tells whether no cell of the row is a number: a row with one
// number is data with mistakes.
func isHeader(row []cell) bool {
	for _, at := range row {
		if _, ok := parseNumber(at.text); ok {
			return false
		}
	}
	return true
}

func dmcFromYAML(name string, data []byte) (c DMC, warnings []string, err error) {
	doc := document.Parse(name, data)
	root := doc.Kind("channel", 1)
	_ = root.Optional("title").String()
	const what = "a list of rows, one for each input, each a list of probabilities that sum to 1"
	matrix := root.Required("transitions")
	rows := matrix.List(what)
	if rows != nil && (len(rows) == 0 || len(rows) > MaxSymbols) {
		matrix.Refuse(fmt.Sprintf("%d rows", len(rows)), fmt.Sprintf("from 1 to %d", MaxSymbols))
		rows = nil
	}
	width := 0
	for i, row := range rows {
		items := row.List("a list of probabilities that sum to 1")
		if i == 0 {
			width = len(items)
		}
		switch {
		case row.Faulty():
			continue
		case len(items) == 0 || len(items) > MaxSymbols:
			row.Refuse(fmt.Sprintf("%d columns", len(items)), fmt.Sprintf("from 1 to %d", MaxSymbols))
			continue
		case len(items) != width:
			row.Refuse(fmt.Sprintf("%d columns", len(items)), fmt.Sprintf("%d, as in the first row", width))
			continue
		}
		probabilities, faulty := make([]float64, width), false
		for j, item := range items {
			probabilities[j] = item.Float(probability)
			faulty = faulty || item.Faulty()
		}
		if faulty {
			continue
		}
		normalised, warning, ok := normalise(probabilities)
		if !ok {
			row.Refuse(warning, sumAllowed)
		} else if warning != "" {
			row.Warn(warning)
		}
		c.Transitions = append(c.Transitions, normalised)
	}
	c.Inputs = labels(root.Optional("inputs"), len(rows))
	c.Outputs = labels(root.Optional("outputs"), width)
	if err := doc.Err(); err != nil {
		return DMC{}, nil, err
	}
	return c, doc.Warnings(), nil
}

// labels returns a list of n labels, or nil if there is none.
func labels(v document.Value, n int) []string {
	if !v.Present() {
		return nil
	}
	list := v.Strings()
	if !v.Faulty() && n > 0 && len(list) != n {
		v.Refuse(fmt.Sprintf("%d labels", len(list)), fmt.Sprintf("%d, as in transitions", n))
	}
	return list
}

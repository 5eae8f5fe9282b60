package channel

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"tannery/ensembles/document"
)

// maxTableSize is the largest file of numbers in bytes: MaxSymbols² numbers
// of all their digits, or a million LLR values with counts.
const maxTableSize = 32 << 20

// cell is a field of a CSV file with its position, columns in bytes from 1.
type cell struct {
	text         string
	line, column int
}

// table is a CSV file on its way into numbers, with the problems found.
type table struct {
	name     string
	rows     [][]cell
	problems document.Problems
	warnings []string
}

// readTable reads comma-separated fields. Lines that are empty or begin with
// # are skipped, and spaces around fields.
func readTable(name string, data []byte) *table {
	t := &table{name: name}
	reader := csv.NewReader(bytes.NewReader(data))
	reader.Comment = '#'
	reader.FieldsPerRecord = -1
	reader.TrimLeadingSpace = true
	for {
		record, err := reader.Read()
		var syntax *csv.ParseError
		switch {
		case errors.Is(err, io.EOF):
			if len(t.rows) == 0 {
				t.refuse(cell{line: 1, column: 1}, "an empty table", "rows of numbers")
			}
			return t
		case errors.As(err, &syntax):
			t.refuse(cell{line: syntax.Line, column: syntax.Column}, syntax.Err.Error(), "fields separated by commas")
			return t
		case err != nil:
			t.refuse(cell{}, err.Error(), "fields separated by commas")
			return t
		}
		row := make([]cell, len(record))
		for i, text := range record {
			line, column := reader.FieldPos(i)
			row[i] = cell{strings.TrimSpace(text), line, column}
		}
		if len(row) == 1 && row[0].text == "" {
			continue // a line of spaces
		}
		t.rows = append(t.rows, row)
	}
}

func (t *table) refuse(at cell, found, allowed string) {
	t.problems = append(t.problems, document.Problem{File: t.name, Line: at.line, Column: at.column, Found: found, Allowed: allowed})
}

func (t *table) warn(at cell, text string) {
	t.warnings = append(t.warnings, fmt.Sprintf("%s:%d:%d: %s", t.name, at.line, at.column, text))
}

// number returns the cell as a number within the range, or reports it.
func (t *table) number(at cell, r document.Range) float64 {
	x, ok := parseNumber(at.text)
	switch {
	case !ok && strings.ContainsAny(at.text, "; \t"):
		t.refuse(at, quoted(at.text), "fields separated by commas")
	case !ok || !r.Contains(x):
		t.refuse(at, quoted(at.text), r.String())
	default:
		return x
	}
	return 0
}

func (t *table) err() error {
	if len(t.problems) == 0 {
		return nil
	}
	return t.problems
}

// parseNumber accepts finite decimal numbers, with an exponent or without,
// and none of the other forms that Go knows.
func parseNumber(text string) (float64, bool) {
	if strings.Trim(text, "0123456789+-.eE") != "" {
		return 0, false
	}
	x, err := strconv.ParseFloat(text, 64)
	return x, err == nil
}

// parseLLR accepts the numbers of parseNumber and the infinities.
func parseLLR(text string) (float64, bool) {
	switch strings.ToLower(text) {
	case "inf", "+inf", ".inf", "+.inf":
		return math.Inf(1), true
	case "-inf", "-.inf":
		return math.Inf(-1), true
	}
	return parseNumber(text)
}

// quoted writes a text found in a file, cut to a length that fits a line.
func quoted(text string) string {
	const most = 60
	if len(text) > most {
		return strconv.Quote(strings.ToValidUTF8(text[:most], "")) + "…"
	}
	return strconv.Quote(text)
}

// readAll reads a file of at most maxTableSize bytes, without a byte order
// mark.
func readAll(name string, r io.Reader) ([]byte, error) {
	data, err := io.ReadAll(io.LimitReader(r, maxTableSize+1))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if len(data) > maxTableSize {
		return nil, document.Problems{{File: name, Found: fmt.Sprintf("more than %d MiB", maxTableSize>>20), Allowed: fmt.Sprintf("at most %d MiB", maxTableSize>>20)}}
	}
	return bytes.TrimPrefix(data, []byte("\ufeff")), nil
}

// isYAML tells YAML from CSV by the file's extension; where that does not
// say, by the first line that is neither empty nor a comment: in YAML it
// begins with a brace or dashes, or it has a colon.
func isYAML(name string, data []byte) bool {
	switch strings.ToLower(filepath.Ext(name)) {
	case ".yaml", ".yml", ".json":
		return true
	case ".csv":
		return false
	}
	for line := range bytes.Lines(data) {
		line = bytes.TrimSpace(line)
		if len(line) == 0 || line[0] == '#' {
			continue
		}
		return line[0] == '{' || bytes.HasPrefix(line, []byte("---")) || bytes.ContainsRune(line, ':')
	}
	return false
}

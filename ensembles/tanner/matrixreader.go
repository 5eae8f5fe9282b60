package tanner

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
	"unicode"
)

// maxLine is the longest line kept; the format allows 1024 characters.
// Longer comments are skipped, other lines are refused.
const maxLine = 1 << 16

// ReadMatrix reads a Matrix Market coordinate pattern as a parity-check
// matrix: rows are check nodes and columns variable nodes. Integer and real
// matrices are read too if all their entries are 1, and symmetric ones.
// Comments and blank lines may stand anywhere after the first line, and lines
// may end with CR LF. Every row and every column must have an entry and no
// entry may be repeated. Errors begin with the name of the file and the number
// of the line at fault. Memory grows with what has been read, never with what
// the size line promises.
func ReadMatrix(name string, r io.Reader) (*Graph, Label, error) {
	m := matrixReader{lines: bufio.NewReaderSize(r, maxLine)}
	if err := m.read(); err != nil {
		if m.line > 0 {
			return nil, Label{}, fmt.Errorf("%s:%d: %w", name, m.line, err)
		}
		return nil, Label{}, fmt.Errorf("%s: %w", name, err)
	}
	return m.graph, m.label, nil
}

type matrixReader struct {
	lines                  *bufio.Reader
	line                   int // number of the line in hand, 0 if none is at fault
	format                 matrixFormat
	rows, columns, entries int
	edges                  []Edge // one for each entry read
	offsets                []lineOffset
	graph                  *Graph
	label                  Label
}

// lineOffset says that from an entry on, the line of entry i is i + lines.
type lineOffset struct{ entry, lines int }

func (m *matrixReader) read() error {
	text, err := m.next()
	if err != nil {
		return m.ended(err, "it must begin with "+banner)
	}
	text = bytes.TrimPrefix(text, []byte("\ufeff")) // some editors' mark of UTF-8
	if m.format, err = parseBanner(text); err != nil {
		return err
	}
	if text, err = m.nextData(); err != nil {
		return m.ended(err, "the line of rows, columns and entries is missing")
	}
	if err := m.readSize(text); err != nil {
		return err
	}
	for len(m.edges) < m.entries {
		if text, err = m.nextData(); err != nil {
			return m.ended(err, fmt.Sprintf("there are %d entries of the %d announced", len(m.edges), m.entries))
		}
		if err := m.readEntry(text); err != nil {
			return err
		}
	}
	if text, err = m.nextData(); err == nil {
		return fmt.Errorf("found %q; allowed: nothing after the %d entries announced", shorten(text), m.entries)
	} else if err != io.EOF {
		return err
	}
	return m.assemble()
}

// ended explains an end of the file that comes too early.
func (m *matrixReader) ended(err error, why string) error {
	if err == io.EOF {
		m.line = max(m.line, 1)
		return errors.New("found the end of the file: " + why)
	}
	return err
}

// next returns the next line without its end; the slice is valid until the
// next call. Of a longer line than maxLine it returns the beginning if it is
// a comment, and an error otherwise.
func (m *matrixReader) next() ([]byte, error) {
	text, err := m.lines.ReadSlice('\n')
	if len(text) == 0 && err == io.EOF {
		return nil, io.EOF
	}
	m.line++
	if err == bufio.ErrBufferFull {
		if text[0] != '%' || m.line == 1 {
			return nil, fmt.Errorf("found %q and more; allowed: lines of at most %d bytes", shorten(text), maxLine)
		}
		text = []byte("%")
		for err == bufio.ErrBufferFull {
			_, err = m.lines.ReadSlice('\n')
		}
	}
	if err != nil && err != io.EOF {
		return nil, err
	}
	return bytes.TrimSuffix(bytes.TrimSuffix(text, []byte("\n")), []byte("\r")), nil
}

// nextData returns the next line that is neither blank nor a comment.
func (m *matrixReader) nextData() ([]byte, error) {
	for {
		text, err := m.next()
		if err != nil {
			return nil, err
		}
		switch {
		case len(text) > 0 && text[0] == '%':
			m.readComment(text[1:])
		case len(bytes.TrimSpace(text)) > 0:
			return text, nil
		}
	}
}

// readComment keeps the parts of a label, the first of each key. Comments are
// anybody's text: what is not UTF-8 is replaced, and control characters, which
// would steer the terminal that shows it, become spaces.
func (m *matrixReader) readComment(text []byte) {
	key, value, _ := strings.Cut(string(text), ":")
	for _, p := range m.label.parts() {
		if strings.TrimSpace(key) == p.key && *p.value == "" {
			spaced := strings.Map(func(r rune) rune {
				if unicode.IsControl(r) {
					return ' '
				}
				return r
			}, strings.ToValidUTF8(value, "\ufffd"))
			*p.value = strings.Join(strings.Fields(spaced), " ")
		}
	}
}

func (m *matrixReader) readSize(text []byte) error {
	var size [3]int
	rest, err := parseNumbers(text, size[:], "ROWS COLUMNS ENTRIES")
	if err != nil {
		return err
	}
	if len(bytes.TrimSpace(rest)) > 0 {
		return fmt.Errorf("found %q; allowed: ROWS COLUMNS ENTRIES and nothing else", shorten(text))
	}
	m.rows, m.columns, m.entries = size[0], size[1], size[2]
	most := m.entries // that can be filled with these entries
	if m.format.symmetric {
		most *= 2
	}
	switch {
	case m.rows == 0 || m.columns == 0:
		return fmt.Errorf("found %d rows and %d columns; allowed: at least 1", m.rows, m.columns)
	case m.format.symmetric && m.rows != m.columns:
		return fmt.Errorf("found %d rows and %d columns; allowed: as many rows as columns in a symmetric matrix", m.rows, m.columns)
	case most > MaxEdges:
		return fmt.Errorf("found %d entries; allowed: at most %d", m.entries, MaxEdges/(most/m.entries))
	case m.rows > most:
		return fmt.Errorf("found %d rows and %d entries; allowed: an entry in every row", m.rows, m.entries)
	case m.columns > most:
		return fmt.Errorf("found %d columns and %d entries; allowed: an entry in every column", m.columns, m.entries)
	}
	return nil
}

func (m *matrixReader) readEntry(text []byte) error {
	var at [2]int
	rest, err := parseNumbers(text, at[:], m.format.form())
	if err != nil {
		return err
	}
	if err := m.format.checkValue(text, rest); err != nil {
		return err
	}
	if at[0] < 1 || at[0] > m.rows {
		return fmt.Errorf("found row %d; allowed: from 1 to %d", at[0], m.rows)
	}
	if at[1] < 1 || at[1] > m.columns {
		return fmt.Errorf("found column %d; allowed: from 1 to %d", at[1], m.columns)
	}
	if m.format.symmetric && at[0] < at[1] {
		return fmt.Errorf("found row %d, column %d; allowed: entries on or below the diagonal, as the matrix is symmetric", at[0], at[1])
	}
	lines := m.line - len(m.edges)
	if last := len(m.offsets) - 1; last < 0 || m.offsets[last].lines != lines {
		m.offsets = append(m.offsets, lineOffset{len(m.edges), lines})
	}
	m.edges = append(m.edges, Edge{int32(at[1] - 1), int32(at[0] - 1)})
	return nil
}

// parseNumbers reads as many whole numbers as the list has, written in decimal
// digits and separated by spaces or tabs, and returns the rest of the line.
func parseNumbers(text []byte, list []int, form string) (rest []byte, err error) {
	rest = text
	for i := range list {
		rest = bytes.TrimLeft(rest, " \t")
		digits := 0
		n := 0
		for digits < len(rest) && rest[digits] >= '0' && rest[digits] <= '9' {
			if n > MaxEdges {
				return nil, fmt.Errorf("found %q; allowed: numbers of at most %d", shorten(text), MaxEdges)
			}
			n = 10*n + int(rest[digits]-'0')
			digits++
		}
		if digits == 0 || digits < len(rest) && rest[digits] != ' ' && rest[digits] != '\t' {
			return nil, fmt.Errorf("found %q; allowed: %s in whole numbers", shorten(text), form)
		}
		list[i] = n
		rest = rest[digits:]
	}
	return rest, nil
}

// shorten makes a line fit into a message.
func shorten(text []byte) string {
	if text = bytes.TrimSpace(text); len(text) > 60 {
		return string(text[:60]) + "…"
	}
	return string(text)
}

// assemble makes the graph and checks what can be seen only as a whole.
func (m *matrixReader) assemble() error {
	g := assemble(m.columns, m.rows, m.edges)
	if v, c, found := g.repeated(); found {
		first := slices.Index(m.edges, Edge{v, c})
		second := first + 1 + slices.Index(m.edges[first+1:], Edge{v, c})
		m.line = m.lineOf(second)
		return fmt.Errorf("found row %d, column %d again; allowed: once, in line %d", c+1, v+1, m.lineOf(first))
	}
	if m.format.symmetric {
		for _, e := range m.edges {
			if e.Variable != e.Check {
				m.edges = append(m.edges, Edge{e.Check, e.Variable})
			}
		}
		g = assemble(m.columns, m.rows, m.edges)
	}
	m.line = 0
	for c := range g.Checks() {
		if len(g.VariablesOf(c)) == 0 {
			return fmt.Errorf("found row %d of %d empty; allowed: an entry in every row", c+1, m.rows)
		}
	}
	for v := range g.Variables() {
		if len(g.ChecksOf(v)) == 0 {
			return fmt.Errorf("found column %d of %d empty; allowed: an entry in every column", v+1, m.columns)
		}
	}
	m.graph = g
	return nil
}

// lineOf returns the line that entry i was read from.
func (m *matrixReader) lineOf(i int) int {
	k, found := slices.BinarySearchFunc(m.offsets, i, func(o lineOffset, i int) int { return o.entry - i })
	if !found {
		k--
	}
	return i + m.offsets[k].lines
}

package report

import (
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// Width is the number of columns a text for people keeps within.
const Width = 80

// labelWidth is the column at which values begin.
const labelWidth = 26

// Text is a text for people under construction: headings, rows of a label
// and a value, and tables, all within Width columns.
type Text struct{ b strings.Builder }

// Heading starts a new part, after an empty line if it is not the first.
func (t *Text) Heading(format string, args ...any) {
	t.Gap()
	t.b.WriteString(fmt.Sprintf(format, args...))
	t.b.WriteByte('\n')
}

// Gap writes an empty line between parts.
func (t *Text) Gap() {
	if t.b.Len() > 0 {
		t.b.WriteByte('\n')
	}
}

// Row writes a label and its value. Long values continue on further lines.
func (t *Text) Row(label, format string, args ...any) {
	lines := Wrap(fmt.Sprintf(format, args...), Width-labelWidth)
	for i, line := range lines {
		if i > 0 {
			label = ""
		}
		pad := max(1, labelWidth-2-utf8.RuneCountInString(label))
		fmt.Fprintf(&t.b, "  %s%s%s\n", label, strings.Repeat(" ", pad), line)
	}
}

// Paragraph writes wrapped text.
func (t *Text) Paragraph(format string, args ...any) {
	for _, line := range Wrap(fmt.Sprintf(format, args...), Width) {
		t.b.WriteString(line)
		t.b.WriteByte('\n')
	}
}

// Table writes right-aligned columns under their headings. Every row has as
// many cells as the header.
func (t *Text) Table(header []string, rows [][]string) {
	widths := make([]int, len(header))
	for _, row := range append([][]string{header}, rows...) {
		for i, cell := range row {
			widths[i] = max(widths[i], utf8.RuneCountInString(cell))
		}
	}
	for _, row := range append([][]string{header}, rows...) {
		var line strings.Builder
		for i, cell := range row {
			line.WriteString(strings.Repeat(" ", 2+widths[i]-utf8.RuneCountInString(cell)))
			line.WriteString(cell)
		}
		t.b.WriteString(strings.TrimRight(line.String(), " "))
		t.b.WriteByte('\n')
	}
}

// WriteTo writes the text.
func (t *Text) WriteTo(w io.Writer) (int64, error) {
	n, err := io.WriteString(w, Visible(t.b.String()))
	return int64(n), err
}

// Wrap breaks text at spaces into lines of at most width runes; a longer
// word, such as a file name, stays whole. There is always one line.
func Wrap(text string, width int) []string {
	var lines []string
	line, length := "", 0
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		switch {
		case length == 0:
			line, length = word, n
		case length+1+n <= width:
			line, length = line+" "+word, length+1+n
		default:
			lines = append(lines, line)
			line, length = word, n
		}
	}
	return append(lines, line)
}

package report

import (
	"strings"
	"unicode/utf8"
)

// Listing writes columns under their headings: the first, names, to the left,
// all others to the right. Names that leave no room for the rest lose their
// beginnings, since the ends of paths tell more.
func (t *Text) Listing(header []string, rows [][]string) {
	all := append([][]string{header}, rows...)
	widths := make([]int, len(header))
	for _, row := range all {
		for i, cell := range row {
			widths[i] = max(widths[i], utf8.RuneCountInString(cell))
		}
	}
	others := 2
	for _, w := range widths[1:] {
		others += 2 + w
	}
	widths[0] = max(8, min(widths[0], Width-others))
	for _, row := range all {
		var line strings.Builder
		name := shortened(row[0], widths[0])
		line.WriteString("  " + name + strings.Repeat(" ", widths[0]-utf8.RuneCountInString(name)))
		for i, cell := range row[1:] {
			line.WriteString(strings.Repeat(" ", 2+widths[i+1]-utf8.RuneCountInString(cell)))
			line.WriteString(cell)
		}
		t.b.WriteString(strings.TrimRight(line.String(), " "))
		t.b.WriteByte('\n')
	}
}

// shortened keeps the last runes of a text, after a sign that some are gone.
func shortened(text string, width int) string {
	runes := []rune(text)
	if len(runes) <= width {
		return text
	}
	return "…" + string(runes[len(runes)-width+1:])
}

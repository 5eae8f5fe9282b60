package report

import (
	"strconv"
	"strings"
	"unicode"
)

// Visible replaces control characters but for ends of lines by how they are
// spelt in quotes. Names of files and keys from elsewhere may have them, and
// they would steer the terminal that shows the text.
func Visible(text string) string {
	hidden := func(r rune) bool { return unicode.IsControl(r) && r != '\n' }
	if !strings.ContainsFunc(text, hidden) {
		return text
	}
	var b strings.Builder
	for _, r := range text {
		if hidden(r) {
			b.WriteString(strings.Trim(strconv.QuoteRune(r), "'"))
		} else {
			b.WriteRune(r)
		}
	}
	return b.String()
}

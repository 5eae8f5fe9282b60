package document

import (
	"cmp"
	"fmt"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Problem is one thing wrong with a document.
type Problem struct {
	File    string
	Line    int    // from 1; 0 if the whole file is meant
	Column  int    // in characters, from 1; 0 if unknown
	Key     string // dotted path, as in results[0].gap.rate; empty for the document
	Found   string // the value found; empty if the key is missing
	Allowed string // what may stand there instead
}

// String returns "file:line:column: key: found VALUE; allowed: …".
func (p Problem) String() string {
	var b strings.Builder
	b.WriteString(p.position())
	if p.Key != "" {
		b.WriteString(p.Key + ": ")
	}
	if p.Found == "" {
		b.WriteString("missing")
	} else {
		b.WriteString("found " + p.Found)
	}
	b.WriteString("; allowed: " + p.Allowed)
	return b.String()
}

func (p Problem) position() string {
	switch {
	case p.Line == 0:
		return p.File + ": "
	case p.Column == 0:
		return fmt.Sprintf("%s:%d: ", p.File, p.Line)
	}
	return fmt.Sprintf("%s:%d:%d: ", p.File, p.Line, p.Column)
}

// Problems are all problems of a document, as an error with one line for
// each.
type Problems []Problem

// maxShown bounds a message: nobody reads more, and a file of the wrong sort
// can have a problem on every line.
const maxShown = 50

// Error returns one line per problem, without a newline at the end.
func (p Problems) Error() string {
	lines := make([]string, 0, len(p))
	for i, problem := range p {
		if i == maxShown {
			lines = append(lines, fmt.Sprintf("%s: and %d more problems", problem.File, len(p)-maxShown))
			break
		}
		lines = append(lines, problem.String())
	}
	return strings.Join(lines, "\n")
}

func comparePositions(a, b Problem) int {
	return cmp.Or(cmp.Compare(a.Line, b.Line), cmp.Compare(a.Column, b.Column), cmp.Compare(a.Key, b.Key))
}

// maxQuoted is the length, in bytes, to which a value found is cut.
const maxQuoted = 60

// quote writes a text found in a file within quotes, cut to a length that
// fits a line.
func quote(text string) string {
	if len(text) <= maxQuoted {
		return strconv.Quote(text)
	}
	end := maxQuoted
	for end > 0 && !utf8.RuneStart(text[end]) {
		end--
	}
	return strconv.Quote(text[:end]) + "…"
}

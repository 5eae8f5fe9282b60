package document

import (
	"bytes"
	"regexp"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

var syntaxLine = regexp.MustCompile(`^line (\d+): `)

// syntaxProblem places an error of the YAML library, which knows the line at
// best: the column is that of the line's first character that is not blank.
func syntaxProblem(data []byte, err error) Problem {
	message := strings.TrimPrefix(err.Error(), "yaml: ")
	line := 1 // the library leaves out the number of the first line
	if m := syntaxLine.FindStringSubmatch(message); m != nil {
		line, _ = strconv.Atoi(m[1])
		message = message[len(m[0]):]
	}
	switch {
	case strings.HasPrefix(message, "did not find expected '") ||
		strings.HasPrefix(message, "did not find expected node") ||
		strings.HasPrefix(message, "did not find expected key") ||
		strings.HasPrefix(message, "did not find expected <"):
		// These come from its parser, which counts lines from 0.
		if syntaxLine.MatchString(strings.TrimPrefix(err.Error(), "yaml: ")) {
			line++
		}
	case strings.HasPrefix(message, "unknown anchor '"):
		alias, _, _ := strings.Cut(strings.TrimPrefix(message, "unknown anchor '"), "'")
		if i := bytes.Index(data, []byte("*"+alias)); i >= 0 {
			line = 1 + bytes.Count(data[:i], []byte("\n"))
		}
	case !utf8.Valid(data):
		rest := data
		for r, n := utf8.DecodeRune(rest); r != utf8.RuneError || n > 1; r, n = utf8.DecodeRune(rest) {
			rest = rest[n:]
		}
		line = 1 + bytes.Count(data[:len(data)-len(rest)], []byte("\n"))
		message = "bytes that are not UTF-8"
	case strings.HasPrefix(message, "control characters"):
		i := bytes.IndexFunc(data, func(r rune) bool { return unicode.IsControl(r) && !strings.ContainsRune("\t\n\r\u0085", r) })
		line = 1 + bytes.Count(data[:max(0, i)], []byte("\n"))
	}
	lines := bytes.Split(data, []byte("\n"))
	line = min(line, len(lines))
	text := lines[line-1]
	column := 1 + len(text) - len(bytes.TrimLeft(text, " \t"))
	return Problem{Line: line, Column: column, Found: "a syntax error (" + message + ")", Allowed: "YAML"}
}

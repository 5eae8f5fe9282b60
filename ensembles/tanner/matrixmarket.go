package tanner

import (
	"bufio"
	"io"
	"strconv"
	"strings"
)

// Label tells where a matrix comes from. It travels in the comments of a
// Matrix Market file, one line each, as "% title: text". Empty parts are left
// out; line breaks become spaces.
type Label struct {
	Title   string
	Profile string // digest of the profile
	Seed    string // seed of the construction
}

// parts pairs the keys of the comments with the fields of a label.
func (l *Label) parts() []labelPart {
	return []labelPart{{"title", &l.Title}, {"profile", &l.Profile}, {"seed", &l.Seed}}
}

type labelPart struct {
	key   string
	value *string
}

// WriteMatrix writes the parity-check matrix as a Matrix Market coordinate
// pattern, row by row: rows are check nodes and columns variable nodes, both
// counted from 1. It returns the first error of w.
func WriteMatrix(w io.Writer, g *Graph, label Label) error {
	b := bufio.NewWriterSize(w, 1<<16)
	b.WriteString(banner + "\n")
	for _, p := range label.parts() {
		if text := strings.Join(strings.Fields(*p.value), " "); text != "" {
			b.WriteString("% " + p.key + ": " + text + "\n")
		}
	}
	line := make([]byte, 0, 64)
	numbers := func(list ...int) {
		line = line[:0]
		for _, n := range list {
			line = append(strconv.AppendInt(line, int64(n), 10), ' ')
		}
		line[len(line)-1] = '\n'
		b.Write(line)
	}
	numbers(g.Checks(), g.Variables(), g.Edges())
	for c := range g.Checks() {
		for _, v := range g.VariablesOf(c) {
			numbers(c+1, int(v)+1)
		}
	}
	return b.Flush()
}

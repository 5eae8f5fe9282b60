package main

import (
	"bytes"
	"cmp"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"unicode"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/de/channel"
)

// channelReader finds channels by their names or reads them from files. It
// prints the warnings of the readers and keeps them for the answer.
type channelReader struct {
	cmd      *cobra.Command
	warnings []string
}

// find is a brief.Finder.
func (r *channelReader) find(name, degradation string) (channel.Family, error) {
	if !brief.IsFile(name) {
		return channel.ByName(name)
	}
	m, err := r.read(name)
	if err != nil {
		return nil, err
	}
	if cmp.Or(degradation, brief.DefaultDegradation) == brief.Flip {
		return channel.Degraded{Base: m}, nil
	}
	return channel.Erased{Base: m}, nil
}

// read reads measured LLRs, or a transition matrix with two inputs.
func (r *channelReader) read(path string) (channel.Measured, error) {
	content, name, err := readInput(r.cmd.Context(), path, r.cmd.InOrStdin())
	if err != nil {
		return channel.Measured{}, err
	}
	var (
		m        channel.Measured
		warnings []string
	)
	if holdsMatrix(content) {
		var c channel.DMC
		if c, warnings, err = channel.ReadDMC(name, bytes.NewReader(content)); err == nil {
			base := filepath.Base(name)
			if m, err = c.Measured(strings.TrimSuffix(base, filepath.Ext(base))); err != nil {
				err = usagef("%s: %w", name, err)
			}
		}
	} else {
		m, warnings, err = channel.ReadMeasured(name, bytes.NewReader(content))
	}
	if err != nil {
		return channel.Measured{}, invalid(err)
	}
	warn(r.cmd, warnings)
	r.warnings = append(r.warnings, warnings...)
	m.Title = channelWord(m.Title)
	return m, nil
}

var (
	matrixKind = regexp.MustCompile(`(?m)^kind:\s*["']?channel\b`)
	yamlKind   = regexp.MustCompile(`(?m)^kind:`)
)

// holdsMatrix tells a transition matrix from measured LLRs: a YAML file says
// its kind, and the first row of a CSV file with LLRs begins with their name.
func holdsMatrix(content []byte) bool {
	if yamlKind.Match(content) {
		return matrixKind.Match(content)
	}
	for line := range bytes.Lines(content) {
		first, _, _ := strings.Cut(string(line), ",")
		first = strings.Trim(strings.TrimPrefix(first, "\ufeff"), " \t\r\n\"")
		if first != "" && !strings.HasPrefix(first, "#") {
			return !strings.EqualFold(first, "llr")
		}
	}
	return false
}

// channelWord makes a word of a title, as channels have it in results of
// profiles, and no name of a built-in family.
func channelWord(title string) string {
	word := strings.Join(strings.FieldsFunc(title, func(r rune) bool { return unicode.IsSpace(r) || !unicode.IsPrint(r) }), "-")
	if word == "" || slices.Contains(channel.Names(), word) {
		return strings.TrimSuffix("measured-"+word, "-")
	}
	return word
}

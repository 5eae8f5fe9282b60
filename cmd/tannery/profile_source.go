package main

import (
	"cmp"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/catalog"
)

// loadProfile returns the profile that an argument stands for: a file,
// standard input for -, or a name of the catalogue. A file wins over a name.
func loadProfile(cmd *cobra.Command, argument string) (ensembles.Profile, []string, error) {
	if _, err := os.Stat(argument); errors.Is(err, fs.ErrNotExist) && isName(argument) {
		entry, ok := catalog.Lookup(argument)
		if !ok {
			return ensembles.Profile{}, nil, usagef("%s: neither a file nor a name of the catalogue%s; tannery catalog lists them", argument, nearestNames(argument))
		}
		return entryProfile(entry), nil, nil
	}
	content, name, err := readInput(cmd.Context(), argument, cmd.InOrStdin())
	if err != nil {
		return ensembles.Profile{}, nil, err
	}
	p, warnings, err := ensembles.DecodeProfile(name, content)
	return p, warnings, invalid(err)
}

// isName tells whether an argument can be a name of the catalogue: they have
// neither dots nor slashes, which files nearly always have.
func isName(argument string) bool {
	return argument != "" && argument != "-" && !strings.ContainsAny(argument, `./\`)
}

// profileName is how tables and pictures call a profile: the name in the
// catalogue, or the file without folder and ending.
func profileName(args []string) string {
	switch {
	case len(args) == 0:
		return "the profile given"
	case args[0] == "-":
		return "standard input"
	}
	base := filepath.Base(args[0])
	return strings.TrimSuffix(base, filepath.Ext(base))
}

// How many names are suggested, and how many letters they may differ by.
const (
	maxSuggested     = 4
	maxNameDistance  = 4
	leastTypedToList = 2
)

// nearestNames returns a phrase with the names of the catalogue that begin
// with the text or are nearest to it.
func nearestNames(text string) string {
	type candidate struct {
		name             string
		distance, shared int
	}
	var near []candidate
	for _, name := range catalog.Names() {
		distance := typos(text, name)
		if len(text) >= leastTypedToList && strings.HasPrefix(name, text) {
			distance = 0
		}
		if distance <= maxNameDistance && distance < len(text) {
			near = append(near, candidate{name, distance, sharedLetters(text, name)})
		}
	}
	if len(near) == 0 {
		return ""
	}
	slices.SortStableFunc(near, func(a, b candidate) int {
		return cmp.Or(a.distance-b.distance, b.shared-a.shared)
	})
	var names []string
	for _, c := range near[:min(len(near), maxSuggested)] {
		names = append(names, c.name)
	}
	return "; nearest: " + strings.Join(names, ", ")
}

// sharedLetters counts the letters at the beginning that both have.
func sharedLetters(a, b string) int {
	n := 0
	for n < min(len(a), len(b)) && a[n] == b[n] {
		n++
	}
	return n
}

// entryProfile makes a profile of an entry of the catalogue: its title is the
// source, its results are the published thresholds of belief propagation.
func entryProfile(entry catalog.Entry) ensembles.Profile {
	p := ensembles.Profile{Title: entryTitle(entry), Ensemble: entry.Ensemble, Realization: entry.Realization}
	for _, t := range entry.Thresholds {
		if t.Decoder != catalog.BeliefPropagation {
			continue
		}
		f, err := channel.ByName(t.Channel)
		if err != nil {
			continue
		}
		method := de.Method(t.Method)
		if method == "" {
			method = de.DefaultMethod(f)
		}
		result, err := resultOf(entry.Ensemble, f, de.Threshold{Method: method, Value: t.Value, Uncertainty: t.Resolution})
		if err == nil {
			p.Results = append(p.Results, result)
		}
	}
	return p
}

func entryTitle(entry catalog.Entry) string {
	variant := ""
	if entry.Variant != "" {
		variant = ", " + entry.Variant
	}
	return fmt.Sprintf("%s%s: %s (%s)", entry.Name, variant, entry.Source, entry.Trust)
}

// profileArguments completes profiles: names of the catalogue, and files.
func profileArguments(atMost int) func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
	return func(_ *cobra.Command, args []string, typed string) ([]string, cobra.ShellCompDirective) {
		if atMost > 0 && len(args) >= atMost {
			return nil, cobra.ShellCompDirectiveNoFileComp
		}
		var names []string
		for _, name := range catalog.Names() {
			if strings.HasPrefix(name, typed) {
				names = append(names, name)
			}
		}
		return names, cobra.ShellCompDirectiveDefault
	}
}

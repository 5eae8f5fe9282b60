package main

import (
	"fmt"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// searchOptions are the options of search. Those of the same meaning win
// over the brief.
type searchOptions struct {
	parameterOptions // of which search has --channel
	methodOption
	rate              numberOption
	maxVariableDegree integerOption
	variableDegrees   degreesOption
	checkDegrees      degreesOption
	maxIterations     integerOption
	maxEdgesPerBit    numberOption
	seed              seedOption
	time              durationOption
	workers           integerOption
	output            string
	noProgress        bool
}

func newSearchOptions() *searchOptions {
	return &searchOptions{
		rate:              numberOption{allow: document.Between(0, 1)},
		maxVariableDegree: integerOption{low: 2, high: ensembles.MaxDegree},
		variableDegrees:   degreesOption{low: 2},
		checkDegrees:      degreesOption{low: 2},
		maxIterations:     integerOption{low: 1, high: brief.MaxIterations},
		maxEdgesPerBit:    numberOption{allow: document.AtLeast(1)},
		workers:           integerOption{low: 1, high: brief.MaxWorkers},
	}
}

func (o *searchOptions) add(cmd *cobra.Command) {
	o.addChannel(cmd, "the channel: bec, bsc, biawgn, laplace or rayleigh")
	o.addMethod(cmd)
	f := cmd.Flags()
	f.Var(&o.rate, "rate", "code rate in information bits per code bit")
	f.Var(&o.maxVariableDegree, "max-variable-degree", "largest degree of a variable node")
	f.Var(&o.variableDegrees, "variable-degrees", "the degrees allowed at variable nodes, as `2,3,8`")
	f.Var(&o.checkDegrees, "check-degrees", "the degrees allowed at check nodes, as `7,8`")
	f.Var(&o.maxIterations, "max-iterations", "iterations that the decoder can do")
	f.Var(&o.maxEdgesPerBit, "max-edges-per-bit", "edges per code bit that the decoder can hold")
	f.Var(&o.seed, "seed", "seed of the search: the same seed finds the same profile")
	f.Var(&o.time, "time", "time to stop at with the best found, such as 60s")
	f.Var(&o.workers, "workers", "processors to use; all if not given")
	f.StringVarP(&o.output, "output", "o", "", "`FILE` for the profile, or - for standard output")
	f.BoolVar(&o.noProgress, "no-progress", false, "no progress on standard error")
}

// brief reads the brief, if there is one, and lets the options win over it.
func (o *searchOptions) brief(cmd *cobra.Command, args []string) (brief.Brief, error) {
	if err := exclusive(cmd, "max-variable-degree", "variable-degrees"); err != nil {
		return brief.Brief{}, err
	}
	draft := brief.New()
	if len(args) > 0 {
		content, name, err := readInput(cmd.Context(), args[0], cmd.InOrStdin())
		if err != nil {
			return brief.Brief{}, err
		}
		draft = brief.Decode(name, content, o.channel.value)
	} else {
		draft.Channel = o.channel.value
	}
	for option, take := range map[string]struct {
		key   string
		apply func()
	}{
		"method":              {"method", func() { draft.Method = o.method.value }},
		"rate":                {"rate", func() { draft.Rate, draft.Link = o.rate.value, nil }},
		"max-variable-degree": {"variable_degrees", func() { draft.VariableDegrees = brief.Degrees{Max: o.maxVariableDegree.value} }},
		"variable-degrees":    {"variable_degrees", func() { draft.VariableDegrees = brief.Degrees{Allowed: o.variableDegrees.degrees} }},
		"check-degrees":       {"check_degrees", func() { draft.CheckDegrees = brief.Degrees{Allowed: o.checkDegrees.degrees} }},
		"max-iterations":      {"limits.iterations", func() { draft.Iterations = o.maxIterations.value }},
		"max-edges-per-bit":   {"limits.edges_per_bit", func() { draft.EdgesPerBit = o.maxEdgesPerBit.value }},
		"seed":                {"search.seed", func() { draft.Seed = o.seed.value }},
		"time":                {"search.time", func() { draft.Time = o.time.value }},
		"workers":             {"search.workers", func() { draft.Workers = o.workers.value }},
	} {
		if cmd.Flags().Changed(option) {
			take.apply()
			draft.Overridden(take.key, "--"+option)
		}
	}
	b, err := draft.Finish()
	return b, invalid(err)
}

// asked returns the brief as it is written into the profile's provenance:
// what the file and the options came to, without how long and on how many
// processors it ran.
func asked(b brief.Brief) (document.Tree, error) {
	type degrees struct {
		Max     int   `yaml:"max,omitempty"`
		Allowed []int `yaml:"allowed,flow,omitempty"`
	}
	degreesOf := func(d brief.Degrees) *degrees {
		if d.Max == 0 && len(d.Allowed) == 0 {
			return nil
		}
		return &degrees{d.Max, d.Allowed}
	}
	type limits struct {
		Iterations  int     `yaml:"iterations,omitempty"`
		EdgesPerBit float64 `yaml:"edges_per_bit,omitempty"`
		DegreeTwo   string  `yaml:"degree_two,omitempty"`
	}
	out := struct {
		Kind            string             `yaml:"kind"`
		Version         int                `yaml:"version"`
		Title           string             `yaml:"title,omitempty"`
		Channel         string             `yaml:"channel"`
		Rate            float64            `yaml:"rate,omitempty"`
		Link            map[string]float64 `yaml:"link,omitempty"`
		Method          string             `yaml:"method,omitempty"`
		VariableDegrees *degrees           `yaml:"variable_degrees,omitempty"`
		CheckDegrees    *degrees           `yaml:"check_degrees,omitempty"`
		Limits          *limits            `yaml:"limits,omitempty"`
		Search          map[string]uint64  `yaml:"search,omitempty"`
	}{
		Kind: "brief", Version: 1, Title: b.Title, Channel: b.Channel, Rate: b.Rate, Method: b.Method,
		VariableDegrees: degreesOf(b.VariableDegrees),
		CheckDegrees:    degreesOf(b.CheckDegrees),
		Search:          map[string]uint64{"seed": b.Seed},
	}
	if l := (limits{b.Iterations, b.EdgesPerBit, b.DegreeTwo}); l != (limits{}) {
		out.Limits = &l
	}
	if b.Link != nil {
		family, err := channel.ByName(b.Channel)
		if err != nil {
			return document.Tree{}, err
		}
		out.Rate = 0
		out.Link = map[string]float64{
			"source_rate":        b.Link.SourceRate,
			"source_probability": b.Link.SourceProbability,
			"symbol_rate":        b.Link.SymbolRate,
			family.Parameter():   b.Link.Parameter,
		}
	}
	return document.TreeOf(out)
}

// linkMargin tells whether a threshold is enough for the link of the brief,
// if it has one: an error says what is missing.
func linkMargin(b brief.Brief, f channel.Family, threshold float64) error {
	if b.Link == nil || threshold >= b.Link.Parameter {
		return nil
	}
	return unreachedError{fmt.Errorf("the brief is not reached: the link's %s = %.6g needs a threshold of at least that, the best found has %.6g; allowed: larger degrees, a lower rate or a better channel",
		f.Symbol(), b.Link.Parameter, threshold)}
}

package main

import (
	"fmt"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// searchOptions are the options of search. Those of the same meaning win
// over the brief.
type searchOptions struct {
	channels    channelsOption
	degradation nameOption
	reader      channelReader
	methodOption
	rate              numberOption
	maxVariableDegree integerOption
	variableDegrees   degreesOption
	checkDegrees      degreesOption
	maxIterations     integerOption
	targetError       numberOption
	maxEdgesPerBit    numberOption
	maxDistinct       integerOption
	stabilityMargin   numberOption
	degreeTwo         nameOption
	seed              seedOption
	time              durationOption
	evaluations       integerOption
	workers           integerOption
	output            string
	checkpoint        string
	noProgress        bool
	renamed           map[string]string // options that stand for those of search, for messages
}

func newSearchOptions() *searchOptions {
	return &searchOptions{
		rate:              numberOption{allow: document.Between(0, 1)},
		maxVariableDegree: integerOption{low: 2, high: ensembles.MaxDegree},
		variableDegrees:   degreesOption{low: 2},
		checkDegrees:      degreesOption{low: 2},
		maxIterations:     integerOption{low: 1, high: brief.MaxIterations},
		targetError:       numberOption{allow: brief.TargetErrors},
		maxEdgesPerBit:    numberOption{allow: document.AtLeast(1)},
		maxDistinct:       integerOption{low: 1, high: brief.MaxDistinctDegrees},
		stabilityMargin:   numberOption{allow: brief.StabilityMargins},
		degreeTwo:         nameOption{names: brief.DegreeTwoRules},
		evaluations:       integerOption{low: 1, high: brief.MaxEvaluations},
		workers:           integerOption{low: 1, high: brief.MaxWorkers},
	}
}

func (o *searchOptions) add(cmd *cobra.Command) {
	o.reader.cmd = cmd
	f := cmd.Flags()
	f.Var(&o.channels, "channel", "the channel: bec, bsc, biawgn, laplace, rayleigh, or a file; several with commas between them, of which the worst gap counts")
	completeChannel(cmd)
	addDegradation(cmd, &o.degradation)
	o.addMethod(cmd)
	f.Var(&o.rate, "rate", "code rate in information bits per code bit")
	f.Var(&o.maxVariableDegree, "max-variable-degree", "largest degree of a variable node")
	f.Var(&o.variableDegrees, "variable-degrees", "the degrees allowed at variable nodes, as `2,3,8`")
	f.Var(&o.checkDegrees, "check-degrees", "the degrees allowed at check nodes, as `7,8`")
	f.Var(&o.maxIterations, "max-iterations", "iterations that the decoder can do")
	f.Var(&o.targetError, "target-error", "bit error rate to reach in them; 1e-6 if not given")
	f.Var(&o.maxEdgesPerBit, "max-edges-per-bit", "edges per code bit that the decoder can hold")
	f.Var(&o.maxDistinct, "max-distinct-degrees", "different variable degrees that the decoder can hold")
	f.Var(&o.stabilityMargin, "stability-margin", "least relative distance from instability at the threshold, such as 0.02")
	f.Var(&o.degreeTwo, "degree-two", "parity: no more variable nodes of degree 2 than a chain of parity bits has; free: as many as stability allows")
	complete(cmd, "degree-two", o.degreeTwo.names)
	f.Var(&o.seed, "seed", "seed of the search: the same seed finds the same profile")
	f.Var(&o.time, "time", "time to stop at with the best found, such as 60s")
	f.Var(&o.evaluations, "evaluations", "evaluations to stop after with the best found")
	f.Var(&o.workers, "workers", "processors to use; all if not given")
	f.StringVarP(&o.output, "output", "o", "", "`FILE` for the profile, or - for standard output")
	f.StringVar(&o.checkpoint, "checkpoint", "", "`FILE` for the state of the search, to continue after an interruption; that of -o with .checkpoint behind it if not given")
	f.BoolVar(&o.noProgress, "no-progress", false, "no progress on standard error")
}

// brief reads the brief, if there is one, and lets the options win over it.
func (o *searchOptions) brief(cmd *cobra.Command, args []string) (brief.Brief, error) {
	if err := exclusive(cmd, "max-variable-degree", "variable-degrees"); err != nil {
		return brief.Brief{}, err
	}
	given := brief.Channels{Names: o.channels.values, Degradation: o.degradation.value, Find: o.reader.find, Renamed: o.renamed}
	var draft *brief.Draft
	if len(args) > 0 {
		content, name, err := readInput(cmd.Context(), args[0], cmd.InOrStdin())
		if err != nil {
			return brief.Brief{}, err
		}
		draft = brief.Decode(name, content, given)
	} else {
		draft = brief.New(given)
	}
	for option, take := range map[string]struct {
		key   string
		apply func()
	}{
		"method":               {"method", func() { draft.Method = o.method.value }},
		"rate":                 {"rate", func() { draft.Rate, draft.Link = o.rate.value, nil }},
		"max-variable-degree":  {"variable_degrees", func() { draft.VariableDegrees = brief.Degrees{Max: o.maxVariableDegree.value} }},
		"variable-degrees":     {"variable_degrees", func() { draft.VariableDegrees = brief.Degrees{Allowed: o.variableDegrees.degrees} }},
		"check-degrees":        {"check_degrees", func() { draft.CheckDegrees = brief.Degrees{Allowed: o.checkDegrees.degrees} }},
		"max-iterations":       {"limits.iterations", func() { draft.Iterations = o.maxIterations.value }},
		"max-edges-per-bit":    {"limits.edges_per_bit", func() { draft.EdgesPerBit = o.maxEdgesPerBit.value }},
		"target-error":         {"limits.target_error", func() { draft.TargetError = o.targetError.value }},
		"max-distinct-degrees": {"limits.distinct_degrees", func() { draft.DistinctDegrees = o.maxDistinct.value }},
		"stability-margin":     {"limits.stability_margin", func() { draft.StabilityMargin = o.stabilityMargin.value }},
		"degree-two":           {"limits.degree_two", func() { draft.DegreeTwo = o.degreeTwo.value }},
		"evaluations":          {"search.evaluations", func() { draft.Evaluations = o.evaluations.value }},
		"seed":                 {"search.seed", func() { draft.Seed = o.seed.value }},
		"time":                 {"search.time", func() { draft.Time = o.time.value }},
		"workers":              {"search.workers", func() { draft.Workers = o.workers.value }},
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
		Iterations      int     `yaml:"iterations,omitempty"`
		TargetError     float64 `yaml:"target_error,omitempty"`
		EdgesPerBit     float64 `yaml:"edges_per_bit,omitempty"`
		DegreeTwo       string  `yaml:"degree_two,omitempty"`
		DistinctDegrees int     `yaml:"distinct_degrees,omitempty"`
		StabilityMargin float64 `yaml:"stability_margin,omitempty"`
	}
	out := struct {
		Kind            string             `yaml:"kind"`
		Version         int                `yaml:"version"`
		Title           string             `yaml:"title,omitempty"`
		Channel         any                `yaml:"channel"` // one, or a list
		Degradation     string             `yaml:"degradation,omitempty"`
		Rate            float64            `yaml:"rate,omitempty"`
		Link            map[string]float64 `yaml:"link,omitempty"`
		Method          string             `yaml:"method,omitempty"`
		VariableDegrees *degrees           `yaml:"variable_degrees,omitempty"`
		CheckDegrees    *degrees           `yaml:"check_degrees,omitempty"`
		Limits          *limits            `yaml:"limits,omitempty"`
		Search          map[string]uint64  `yaml:"search,omitempty"`
	}{
		Kind: "brief", Version: 1, Title: b.Title, Channel: b.Channel, Degradation: b.Degradation, Rate: b.Rate, Method: b.Method,
		VariableDegrees: degreesOf(b.VariableDegrees),
		CheckDegrees:    degreesOf(b.CheckDegrees),
		Search:          map[string]uint64{"seed": b.Seed},
	}
	if len(b.Also) > 0 {
		out.Channel = append([]string{b.Channel}, b.Also...)
	}
	if l := (limits{b.Iterations, b.TargetError, b.EdgesPerBit, b.DegreeTwo, b.DistinctDegrees, b.StabilityMargin}); l != (limits{}) {
		out.Limits = &l
	}
	if b.Link != nil {
		out.Rate = 0
		out.Link = map[string]float64{
			"source_rate":             b.Link.SourceRate,
			"source_probability":      b.Link.SourceProbability,
			"symbol_rate":             b.Link.SymbolRate,
			b.Families[0].Parameter(): b.Link.Parameter,
		}
	}
	return document.TreeOf(out)
}

// linkMargin tells whether a threshold is enough for the link of the brief,
// if it has one: an error says what is missing.
func linkMargin(b brief.Brief, threshold float64) error {
	if b.Link == nil || threshold >= b.Link.Parameter {
		return nil
	}
	return unreachedError{fmt.Errorf("the brief is not reached: the link's %s = %.6g needs a threshold of at least that, the best found has %.6g; allowed: larger degrees, a lower rate or a better channel",
		b.Families[0].Symbol(), b.Link.Parameter, threshold)}
}

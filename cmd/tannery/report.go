package main

import (
	"bytes"
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/catalog"
	"tannery/ensembles/document"
)

// reportDistance is where the iterations of the table of neighbours are
// counted, as compare does unless told otherwise.
const reportDistance = 0.05

type reportOptions struct {
	parameterOptions
	profileOptions
	methodOption
	lengths     lengthsOption
	frameError  numberOption
	simulations []string
	neighbours  integerOption
	output      string
}

func newReport() *cobra.Command {
	o := &reportOptions{
		frameError: numberOption{allow: document.Between(0, 1), value: 1e-4},
		neighbours: integerOption{low: 0, high: 100, value: 6},
	}
	cmd := &cobra.Command{
		Use:   "report PROFILE [options]",
		Short: "one HTML file about a profile, to hand round",
		Example: `# how good is it, and why? everything on one page
tannery report harbour.yaml -o harbour.html
# of a published ensemble, with node counts at two lengths
tannery report rsu01-r50-d4 --method gaussian --length 2048 --length 16384 \
    -o rsu.html
# with the tunnel at the noise of the link
tannery report harbour.yaml --method gaussian --es-n0 0.6 -o link.html`,
		Long: `The file needs nothing else: no network, no scripts, pictures within. It
prints on A4 and follows the reader's choice of light or dark.

It has the question (the brief that the profile was searched for, from its
provenance), the answer in one sentence, the evidence (the decoding tunnel, the
evolution, ensembles of the catalogue at the same rate), exact node counts at
each --length, measured error rates if a --simulation is given, and the
provenance with the command that makes the report again.

The tunnel is shown 1 % below the threshold, or at the channel parameter given.
Without -o the page goes to standard output.`,
		Args:              atMost(1, "one profile"),
		ValidArgsFunction: profileArguments(1),
		RunE:              func(cmd *cobra.Command, args []string) error { return runReport(cmd, args, o) },
	}
	o.addChannel(cmd, "the channel; by default the one that the profile's results name")
	o.addParameter(cmd)
	o.addMethod(cmd)
	o.add(cmd)
	cmd.Flags().Var(&o.lengths, "length", "code bits to give node counts for; may be given several times")
	cmd.Flags().Var(&o.frameError, "frame-error", "frame error rate for the limit at those lengths; 1e-4 if not given")
	cmd.Flags().StringArrayVar(&o.simulations, "simulation", nil, "`FILE` with measured error rates, the JSON of simulate; may be given several times")
	cmd.Flags().Var(&o.neighbours, "neighbours", "ensembles of the catalogue to compare with, 0 for none; 6 if not given")
	cmd.Flags().StringVarP(&o.output, "output", "o", "", "`FILE` for the page, or - for standard output")
	return cmd
}

func runReport(cmd *cobra.Command, args []string, o *reportOptions) error {
	if err := o.checkParameter(cmd); err != nil {
		return err
	}
	p, warnings, err := o.read(cmd, args)
	if err != nil {
		return err
	}
	warn(cmd, warnings)
	f, err := o.familyOf(p)
	if err != nil {
		return err
	}
	engine, err := o.engine(f)
	if err != nil {
		return err
	}
	var at *float64
	if o.given() {
		value, err := o.value(f, p.Ensemble.DesignRate())
		if err != nil {
			return err
		}
		at = &value
	}
	simulations, err := o.readSimulations(cmd)
	if err != nil {
		return err
	}
	var file *outputFile
	if o.output != "-" && cmd.Flags().Changed("output") {
		if file, err = openOutput("--output", o.output); err != nil {
			return err
		}
	}
	page, err := o.page(cmd.Context(), profileName(args), p, meter{f, engine}, at)
	if err != nil {
		return err
	}
	page.Simulations = simulations
	var threshold *float64
	if page.Threshold.Gap != nil {
		threshold = &page.Threshold.Threshold
	}
	for i, s := range simulations {
		if threshold != nil && s.Channel == f.Name() && engine.Method() == de.DefaultMethod(f) {
			if note := otherProfile(s, *threshold); note != "" {
				page.Simulations[i].Note = note
				warn(cmd, []string{o.simulations[i] + ": " + note})
			}
		}
		page.Marks = append(page.Marks, simulationMarks(s, f, threshold, o.frameError.value))
	}
	page.Provenance.Command = o.again(cmd, args, f, engine)
	if file == nil && asJSON(cmd) {
		return deliver(cmd, page)
	}
	var html bytes.Buffer
	if err := page.WriteHTML(&html); err != nil {
		return err
	}
	if file == nil {
		_, err := cmd.OutOrStdout().Write(html.Bytes())
		return err
	}
	if err := file.write(html.Bytes()); err != nil {
		return err
	}
	page.File = o.output
	return deliver(cmd, page)
}

// page measures everything that the page shows.
func (o *reportOptions) page(ctx context.Context, name string, p ensembles.Profile, m meter, at *float64) (*report.Page, error) {
	threshold, err := m.engine.Threshold(ctx, p.Ensemble, m.family)
	if err != nil {
		return nil, methodError(err)
	}
	page := &report.Page{
		Schema: "tannery/report/1", Name: name, Profile: p, Ensemble: p.Ensemble,
		Threshold: thresholdAnswer(p, m.family, threshold), Trace: tunnelAt(ctx, p.Ensemble, m.family, threshold, at),
		Realizations: []report.Sheet{}, Provenance: provenanceOf(p),
	}
	if page.Trace != nil {
		page.Trace.Name = name
	}
	page.Answer = report.AnswerOf(name, page.Threshold)
	page.Provenance.Settings = o.settings(m, page.Trace)
	if page.Brief, err = briefLines(p.Provenance.Brief); err != nil {
		return nil, err
	}
	if page.Neighbours, err = o.compareNeighbours(ctx, name, p, m); err != nil {
		return nil, err
	}
	for _, length := range o.lengths.lengths {
		sheet, err := o.sheet(ctx, p, m, length)
		if err != nil {
			return nil, err
		}
		page.Realizations = append(page.Realizations, sheet)
	}
	if len(o.lengths.lengths) == 0 && p.Realization != nil {
		sheet, err := o.measured(ctx, *p.Realization, m)
		if err != nil {
			return nil, err
		}
		page.Realizations = append(page.Realizations, sheet)
	}
	return page, context.Cause(ctx)
}

// sheet chooses node counts at a length.
func (o *reportOptions) sheet(ctx context.Context, p ensembles.Profile, m meter, length int) (report.Sheet, error) {
	r, err := ensembles.Realize(p.Ensemble, length, score(ctx, []meter{m}))
	if err != nil {
		return report.Sheet{}, usagef("--length: %w", err)
	}
	return o.measured(ctx, r, m)
}

func (o *reportOptions) measured(ctx context.Context, r ensembles.Realization, m meter) (report.Sheet, error) {
	sheet := report.SheetOf(r)
	sheet.FrameError = o.frameError.value
	result, err := m.measure(ctx, r.Ensemble())
	if err != nil {
		if ctx.Err() != nil {
			return sheet, err
		}
		return sheet, nil // a rate without a limit: the counts stand for themselves
	}
	sheet.Result, sheet.Threshold = &result, &result.Threshold
	sheet.FiniteLimit = finiteLimit(m.family, r.DesignRate(), r.Length, o.frameError.value)
	return sheet, nil
}

// finiteLimit is the worst parameter that any code of the length stands; nil
// where the normal approximation does not say.
func finiteLimit(f channel.Family, rate float64, length int, frameError float64) *float64 {
	dispersed, ok := f.(channel.Dispersed)
	if !ok {
		return nil
	}
	value, err := channel.ParameterAtLength(dispersed, rate, length, frameError)
	if err != nil {
		return nil
	}
	return &value
}

// compareNeighbours sets the profile beside the ensembles of the catalogue at
// its rate, made for its channel or for any, whose largest degrees are nearest
// to its own.
func (o *reportOptions) compareNeighbours(ctx context.Context, name string, p ensembles.Profile, m meter) (*report.Compare, error) {
	near := slices.DeleteFunc(catalog.AtRate(p.Ensemble.DesignRate()), func(e catalog.Entry) bool {
		return e.Name == name || e.Ensemble.Lambda.Min() < 2 || !madeFor(e, m.family)
	})
	distance := func(e catalog.Entry) float64 {
		return math.Abs(math.Log(float64(e.Ensemble.Lambda.Max()) / float64(p.Ensemble.Lambda.Max())))
	}
	slices.SortStableFunc(near, func(a, b catalog.Entry) int { return cmp.Compare(distance(a), distance(b)) })
	near = near[:min(len(near), o.neighbours.value)]
	if len(near) == 0 {
		return nil, nil
	}
	jobs := []comparison{{name, p, m.family, m.engine}}
	for _, e := range near {
		jobs = append(jobs, comparison{e.Name, entryProfile(e), m.family, m.engine})
	}
	rows, err := measureAll(ctx, jobs, reportDistance, 0)
	if err != nil {
		return nil, err
	}
	rows[0].Own = true
	slices.SortStableFunc(rows, orders["gap"])
	return &report.Compare{Schema: "tannery/compare/1", Distance: reportDistance, TargetError: compareTarget, Sort: "gap", Rows: rows}, nil
}

// madeFor tells whether an ensemble was made for a channel: it has a published
// threshold on it, or is a standard's. For channels that nothing was published
// for, what was made for the Gaussian channel is nearest.
func madeFor(e catalog.Entry, f channel.Family) bool {
	name := f.Name()
	if name == (channel.Laplace{}).Name() || name == (channel.Rayleigh{}).Name() {
		name = channel.BIAWGN{}.Name()
	}
	return e.Realization != nil || slices.ContainsFunc(e.Thresholds, func(t catalog.Threshold) bool { return t.Channel == name })
}

// provenanceOf tells how the profile and the report came about.
func provenanceOf(p ensembles.Profile) report.PageProvenance {
	v := report.PageProvenance{
		Program:        program,
		Created:        now().Format("2006-01-02 15:04:05 MST"),
		ProfileProgram: p.Provenance.Program,
		Seed:           p.Provenance.Seed,
	}
	if !p.Provenance.Created.IsZero() {
		v.ProfileCreated = p.Provenance.Created.Format(time.RFC3339)
	}
	return v
}

// settings are what the figures of the page depend on beside the profile.
func (o *reportOptions) settings(m meter, trace *report.Trace) []report.Asked {
	settings := []report.Asked{
		{Key: "channel and method", Value: m.family.Name() + ", " + string(m.engine.Method())},
		{Key: "frame error rate", Value: report.Plain(o.frameError.value) + ", for the limit at a length"},
		{Key: "iterations", Value: fmt.Sprintf("to bit error probability %s, %s %% below a threshold", report.Plain(compareTarget), report.Plain(100*reportDistance))},
	}
	if trace != nil {
		settings = append(settings, report.Asked{Key: "evolution shown at", Value: fmt.Sprintf("%s = %v, %d iterations at most", trace.Symbol, trace.Value, shownIterations)})
	}
	return settings
}

// again is the command line that makes the report again, whatever the
// profile's results or the defaults may be then.
func (o *reportOptions) again(cmd *cobra.Command, args []string, f channel.Family, engine de.Engine) string {
	words := []string{"tannery", "report"}
	words = append(words, args...)
	add := func(option, value string) { words = append(words, "--"+option, value) }
	if len(args) == 0 {
		add("lambda", o.lambda.distribution.String())
		add("rho", o.rho.distribution.String())
	}
	add("channel", cmp.Or(o.channel.value, f.Name()))
	add("method", string(engine.Method()))
	for _, option := range []string{"degradation", "parameter", "eb-n0", "es-n0"} {
		if flag := cmd.Flags().Lookup(option); flag != nil && flag.Changed {
			add(option, flag.Value.String())
		}
	}
	for _, n := range o.lengths.lengths {
		add("length", strconv.Itoa(n))
	}
	add("frame-error", report.Plain(o.frameError.value))
	add("neighbours", strconv.Itoa(o.neighbours.value))
	for _, s := range o.simulations {
		add("simulation", s)
	}
	if o.output != "" {
		add("output", o.output)
	}
	for i, w := range words {
		words[i] = quoted(w)
	}
	return strings.Join(words, " ")
}

// quoted protects a word from a POSIX shell.
func quoted(word string) string {
	safe := func(r rune) bool {
		return r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' || strings.ContainsRune("-_./:,+=@", r)
	}
	if word != "" && strings.IndexFunc(word, func(r rune) bool { return !safe(r) }) < 0 {
		return word
	}
	return "'" + strings.ReplaceAll(word, "'", `'\''`) + "'"
}

// lengthsOption is a code length that may be given several times.
type lengthsOption struct{ lengths []int }

// Set adds a length.
func (o *lengthsOption) Set(text string) error {
	one := integerOption{low: 2, high: ensembles.MaxLength}
	if err := one.Set(text); err != nil {
		return err
	}
	if slices.Contains(o.lengths, one.value) {
		return fmt.Errorf("each length once")
	}
	o.lengths = append(o.lengths, one.value)
	return nil
}

// Type names the value in help texts.
func (o *lengthsOption) Type() string { return "N" }

// String returns the default, which is none.
func (o *lengthsOption) String() string { return "" }

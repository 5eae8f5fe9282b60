package main

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"time"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/optimize"
)

// defaultMaxDegree is the largest variable degree if nothing is said about
// degrees: most of the way to the limit at a moderate cost in hardware.
const defaultMaxDegree = 15

func newSearch() *cobra.Command {
	o := newSearchOptions()
	cmd := &cobra.Command{
		Use:   "search [BRIEF] [options]",
		Short: "the best profile for a brief, and the report of its gap",
		Example: `# the best profile of rate 1/2 with degrees up to 15 on the Gaussian channel
tannery search --channel biawgn --rate 0.5 --max-variable-degree 15
# on the erasure channel, proven best for its check degrees, into a file
tannery search --channel bec --rate 0.5 --max-variable-degree 20 -o best.yaml
# what a brief asks for, but with fewer edges
tannery search harbour.yaml --max-edges-per-bit 3.8 -o link.yaml
# the degrees that the hardware has
tannery search --channel biawgn --rate 0.5 --variable-degrees 2,3,4,8 \
    --check-degrees 6,7
# straight on to node counts
tannery search harbour.yaml -o - | tannery export - --length 16384`,
		Long: `A brief is a YAML file (tannery schema brief); options win over it, and without
a brief they must say at least --channel and --rate. Given a check degree
distribution a linear programme finds the best variable degrees; the search goes
over the check degrees. The design rate comes out exactly as asked.

The report goes to standard output, and the profile to the file of -o. With -o -
the profile goes to standard output and the report to standard error. A search
that is interrupted or out of --time writes the best found. If a link of the
brief cannot be served by the best found, it is written and the exit code is 3.

Covered so far: exact on bec and gaussian on biawgn.`,
		Args:              atMost(1, "one brief"),
		ValidArgsFunction: profileFiles,
		RunE:              func(cmd *cobra.Command, args []string) error { return runSearch(cmd, args, o) },
	}
	o.add(cmd)
	return cmd
}

func runSearch(cmd *cobra.Command, args []string, o *searchOptions) error {
	b, err := o.brief(cmd, args)
	if err != nil {
		return err
	}
	family, err := channel.ByName(b.Channel)
	if err != nil {
		return invalid(err)
	}
	method, err := searchMethod(b, family)
	if err != nil {
		return err
	}
	out, err := openProfileOutput(cmd, o.output)
	if err != nil {
		return err
	}
	start := time.Now()
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd))
	defer context.AfterFunc(cmd.Context(), shown.ending)()
	result, err := optimize.Search(cmd.Context(), problemOf(b, family), optimize.Settings{
		Method:   method,
		Seed:     b.Seed,
		Time:     b.Time,
		Workers:  workers(b),
		Recorder: &searchProgress{shown, family},
	})
	shown.finish()
	if err != nil {
		return searchError(cmd.Context(), err)
	}
	p, err := foundProfile(b, family, result)
	if err != nil {
		return err
	}
	answer := searchAnswer(b, family, p, result)
	answer.Seconds = time.Since(start).Seconds()
	answer.File = o.output
	answer.Tunnel = tunnelAt(cmd.Context(), result.Ensemble, family, result.Threshold, nil)
	answer.Draw = atTerminal(cmd)
	if err := out.deliver(p, answer); err != nil {
		return err
	}
	if result.Status == optimize.Interrupted {
		return context.Cause(cmd.Context())
	}
	return linkMargin(b, family, result.Threshold.Value)
}

// searchMethod returns the way to search that fits the channel and the method
// of analysis asked for.
func searchMethod(b brief.Brief, f channel.Family) (optimize.Method, error) {
	covered := []struct {
		channel string
		method  de.Method
		search  optimize.Method
	}{
		{channel.BEC{}.Name(), de.Exact, optimize.BECDesign{}},
		{channel.BIAWGN{}.Name(), de.Gaussian, optimize.GaussianDesign{}},
	}
	for _, c := range covered {
		if c.channel == f.Name() && (b.Method == "" || b.Method == string(c.method)) {
			return c.search, nil
		}
	}
	method := b.Method
	if method == "" {
		method = "any method"
	}
	return nil, usagef("search on channel %s by %s: not covered; allowed: exact on bec, gaussian on biawgn", f.Name(), method)
}

// problemOf turns the brief into the problem of the search.
func problemOf(b brief.Brief, f channel.Family) optimize.Problem {
	p := optimize.Problem{
		Channel:         f,
		Rate:            b.Rate,
		VariableDegrees: b.VariableDegrees.Allowed,
		CheckDegrees:    b.CheckDegrees.Allowed,
		Limits: optimize.Limits{
			EdgesPerBit:     b.EdgesPerBit,
			DegreeTwoParity: b.DegreeTwo == "parity",
			Iterations:      b.Iterations,
		},
	}
	if p.VariableDegrees == nil {
		largest := b.VariableDegrees.Max
		if largest == 0 {
			largest = defaultMaxDegree
		}
		p.VariableDegrees = optimize.DegreesUpTo(largest)
	}
	if b.CheckDegrees.Max > 0 {
		p.CheckDegrees = optimize.DegreesUpTo(b.CheckDegrees.Max)
	}
	return p
}

func workers(b brief.Brief) int {
	if b.Workers > 0 {
		return b.Workers
	}
	return runtime.GOMAXPROCS(0)
}

// searchError sorts the ways in which a search ends without any profile.
func searchError(ctx context.Context, err error) error {
	switch {
	case ctx.Err() != nil:
		return fmt.Errorf("%w before anything was found; nothing is written", context.Cause(ctx))
	case errors.Is(err, context.DeadlineExceeded):
		return unreachedError{errors.New("--time: too short, nothing was found in it; nothing is written")}
	case errors.Is(err, optimize.ErrUnsupported):
		return invalid(err)
	case errors.Is(err, optimize.ErrUnreachable):
		return unreachedError{fmt.Errorf("the brief cannot be reached: %w", err)}
	}
	return err
}

// searchProgress passes what the search records on to the screen.
type searchProgress struct {
	screen *progress
	family channel.Family
}

var _ optimize.Recorder = (*searchProgress)(nil)

// Progress implements optimize.Recorder.
func (s *searchProgress) Progress(p optimize.Progress) {
	best := ""
	if p.Threshold > 0 {
		best = fmt.Sprintf("best gap %s in %s", report.Significant(p.Gap, 3), s.family.Symbol())
		if db := decibels(s.family, p.Threshold, p.Threshold+p.Gap); db != nil {
			best = fmt.Sprintf("best gap %.4f dB", *db)
		}
	}
	s.screen.update(p.Phase, p.Fraction, best)
}

// Improved implements optimize.Recorder.
func (s *searchProgress) Improved(optimize.Improvement) {}

// foundProfile makes a profile of the result, with its provenance.
func foundProfile(b brief.Brief, f channel.Family, r optimize.Result) (ensembles.Profile, error) {
	result, err := resultOf(r.Ensemble, f, r.Threshold)
	if err != nil {
		return ensembles.Profile{}, err
	}
	tree, err := asked(b)
	if err != nil {
		return ensembles.Profile{}, err
	}
	return ensembles.Profile{
		Title:    b.Title,
		Ensemble: r.Ensemble,
		Results:  []ensembles.Result{result},
		Provenance: ensembles.Provenance{
			Program: program,
			Seed:    &b.Seed,
			Created: now(),
			Brief:   tree,
		},
	}, nil
}

func searchAnswer(b brief.Brief, f channel.Family, p ensembles.Profile, r optimize.Result) *report.Search {
	answer := &report.Search{
		Schema:      "tannery/search/1",
		Profile:     p,
		Status:      r.Status.String(),
		Evaluations: r.Stats.Evaluations,
		Programmes:  r.Stats.Programmes,
		EdgesPerBit: r.Ensemble.EdgesPerBit(),
		Binding:     append([]string{}, r.Binding...),
		Threshold:   thresholdAnswer(p, f, r.Threshold),
	}
	if f.Name() == (channel.BEC{}).Name() {
		mean := r.Ensemble.MeanCheckDegree()
		answer.DegreeBound = &report.DegreeBound{MeanCheckDegree: mean, Threshold: optimize.MeanDegreeBound(mean, r.Ensemble.DesignRate())}
	}
	if c := r.Certificate; c != nil && c.Verify() == nil {
		answer.Certificate = &report.Certificate{Bound: c.Bound, Above: c.Bound - r.Threshold.Value}
	}
	if b.Link != nil {
		answer.Link = &report.LinkMargin{
			Parameter: b.Link.Parameter,
			Reached:   r.Threshold.Value >= b.Link.Parameter,
			Margin:    r.Threshold.Value - b.Link.Parameter,
			MarginDB:  decibels(f, b.Link.Parameter, r.Threshold.Value),
		}
	}
	return answer
}

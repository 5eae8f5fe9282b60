package main

import (
	"cmp"
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
# three different degrees, 20 iterations, and two channels to work on
tannery search --channel biawgn,bsc --rate 0.5 --max-variable-degree 8 \
    --max-distinct-degrees 3 --max-iterations 20 -o small.yaml
# straight on to node counts
tannery search harbour.yaml -o - | tannery export - --length 16384`,
		Long: `A brief is a YAML file (tannery schema brief); options win over it, and without
a brief they must say at least --channel and --rate. The design rate comes out
exactly as asked.

By --method quantized (every channel; the default but on bec) profiles are
judged by density evolution and improved by linear programmes over variable
degrees, check degrees and the channel parameter together. On bec the method
exact proves its variable degrees best for their check degrees. On biawgn the
method gaussian takes a second or two, and is as far from the truth as the
Gaussian approximation. Limits on iterations, and several channels at once,
need quantized.

The report goes to standard output, and the profile to the file of -o. With -o -
the profile goes to standard output and the report to standard error. A search
that is interrupted or out of --time or --evaluations writes the best found,
whose last measurement takes some seconds more. If a link of the brief cannot be
served by the best found, it is written and the exit code is 3.

With -o FILE, a search by quantized keeps its state in FILE.checkpoint (or in
the file of --checkpoint): the same command continues there after an
interruption, even after a crash, and ends in the same profile to the bit.
A checkpoint of another brief, seed or version is refused. It is removed once
the search has settled and the profile is written.

` + channelFileHelp,
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
	method, err := searchMethod(b)
	if err != nil {
		return err
	}
	out, err := openProductOutput(cmd, o.output)
	if err != nil {
		return err
	}
	kept, state, err := o.openCheckpoint(cmd, b, method, out)
	if err != nil {
		return err
	}
	done := false
	defer func() {
		if failed := kept.close(done); failed != nil {
			warn(cmd, []string{failed.Error()})
		}
	}()
	family := b.Families[0]
	start := time.Now()
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd), b.Time)
	defer context.AfterFunc(cmd.Context(), shown.ending)()
	settings := optimize.Settings{
		Method:      method,
		Seed:        b.Seed,
		Time:        b.Time,
		Evaluations: b.Evaluations,
		Workers:     workers(b),
		Recorder:    &searchProgress{shown, family},
		Resume:      state,
	}
	if kept != nil {
		settings.Checkpoint = kept.keep
	}
	result, err := optimize.Search(cmd.Context(), problemOf(b), settings)
	shown.finish()
	if err != nil {
		return searchError(cmd.Context(), err, kept)
	}
	p, err := foundProfile(b, result)
	if err != nil {
		return err
	}
	answer := searchAnswer(b, p, result)
	answer.Seconds = time.Since(start).Seconds()
	answer.File = o.output
	answer.Resumed = state != nil
	answer.Warnings = append(answer.Warnings, o.reader.warnings...)
	answer.Tunnel = tunnelAt(cmd.Context(), result.Ensemble, family, result.Threshold, nil)
	answer.Draw = atTerminal(cmd)
	settled := result.Status == optimize.Settled
	if kept != nil && !settled {
		answer.Checkpoint = kept.path
	}
	if err := out.deliverProfile(p, answer); err != nil {
		return err
	}
	done = settled
	if result.Status == optimize.Interrupted {
		return context.Cause(cmd.Context())
	}
	return linkMargin(b, result.Threshold.Value)
}

// openCheckpoint opens the checkpoint asked for, or the one beside the output;
// nil without either, or for a method that has none.
func (o *searchOptions) openCheckpoint(cmd *cobra.Command, b brief.Brief, m optimize.Method, out *productOutput) (*checkpoint, []byte, error) {
	path := o.checkpoint
	given := cmd.Flags().Changed("checkpoint")
	_, resumable := m.(optimize.QuantizedDesign)
	switch {
	case given && !resumable:
		return nil, nil, usagef("--checkpoint: found %s; allowed: nothing, because this search ends within seconds; only --method quantized takes longer", path)
	case !given && (!resumable || out.file == nil || out.file.direct):
		return nil, nil, nil
	case !given:
		path = o.output + ".checkpoint"
	}
	kept, state, err := openCheckpoint(path, b, m)
	if err == nil && state != nil && !quiet(cmd) {
		fmt.Fprintf(cmd.ErrOrStderr(), "tannery: continuing from %s\n", path)
	}
	return kept, state, err
}

// searchMethod returns the way to search by the method of analysis asked for,
// or by the one that fits the brief.
func searchMethod(b brief.Brief) (optimize.Method, error) {
	name := b.Families[0].Name()
	single := len(b.Families) == 1
	switch method := de.Method(b.Method); {
	case method == de.Quantized:
		return optimize.QuantizedDesign{}, nil
	case method == "" && single && name == (channel.BEC{}).Name() && b.Iterations == 0:
		return optimize.BECDesign{}, nil
	case method == "":
		return optimize.QuantizedDesign{}, nil
	case method == de.Exact && single && name == (channel.BEC{}).Name():
		return optimize.BECDesign{}, nil
	case method == de.Gaussian && single && name == (channel.BIAWGN{}).Name():
		return optimize.GaussianDesign{}, nil
	}
	where := "channel " + name
	if !single {
		where = "several channels"
	}
	return nil, usagef("--method: found %s; allowed for a search on %s: quantized (exact searches on bec, gaussian on biawgn)", b.Method, where)
}

// problemOf turns the brief into the problem of the search.
func problemOf(b brief.Brief) optimize.Problem {
	p := optimize.Problem{
		Channel:         b.Families[0],
		Also:            b.Families[1:],
		Rate:            b.Rate,
		VariableDegrees: b.VariableDegrees.Allowed,
		CheckDegrees:    b.CheckDegrees.Allowed,
		Limits: optimize.Limits{
			EdgesPerBit:     b.EdgesPerBit,
			DegreeTwoParity: b.DegreeTwo == "parity",
			DistinctDegrees: b.DistinctDegrees,
			StabilityMargin: b.StabilityMargin,
			Iterations:      b.Iterations,
			TargetError:     b.TargetError,
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
func searchError(ctx context.Context, err error, kept *checkpoint) error {
	switch {
	case errors.Is(err, optimize.ErrCheckpoint):
		return usagef("%s: %w; allowed: that of this search, another --checkpoint, or to remove the file and start anew", kept.path, err)
	case ctx.Err() != nil:
		return fmt.Errorf("%w before anything was found; nothing is written", context.Cause(ctx))
	case errors.Is(err, optimize.ErrSpent):
		return unreachedError{errors.New("--evaluations: too few, nothing was found in them; nothing is written")}
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
		gap := report.Significant(p.Gap, 2)
		if db := decibels(s.family, p.Threshold, p.Threshold+p.Gap); db != nil {
			gap = fmt.Sprintf("%.4f dB", *db)
		}
		best = fmt.Sprintf("%s %.5f (gap %s)", s.family.Symbol(), p.Threshold, gap)
	}
	s.screen.update(p.Phase, p.Fraction, best, p.Evaluations)
}

// Improved implements optimize.Recorder.
func (s *searchProgress) Improved(optimize.Improvement) {}

// foundProfile makes a profile of the result, with its provenance.
func foundProfile(b brief.Brief, r optimize.Result) (ensembles.Profile, error) {
	p := ensembles.Profile{Title: b.Title, Ensemble: r.Ensemble}
	for i, f := range b.Families {
		threshold := r.Thresholds[i]
		if b.Iterations > 0 {
			// Results of profiles are for decoders without a limit. The search
			// may be out of time, but its profile is made whole.
			var err error
			if threshold, err = (de.QuantizedEngine{}).Threshold(context.Background(), r.Ensemble, f); err != nil {
				return p, err
			}
		}
		result, err := resultOf(r.Ensemble, f, threshold)
		if err != nil {
			return p, err
		}
		p.Results = append(p.Results, result)
	}
	tree, err := asked(b)
	p.Provenance = ensembles.Provenance{Program: program, Seed: &b.Seed, Created: now(), Brief: tree}
	return p, err
}

func searchAnswer(b brief.Brief, p ensembles.Profile, r optimize.Result) *report.Search {
	answer := &report.Search{
		Schema:      "tannery/search/1",
		Profile:     p,
		Status:      r.Status.String(),
		Evaluations: r.Stats.Evaluations,
		Programmes:  r.Stats.Programmes,
		EdgesPerBit: r.Ensemble.EdgesPerBit(),
		Binding:     append([]string{}, r.Binding...),
		Phases:      []report.PhaseTime{},
		Relaxations: []report.Relaxation{},
		Warnings:    []string{},
	}
	for _, phase := range r.Stats.Seconds {
		answer.Phases = append(answer.Phases, report.PhaseTime(phase))
	}
	for i, f := range b.Families {
		threshold := thresholdAnswer(p, f, r.Thresholds[i])
		if b.Iterations > 0 {
			threshold.Limited = &report.LimitedTarget{Iterations: b.Iterations, TargetError: cmp.Or(b.TargetError, optimize.DefaultTargetError)}
		}
		answer.Thresholds = append(answer.Thresholds, threshold)
	}
	answer.Threshold = answer.Thresholds[0]
	f := b.Families[0]
	if len(b.Families) == 1 && f.Name() == (channel.BEC{}).Name() {
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

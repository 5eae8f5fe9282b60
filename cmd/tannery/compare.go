package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"slices"
	"strings"
	"sync"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// compareTarget is the bit error probability that iterations are counted to.
const compareTarget = 1e-6

// compareIterations is the most that are followed to it: far from the
// threshold some dozens are needed.
const compareIterations = 10_000

type compareOptions struct {
	methodOption
	channels    channelsOption
	degradation nameOption
	reader      channelReader
	distance    numberOption
	sort        nameOption
	workers     integerOption
	csv         bool
	pictureOption
}

func newCompare() *cobra.Command {
	o := &compareOptions{
		distance:      numberOption{allow: document.Between(0, 1), value: 0.05},
		sort:          nameOption{names: []string{"gap", "threshold", "edges", "iterations", "name", "none"}, value: "gap"},
		workers:       integerOption{low: 1, high: 1024},
		pictureOption: newPictureOption("edges", "gaps"),
	}
	cmd := &cobra.Command{
		Use:   "compare PROFILE… [options]",
		Short: "profiles side by side: thresholds, gaps, cost",
		Example: `# a profile of one's own beside published ones
tannery compare harbour.yaml rsu01-r50-d15 80211n-r50-d11 --channel biawgn
# on several channels, as CSV for a spreadsheet
tannery compare ru01-r50-d3 ru01-r50-d4 --channel bec,bsc --csv
# how the gap falls with the largest degree, as a picture
tannery compare s99-r46-d8 s99-r50-d13 s99-r51-d100 --channel bec \
    --plot gaps.svg --picture gaps`,
		Long: `For each profile and channel: the threshold with its uncertainty, the Shannon
limit and the gap to it (in the channel parameter, in dB where the channel has
noise power, and in rate), the margin of the stability condition, the degrees,
the edges per code bit, and the iterations that a decoder needs to bring the
bit error probability to 1e-6 on a channel --distance below the profile's own
threshold: at the parameter (1 - distance) times the threshold, by default
5 % below it.

Rows are sorted by the gap unless --sort says otherwise. With --plot a picture
is written as well: thresholds against edges per code bit, or gaps against the
largest degree.

` + channelFileHelp,
		ValidArgsFunction: profileArguments(0),
		RunE:              func(cmd *cobra.Command, args []string) error { return runCompare(cmd, args, o) },
	}
	o.reader.cmd = cmd
	cmd.Flags().Var(&o.channels, "channel", "channels, with commas between them, files among them; by default those that the profiles' results share")
	completeChannel(cmd)
	addDegradation(cmd, &o.degradation)
	o.addMethod(cmd)
	cmd.Flags().Var(&o.distance, "distance", "how far below the threshold iterations are counted, as a share of it; 0.05 if not given")
	cmd.Flags().Var(&o.sort, "sort", "gap, threshold, edges, iterations, name or none (as given); gap if not given")
	complete(cmd, "sort", o.sort.names)
	cmd.Flags().Var(&o.workers, "workers", "measurements at once; as many as processors if not given")
	cmd.Flags().BoolVar(&o.csv, "csv", false, "answer with CSV, one line per profile and channel")
	o.addPicture(cmd, "edges (thresholds against edges per code bit) or gaps (against the largest degree); edges if not given")
	return cmd
}

func runCompare(cmd *cobra.Command, args []string, o *compareOptions) error {
	if o.csv && asJSON(cmd) {
		return usagef("--csv and --json: only one of the two")
	}
	if len(args) == 0 {
		return usagef("profile: missing; allowed: one or more files, names of the catalogue, and - for standard input once")
	}
	profiles := make([]ensembles.Profile, len(args))
	var errs []error
	for i, argument := range args {
		if argument == "-" && (slices.Contains(args[:i], "-") || slices.Contains(o.channels.values, "-")) {
			errs = append(errs, usagef("-: standard input can be read once only"))
			continue
		}
		p, warnings, err := loadProfile(cmd, argument)
		warn(cmd, warnings)
		profiles[i] = p
		errs = append(errs, err)
	}
	if err := errors.Join(errs...); err != nil {
		return err
	}
	families, err := o.families(profiles)
	if err != nil {
		return err
	}
	plot, err := o.open(cmd)
	if err != nil {
		return err
	}
	if plot != nil && len(families) > 1 {
		return usagef("--plot: a picture shows one channel; allowed: one --channel beside it")
	}
	answer := &report.Compare{Schema: "tannery/compare/1", Distance: o.distance.value, TargetError: compareTarget, Sort: o.sort.value}
	var jobs []comparison
	for _, f := range families {
		engine, err := o.engine(f)
		if err != nil {
			return err
		}
		for i, p := range profiles {
			jobs = append(jobs, comparison{profileName(args[i : i+1]), p, f, engine})
		}
	}
	rested := busy(cmd, fmt.Sprintf("measuring %d thresholds", len(jobs)))
	answer.Rows, err = measureAll(cmd.Context(), jobs, o.distance.value, o.workers.value)
	rested()
	if err != nil {
		return err
	}
	for n := range families {
		rows := answer.Rows[n*len(profiles) : (n+1)*len(profiles)]
		slices.SortStableFunc(rows, orders[o.sort.value])
	}
	if plot != nil {
		drawing := answer.CostPicture()
		if o.picture.value == "gaps" {
			var ok bool
			if drawing, ok = answer.GapPicture(); !ok {
				return usagef("--picture: found gaps; allowed: edges, because no profile has a Shannon limit")
			}
		}
		if err := plot.write(drawing); err != nil {
			return err
		}
	}
	if o.csv {
		return answer.WriteCSV(cmd.OutOrStdout())
	}
	return deliver(cmd, answer)
}

// families returns the channels asked for, or else those that the results of
// all profiles name.
func (o *compareOptions) families(profiles []ensembles.Profile) ([]channel.Family, error) {
	chosen := o.channels.values
	if len(chosen) == 0 {
		for _, name := range channel.Names() {
			shared := true
			for _, p := range profiles {
				shared = shared && slices.ContainsFunc(p.Results, func(r ensembles.Result) bool { return r.Channel == name })
			}
			if shared {
				chosen = append(chosen, name)
			}
		}
	}
	if len(chosen) == 0 {
		return nil, usagef("--channel: missing, and the profiles' results share none; allowed: %s", brief.ChannelsAllowed())
	}
	if o.degradation.value != "" && !slices.ContainsFunc(chosen, brief.IsFile) {
		return nil, usagef("--degradation: found %s; allowed: nothing, because no channel is from a file", o.degradation.value)
	}
	families := make([]channel.Family, len(chosen))
	for i, name := range chosen {
		f, err := o.reader.find(name, o.degradation.value)
		if err != nil {
			return nil, invalid(err)
		}
		families[i] = f
	}
	return families, nil
}

// comparison is one measurement to be made.
type comparison struct {
	name    string
	profile ensembles.Profile
	family  channel.Family
	engine  de.Engine
}

// measureAll measures side by side. Each result has its own place, so that the
// answer does not depend on the number of workers.
func measureAll(ctx context.Context, jobs []comparison, distance float64, workers int) ([]report.CompareRow, error) {
	if workers == 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	rows, errs := make([]report.CompareRow, len(jobs)), make([]error, len(jobs))
	next := make(chan int)
	var group sync.WaitGroup
	for range min(workers, len(jobs)) {
		group.Go(func() {
			for i := range next {
				rows[i], errs[i] = jobs[i].measure(ctx, distance)
			}
		})
	}
	for i := range jobs {
		next <- i
	}
	close(next)
	group.Wait()
	if err := context.Cause(ctx); err != nil {
		return nil, err
	}
	return rows, errors.Join(unique(errs)...)
}

// unique drops errors that say the same.
func unique(errs []error) []error {
	var kept []error
	for _, err := range errs {
		if err != nil && !slices.ContainsFunc(kept, func(k error) bool { return k.Error() == err.Error() }) {
			kept = append(kept, err)
		}
	}
	return kept
}

func (c comparison) measure(ctx context.Context, distance float64) (report.CompareRow, error) {
	e := c.profile.Ensemble
	threshold, err := bounded(c.engine.Threshold(ctx, e, c.family))
	if err != nil {
		return report.CompareRow{}, err
	}
	t := thresholdAnswer(c.profile, c.family, threshold)
	row := report.CompareRow{
		Profile: c.name, Channel: t.Channel, Parameter: t.Parameter, Symbol: t.Symbol, Method: t.Method,
		Threshold: t.Threshold, Uncertainty: t.Uncertainty, DesignRate: t.DesignRate, Limit: t.Limit, Gap: t.Gap,
		EbN0DB: t.EbN0DB, EsN0DB: t.EsN0DB, Stability: t.Stability,
		MeanVariableDegree: t.MeanVariableDegree, MeanCheckDegree: t.MeanCheckDegree,
		LargestVariableDegree: e.Lambda.Max(), EdgesPerBit: e.EdgesPerBit(),
		Warnings: t.Warnings,
	}
	if best, _ := c.family.Range(); !(threshold.Value > best) {
		return row, nil
	}
	at := threshold.Value * (1 - distance)
	row.At = &at
	trace, err := c.engine.Trace(ctx, e, c.family, at, compareIterations)
	if err != nil {
		return report.CompareRow{}, methodError(err)
	}
	for _, p := range trace.Points {
		if p.BitErrorProbability <= compareTarget {
			row.Iterations = &p.Iteration
			break
		}
	}
	return row, nil
}

// orders are the ways to sort rows; rows that are alike stay as given.
var orders = map[string]func(a, b report.CompareRow) int{
	"gap":        func(a, b report.CompareRow) int { return cmp.Compare(gapOfRow(a), gapOfRow(b)) },
	"threshold":  func(a, b report.CompareRow) int { return cmp.Compare(b.Threshold, a.Threshold) },
	"edges":      func(a, b report.CompareRow) int { return cmp.Compare(a.EdgesPerBit, b.EdgesPerBit) },
	"iterations": func(a, b report.CompareRow) int { return cmp.Compare(iterationsOf(a), iterationsOf(b)) },
	"name":       func(a, b report.CompareRow) int { return strings.Compare(a.Profile, b.Profile) },
	"none":       func(a, b report.CompareRow) int { return 0 },
}

// gapOfRow is the gap in dB, or in the parameter on channels without noise
// power; rows without a gap come last.
func gapOfRow(r report.CompareRow) float64 {
	switch {
	case r.Gap == nil:
		return math.Inf(1)
	case r.Gap.DB != nil:
		return *r.Gap.DB
	case hasPower(r.Channel):
		return math.MaxFloat64
	}
	return r.Gap.Parameter
}

// hasPower tells whether gaps on the channel are in dB: then a row without dB
// has a threshold at the perfect channel.
func hasPower(name string) bool {
	f, err := channel.ByName(name)
	if err != nil {
		return false
	}
	_, ok := f.SNR(1)
	return ok
}

func iterationsOf(r report.CompareRow) int {
	if r.Iterations == nil {
		return math.MaxInt
	}
	return *r.Iterations
}

package main

import (
	"context"
	"fmt"
	"math"
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

type exportOptions struct {
	parameterOptions
	profileOptions
	methodOption
	length integerOption
	output string
}

func newExport() *cobra.Command {
	o := &exportOptions{length: integerOption{low: 2, high: ensembles.MaxLength}}
	cmd := &cobra.Command{
		Use:   "export PROFILE --length N [options]",
		Short: "a profile as exact integer node counts",
		Example: `# counts for 64800 code bits, with the thresholds of the integer profile
tannery export harbour.yaml --length 64800 -o harbour-64800.yaml
# to another program, without a file
tannery export harbour.yaml --length 2048 | construct-matrix
# with the threshold on a channel that the profile has no result for
tannery export harbour.yaml --length 2048 --channel bsc
# of the (3,6) ensemble
tannery export --lambda 3:1 --rho 6:1 --length 1000 --channel bec`,
		Long: `The counts obey every invariant that a constructor relies on: the sockets of
variable and check nodes are equal in number, the rate is exactly 1 -
checks/length, and a graph without double edges exists. Among the roundings that
qualify, the one with the best threshold is taken.

The profile goes to standard output; with -o FILE it goes to that file, whole or
not at all, and a report to standard output. Thresholds in it are those of the
integer profile: one for each channel and method among the profile's results, or
for the channel asked for.`,
		Args:              atMost(1, "one profile"),
		ValidArgsFunction: profileArguments(1),
		RunE:              func(cmd *cobra.Command, args []string) error { return runExport(cmd, args, o) },
	}
	o.addChannel(cmd, "channel for the threshold; by default those that the profile's results name")
	o.addMethod(cmd)
	o.add(cmd)
	cmd.Flags().Var(&o.length, "length", "code bits, which are variable nodes")
	cmd.Flags().StringVarP(&o.output, "output", "o", "", "`FILE` for the profile, or - for standard output")
	return cmd
}

func runExport(cmd *cobra.Command, args []string, o *exportOptions) error {
	if !o.length.given {
		return usagef("--length: missing; allowed: a whole number from %d to %d", o.length.low, o.length.high)
	}
	if o.method.value != "" && o.channel.value == "" {
		return usagef("--method: needs --channel beside it")
	}
	p, warnings, err := o.read(cmd, args)
	if err != nil {
		return err
	}
	warn(cmd, warnings)
	out, err := openProductOutput(cmd, o.output)
	if err != nil {
		return err
	}
	meters, err := o.meters(cmd, p)
	if err != nil {
		return err
	}
	r, err := ensembles.Realize(p.Ensemble, o.length.value, score(cmd.Context(), meters))
	if err != nil {
		return usagef("--length: %w", err)
	}
	if err := context.Cause(cmd.Context()); err != nil {
		return err
	}
	if lost := lostDegrees(p.Ensemble, r); len(lost) > 0 {
		warn(cmd, lost)
		warnings = append(warnings, lost...)
	}
	for _, m := range meters {
		result, err := m.measure(cmd.Context(), r.Ensemble())
		if err != nil {
			return err
		}
		r.Results = append(r.Results, result)
	}
	p.Realization = &r
	if p.Provenance.Program == "" {
		p.Provenance.Program = program
	}
	if p.Provenance.Created.IsZero() {
		p.Provenance.Created = now()
	}
	answer := &report.Export{
		Schema:   "tannery/export/1",
		Profile:  p,
		Warnings: append([]string{}, warnings...),
	}
	if o.output == "" && !asJSON(cmd) {
		_, err := p.WriteTo(cmd.OutOrStdout())
		return err
	}
	return out.deliverProfile(p, answer)
}

// meter measures thresholds on one channel by one method.
type meter struct {
	family channel.Family
	engine de.Engine
}

// meters returns one meter for the channel asked for, or else one for each
// channel and method among the results of the profile.
func (o *exportOptions) meters(cmd *cobra.Command, p ensembles.Profile) ([]meter, error) {
	if o.channel.value != "" {
		f, err := o.family()
		if err != nil {
			return nil, err
		}
		engine, err := o.engine(f)
		return []meter{{f, engine}}, err
	}
	meters, unusable := resultMeters(p)
	warn(cmd, unusable)
	if len(p.Results) == 0 {
		warn(cmd, []string{"no thresholds of the integer profile, because neither the profile's results nor --channel name a channel"})
	}
	return meters, nil
}

// resultMeters returns one meter for each channel and method among the results
// of a profile, and warnings about those that there is none for.
func resultMeters(p ensembles.Profile) (meters []meter, unusable []string) {
	for _, r := range p.Results {
		f, err := channel.ByName(r.Channel)
		if err == nil {
			var engine de.Engine
			if engine, err = engineFor(de.Method(r.Method), f); err == nil {
				if !slices.ContainsFunc(meters, func(m meter) bool { return m.is(r.Channel, r.Method) }) {
					meters = append(meters, meter{f, engine})
				}
				continue
			}
		}
		unusable = append(unusable, fmt.Sprintf("no threshold of the integer profile for channel %s, method %s: %v", r.Channel, r.Method, err))
	}
	return meters, unusable
}

func (m meter) is(channel, method string) bool {
	return m.family.Name() == channel && string(m.engine.Method()) == method
}

// measure returns the threshold with its gap.
func (m meter) measure(ctx context.Context, e ensembles.Ensemble) (ensembles.Result, error) {
	threshold, err := m.engine.Threshold(ctx, e, m.family)
	if err != nil {
		return ensembles.Result{}, methodError(err)
	}
	return resultOf(e, m.family, threshold)
}

// score judges the roundings by the threshold on the first channel, by a
// method that takes a millisecond: the exact one on the BEC, elsewhere the
// Gaussian approximation, which orders neighbouring profiles as the channel
// itself does. Once the context ends the rest does not matter.
func score(ctx context.Context, meters []meter) func(ensembles.Ensemble) float64 {
	judge := meter{channel.BEC{}, de.ExactEngine{}}
	if len(meters) > 0 && meters[0].family.Name() != judge.family.Name() {
		judge = meter{channel.BIAWGN{}, de.GaussianEngine{}}
	}
	return func(e ensembles.Ensemble) float64 {
		threshold, err := judge.engine.Threshold(ctx, e, judge.family)
		if err != nil {
			return math.NaN()
		}
		return threshold.Value
	}
}

package main

import (
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
)

// maxIterations is the largest number of iterations followed or allowed.
const maxIterations = 1_000_000

type traceOptions struct {
	parameterOptions
	profileOptions
	methodOption
	iterations integerOption
	csv        bool
	draw       bool
	pictureOption
}

func newTrace() *cobra.Command {
	o := &traceOptions{
		iterations:    integerOption{low: 1, high: maxIterations, value: 1000},
		pictureOption: newPictureOption("tunnel", "errors", "degrees"),
	}
	cmd := &cobra.Command{
		Use:   "trace PROFILE [options]",
		Short: "the evolution of a profile, iteration by iteration",
		Example: `# how a profile decodes at σ = 0.94, and where its tunnel is narrowest
tannery trace harbour.yaml --channel biawgn --parameter 0.94
# the same at Eb/N0 in dB, every iteration as CSV
tannery trace harbour.yaml --eb-n0 0.9 --csv
# its tunnel as a picture, for colleagues
tannery trace harbour.yaml --parameter 0.94 --plot tunnel.svg
# on a channel that was measured, with a tenth of its bits lost
tannery trace harbour.yaml --channel receiver.csv --parameter 0.1
# the (3,6) ensemble just below its threshold on the BEC
tannery trace --lambda 3:1 --rho 6:1 --channel bec --parameter 0.4294`,
		Long: `One row per iteration: error probability, entropy (bits) and Bhattacharyya
parameter of the messages from variable nodes to check nodes, the entropy of the
messages from check nodes, and the bit error probability of the decision. Row 0
is the channel. Long traces are thinned in the table, never in CSV or JSON.

The evolution ends when it is certain that errors vanish (converged), at a fixed
point (stalled), or after --iterations (undecided).

With --plot a picture is written as well: the tunnel as an EXIT chart in
entropies, the error probabilities against iterations, or the degree profile.
At a terminal, or with --draw, the text ends with the tunnel seen from above.

` + channelFileHelp,
		Args:              atMost(1, "one profile"),
		ValidArgsFunction: profileArguments(1),
		RunE:              func(cmd *cobra.Command, args []string) error { return runTrace(cmd, args, o) },
	}
	o.addChannel(cmd, "the channel; by default the one that the profile's results name")
	o.addParameter(cmd)
	o.addMethod(cmd)
	o.add(cmd)
	cmd.Flags().Var(&o.iterations, "iterations", "most iterations to follow; 1000 if not given")
	cmd.Flags().BoolVar(&o.csv, "csv", false, "answer with CSV, one line per iteration")
	cmd.Flags().BoolVar(&o.draw, "draw", false, "draw the tunnel in text; without it, at a terminal only")
	o.addPicture(cmd, "tunnel, errors or degrees; tunnel if not given")
	return cmd
}

func runTrace(cmd *cobra.Command, args []string, o *traceOptions) error {
	if err := o.checkParameter(cmd); err != nil {
		return err
	}
	if o.csv && asJSON(cmd) {
		return usagef("--csv and --json: only one of the two")
	}
	if !o.given() {
		return usagef("--parameter: missing; allowed: it, --eb-n0 or --es-n0")
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
	value, err := o.value(f, p.Ensemble.DesignRate())
	if err != nil {
		return err
	}
	engine, err := o.engine(f)
	if err != nil {
		return err
	}
	plot, err := o.open(cmd)
	if err != nil {
		return err
	}
	trace, err := engine.Trace(cmd.Context(), p.Ensemble, f, value, o.iterations.value)
	if err != nil {
		return methodError(err)
	}
	answer := traceAnswer(trace, f, p.Ensemble.DesignRate())
	answer.Name = profileName(args)
	answer.Warnings = slices.Concat(answer.Warnings, warnings, o.reader.warnings)
	answer.Draw = o.draw || atTerminal(cmd)
	if plot != nil {
		drawing := answer.TunnelPicture()
		switch o.picture.value {
		case "errors":
			drawing = answer.ErrorPicture()
		case "degrees":
			drawing = report.DegreePicture(answer.Name, p.Ensemble)
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

func traceAnswer(trace de.Trace, f channel.Family, rate float64) *report.Trace {
	answer := &report.Trace{
		Schema:    "tannery/trace/1",
		Channel:   f.Name(),
		Parameter: f.Parameter(),
		Symbol:    f.Symbol(),
		Value:     trace.Parameter,
		Method:    string(trace.Method),
		Outcome:   string(trace.Outcome),
		Points:    make([]report.TracePoint, len(trace.Points)),
		Warnings:  []string{},
	}
	answer.EbN0DB, answer.EsN0DB = ratios(f, trace.Parameter, rate)
	for i, p := range trace.Points {
		answer.Points[i] = report.TracePoint(p)
	}
	if trace.Narrowest >= 0 {
		answer.Narrowest = new(trace.Narrowest)
	}
	return answer
}

package main

import (
	"context"
	"errors"
	"fmt"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/de/montecarlo"
	"tannery/ensembles/document"
)

type simulateOptions struct {
	channel     nameOption
	parameter   rangeOption
	ebN0, esN0  rangeOption
	schedule    nameOption
	iterations  integerOption
	frames      integerOption
	frameErrors integerOption
	time        durationOption
	confidence  numberOption
	frameError  numberOption
	seed        seedOption
	workers     integerOption
	checkpoint  string
	csv         bool
	noProgress  bool
	pictureOption
}

// Limits of a simulation unless others are asked for.
const (
	defaultFrames      = 1_000_000
	defaultFrameErrors = 100
)

func newSimulate() *cobra.Command {
	const most = 1 << 50 // sums of counts stay far from overflow
	o := &simulateOptions{
		channel:       nameOption{names: channel.Names()},
		parameter:     rangeOption{allow: document.AtLeast(0)},
		ebN0:          rangeOption{allow: document.FromTo(-maxDB, maxDB)},
		esN0:          rangeOption{allow: document.FromTo(-maxDB, maxDB)},
		schedule:      nameOption{names: []string{string(montecarlo.Flooding), string(montecarlo.Layered)}, value: string(montecarlo.Flooding)},
		iterations:    integerOption{low: 1, high: maxIterations},
		frames:        integerOption{low: 1, high: most, value: defaultFrames},
		frameErrors:   integerOption{low: 1, high: most, value: defaultFrameErrors},
		confidence:    numberOption{value: 0.95, allow: document.Between(0, 1)},
		frameError:    numberOption{value: 1e-3, allow: document.Between(0, 1)},
		workers:       integerOption{low: 1, high: 1 << 16},
		pictureOption: newPictureOption("curves"),
	}
	cmd := &cobra.Command{
		Use:   "simulate MATRIX [options]",
		Short: "measured error rates of a matrix, beside its threshold",
		Example: `# the waterfall on the BEC
tannery simulate buoys.mtx --channel bec --parameter 0.36:0.46:0.02
# on a noisy channel, from 1 to 2 dB, with a picture
tannery simulate buoys.mtx --channel biawgn --eb-n0 1:2:0.5 --plot buoys.svg
# a long measurement that can be interrupted and continued, for a report
tannery simulate buoys.mtx --channel bsc --parameter 0.05,0.06 \
    --frame-errors 50 --checkpoint buoys.state --json > buoys.json
# with the layered schedule, and no more than 10 iterations
tannery simulate buoys.mtx --channel biawgn --parameter 0.75 \
    --schedule layered --iterations 10`,
		Long: `Frames are sent over the channel and decoded: on bec by peeling, elsewhere by
sum-product in exact LLRs, flooding or layered, until the decisions form a codeword
or --iterations are over (` + fmt.Sprint(montecarlo.DefaultIterations) + ` if not given; peeling goes on to its end). Bits that
are left erased, or without a decision, count as wrong. The all-zero
codeword is sent every time: channels and decoders are symmetric, so that the
error rates are the same for every codeword (Richardson & Urbanke, 2001).

A parameter, or Eb/N0 or Es/N0 in dB, is one value, several with commas between
them, or FROM:TO:STEP. Eb/N0 is at the design rate, 1 - rows/columns. At each
value frames are tried until one of --frame-errors, --frames and --time is reached.
The intervals are exact binomial ones for frames (Clopper & Pearson, 1934); those
for bits count as many independent bits as the variation between frames speaks for.

Beside the rates stand the threshold of the matrix's own profile, the Shannon
limit, and the limit of any code of this length at --frame-error; on bec also
what the scaling law of finite lengths predicts for the ensemble (Amraoui,
Montanari, Richardson & Urbanke, 2009), where one place decides.

The same seed gives the same counts for any number of workers, unless --time ends
a measurement. With --checkpoint FILE the counts are kept there every second: the
same command continues behind them after an interruption, and ends in the same
counts. It is removed at the end.`,
		Args:              exactly(1, "one matrix"),
		ValidArgsFunction: matrixFiles,
		RunE:              func(cmd *cobra.Command, args []string) error { return runSimulate(cmd, args[0], o) },
	}
	f := cmd.Flags()
	f.Var(&o.channel, "channel", "the channel: "+listOf(o.channel.names))
	complete(cmd, "channel", o.channel.names)
	f.Var(&o.parameter, "parameter", "channel parameters: ε of bec, p of bsc, σ of biawgn and rayleigh, scale b of laplace")
	f.Var(&o.ebN0, "eb-n0", "Eb/N0 in dB instead (biawgn; rayleigh: mean)")
	f.Var(&o.esN0, "es-n0", "Es/N0 in dB instead (biawgn; rayleigh: mean)")
	f.Var(&o.schedule, "schedule", "of sum-product: flooding or layered; flooding if not given")
	complete(cmd, "schedule", o.schedule.names)
	f.Var(&o.iterations, "iterations", "most iterations for a frame")
	f.Var(&o.frameErrors, "frame-errors", fmt.Sprintf("frame errors to stop at; %d if not given", defaultFrameErrors))
	f.Var(&o.frames, "frames", fmt.Sprintf("frames to stop at; %d if not given", defaultFrames))
	f.Var(&o.time, "time", "time to stop at, at each parameter, such as 60s")
	f.Var(&o.confidence, "confidence", "of the intervals; 0.95 if not given")
	f.Var(&o.frameError, "frame-error", "frame error rate for the limit of any code of this length; 0.001 if not given")
	f.Var(&o.seed, "seed", "seed of the trials")
	f.Var(&o.workers, "workers", "processors to use; all if not given")
	f.StringVar(&o.checkpoint, "checkpoint", "", "`FILE` for the counts, to continue after an interruption")
	f.BoolVar(&o.csv, "csv", false, "answer with CSV, one line per parameter")
	f.BoolVar(&o.noProgress, "no-progress", false, "no progress on standard error")
	o.addPicture(cmd, "curves")
	if err := f.MarkHidden("picture"); err != nil { // there is one only
		panic(err) // an option that does not exist
	}
	return cmd
}

func runSimulate(cmd *cobra.Command, path string, o *simulateOptions) error {
	if o.csv && asJSON(cmd) {
		return usagef("--csv and --json: only one of the two")
	}
	f, err := o.family()
	if err != nil {
		return err
	}
	g, label, err := readMatrix(cmd, path)
	if err != nil {
		return err
	}
	rate := 1 - float64(g.Checks())/float64(g.Variables())
	if len(o.ebN0.values) > 0 && rate <= 0 {
		return usagef("--eb-n0: needs a design rate above 0, because Eb = Es/rate; found %d rows for %d columns; allowed: --parameter or --es-n0", g.Checks(), g.Variables())
	}
	values, err := o.values(cmd, f, rate)
	if err != nil {
		return err
	}
	plot, err := o.open(cmd)
	if err != nil {
		return err
	}
	answer, scaling, err := o.prospect(cmd, path, g, label, f)
	if err != nil {
		return err
	}
	warn(cmd, answer.Warnings)
	interrupted, err := o.measure(cmd, g, f, values, answer, scaling)
	if err != nil {
		return err
	}
	if len(answer.Points) > 0 {
		if err := o.deliver(cmd, answer, plot); err != nil {
			return err
		}
	}
	switch {
	case interrupted:
		return context.Cause(cmd.Context())
	case len(answer.Points) == 0:
		return unreachedError{errors.New("--time: too short, no frame was finished in it; nothing is written")}
	}
	return nil
}

func (o *simulateOptions) deliver(cmd *cobra.Command, answer *report.Simulation, plot *plotFile) error {
	if plot != nil {
		if err := plot.write(answer.Picture(answer.Marks())); err != nil {
			return err
		}
	}
	if o.csv {
		return answer.WriteCSV(cmd.OutOrStdout())
	}
	return deliver(cmd, answer)
}

func (o *simulateOptions) family() (channel.Family, error) {
	if o.channel.value == "" {
		return nil, usagef("--channel: missing; allowed: %s", listOf(o.channel.names))
	}
	f, err := channel.ByName(o.channel.value)
	if err == nil && o.schedule.value != string(montecarlo.Flooding) && f.Name() == (channel.BEC{}).Name() {
		return nil, usagef("--schedule: found %s; allowed: nothing on channel bec, where peeling has no schedule", o.schedule.value)
	}
	return f, err
}

// values returns the channel parameters asked for, in the order given.
func (o *simulateOptions) values(cmd *cobra.Command, f channel.Family, rate float64) ([]float64, error) {
	var one parameterOptions
	if err := one.checkParameter(cmd); err != nil {
		return nil, err
	}
	number, given := &one.parameter, o.parameter.values
	switch {
	case len(o.ebN0.values) > 0:
		number, given = &one.ebN0, o.ebN0.values
	case len(o.esN0.values) > 0:
		number, given = &one.esN0, o.esN0.values
	case len(given) == 0:
		return nil, usagef("--parameter: missing; allowed: it, --eb-n0 or --es-n0")
	}
	number.given = true
	var values []float64
	for _, v := range given {
		number.value = v
		value, err := one.value(f, rate)
		if err != nil {
			return nil, err
		}
		if best, worst := f.Range(); f.Name() != (channel.BEC{}).Name() && !(value > best && value < worst) {
			return nil, usagef("--parameter: found %v; allowed: for trials on channel %s, %v", value, f.Name(), document.Between(best, worst))
		}
		values = append(values, value)
	}
	return values, nil
}

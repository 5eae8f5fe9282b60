package main

import (
	"context"
	"errors"
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/optimize"
)

type thresholdOptions struct {
	parameterOptions
	profileOptions
	methodOption
	iterations  integerOption
	targetError numberOption
}

func newThreshold() *cobra.Command {
	o := &thresholdOptions{
		iterations:  integerOption{low: 1, high: maxIterations},
		targetError: numberOption{allow: brief.TargetErrors, value: optimize.DefaultTargetError},
	}
	cmd := &cobra.Command{
		Use:   "threshold PROFILE [options]",
		Short: "how noisy a channel a profile decodes, and how far from the limit",
		Example: `# of a profile on the channel that its results name
tannery threshold harbour.yaml
# of the (3,6) ensemble on the BEC, exactly, as JSON
tannery threshold --lambda 3:1 --rho 6:1 --channel bec --json
# on the Gaussian channel by another method
tannery threshold harbour.yaml --channel biawgn --method gaussian
# for a decoder that stops after 20 iterations at bit error rate 1e-6
tannery threshold harbour.yaml --iterations 20 --target-error 1e-6
# on a channel that was measured: how many of its bits may be lost?
tannery threshold harbour.yaml --channel receiver.csv
# of a profile that another program writes
draw-profile | tannery threshold - --channel bsc`,
		Long: `The threshold is the worst channel parameter at which the decoder succeeds as
the length of the code goes to infinity, with its numerical uncertainty (how far
an approximation is from the truth is another matter). Beside it: the Shannon
limit at the design rate and the gap to it, the stability condition with its
margin, and where the decoding tunnel closes. On the BEC also the bound that no
decoder of these graphs can pass, by the area theorem.

With --iterations N the decoder has N iterations to bring the bit error rate
down to --target-error.

` + channelFileHelp,
		Args:              atMost(1, "one profile"),
		ValidArgsFunction: profileArguments(1),
		RunE:              func(cmd *cobra.Command, args []string) error { return runThreshold(cmd, args, o) },
	}
	o.addChannel(cmd, "the channel; by default the one that the profile's results name")
	o.addMethod(cmd)
	o.add(cmd)
	cmd.Flags().Var(&o.iterations, "iterations", "iterations that the decoder can do; unlimited if not given")
	cmd.Flags().Var(&o.targetError, "target-error", "bit error rate to reach in them; 1e-6 if not given")
	return cmd
}

func runThreshold(cmd *cobra.Command, args []string, o *thresholdOptions) error {
	if o.targetError.given && !o.iterations.given {
		return usagef("--target-error: needs --iterations beside it")
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
	rested := busy(cmd, "finding the threshold")
	answer, err := o.answer(cmd.Context(), engine, p, f)
	rested()
	if err != nil {
		return err
	}
	answer.Warnings = slices.Concat(answer.Warnings, warnings, o.reader.warnings)
	return deliver(cmd, answer)
}

func (o *thresholdOptions) answer(ctx context.Context, engine de.Engine, p ensembles.Profile, f channel.Family) (*report.Threshold, error) {
	threshold, err := o.measure(ctx, engine, p.Ensemble, f)
	if err != nil {
		return nil, err
	}
	answer := thresholdAnswer(p, f, threshold)
	if o.iterations.given {
		answer.Limited = &report.LimitedTarget{Iterations: o.iterations.value, TargetError: o.targetError.value}
	}
	return answer, nil
}

// thresholdAnswer sets a threshold beside what is possible.
func thresholdAnswer(p ensembles.Profile, f channel.Family, threshold de.Threshold) *report.Threshold {
	e := p.Ensemble
	answer := &report.Threshold{
		Schema:             "tannery/threshold/1",
		Channel:            f.Name(),
		Parameter:          f.Parameter(),
		Symbol:             f.Symbol(),
		Method:             string(threshold.Method),
		Threshold:          threshold.Value,
		Uncertainty:        threshold.Uncertainty,
		DesignRate:         e.DesignRate(),
		Iterations:         threshold.Iterations,
		Warnings:           append([]string{}, threshold.Warnings...),
		Title:              p.Title,
		Lambda:             report.Degrees(e.Lambda),
		Rho:                report.Degrees(e.Rho),
		MeanVariableDegree: e.MeanVariableDegree(),
		MeanCheckDegree:    e.MeanCheckDegree(),
		Critical:           make([]report.Critical, len(threshold.Critical)),
	}
	for i, c := range threshold.Critical {
		answer.Critical[i] = report.Critical(c)
	}
	answer.EbN0DB, answer.EsN0DB = ratios(f, threshold.Value, answer.DesignRate)
	if f.Name() == (channel.BEC{}).Name() && answer.DesignRate > 0 {
		answer.MAPBound = new(de.MAPUpperBound(e))
	}
	stability := de.StabilityOf(e, f, threshold.Value)
	answer.Stability = report.Stability{Bound: report.Finite(stability.Bound), Margin: report.Finite(stability.Margin)}
	if best, _ := f.Range(); brief.IsMeasured(f) && threshold.Value == best {
		answer.Warnings = append(answer.Warnings, "decoding fails on the channel as measured")
		answer.Critical = []report.Critical{}
	}
	assessment, err := de.Assess(e, f, threshold)
	if err != nil { // a design rate without a Shannon limit
		answer.Warnings = append(answer.Warnings, err.Error())
		return answer
	}
	if assessment.Gap.Parameter < -threshold.Uncertainty {
		answer.Warnings = append(answer.Warnings, beyondLimit)
	}
	gap := report.Gap(gapOf(assessment))
	answer.Limit, answer.Gap = &assessment.Limit, &gap
	return answer
}

// beyondLimit is said of a threshold that no code can have.
const beyondLimit = "the threshold lies beyond the Shannon limit, which no decoder can reach: the method's approximation does not hold for this profile"

// measure finds the threshold, with the limit on iterations if there is one.
func (o *thresholdOptions) measure(ctx context.Context, engine de.Engine, e ensembles.Ensemble, f channel.Family) (de.Threshold, error) {
	if !o.iterations.given {
		return bounded(engine.Threshold(ctx, e, f))
	}
	threshold, err := de.Limited(ctx, engine, e, f, o.iterations.value, o.targetError.value)
	if errors.Is(err, de.ErrUnreachable) {
		return threshold, unreachedError{err}
	}
	return bounded(threshold, err)
}

// gapOf returns the gap in the form that files have.
func gapOf(a de.Assessment) ensembles.Gap {
	gap := ensembles.Gap{Parameter: a.Gap.Parameter, Rate: a.Gap.Rate}
	if a.Gap.HasDB {
		gap.DB = report.Finite(a.Gap.DB)
	}
	return gap
}

// resultOf returns a threshold with its gap in the form that files have.
func resultOf(e ensembles.Ensemble, f channel.Family, t de.Threshold) (ensembles.Result, error) {
	a, err := de.Assess(e, f, t)
	if err != nil {
		return ensembles.Result{}, err
	}
	return ensembles.Result{
		Channel:     f.Name(),
		Parameter:   f.Parameter(),
		Method:      string(t.Method),
		Threshold:   t.Value,
		Uncertainty: t.Uncertainty,
		Limit:       a.Limit,
		Gap:         gapOf(a),
	}, nil
}

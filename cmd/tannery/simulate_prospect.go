package main

import (
	"context"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/de/montecarlo"
	"tannery/ensembles/tanner"
)

// prospect begins the answer with what theory says about the matrix: the
// threshold of its own profile, the limits at its rate and length, and the
// scaling law, nil where it does not hold.
func (o *simulateOptions) prospect(cmd *cobra.Command, path string, g *tanner.Graph, label tanner.Label, f channel.Family) (*report.Simulation, *montecarlo.Scaling, error) {
	r, err := g.Realization()
	if err != nil {
		return nil, nil, usagef("%s: %w", inputName(path), err)
	}
	e := r.Ensemble()
	answer := &report.Simulation{
		Schema:     report.SimulationSchema,
		Matrix:     g.Digest(),
		Title:      label.Title,
		Name:       profileName([]string{path}),
		Channel:    f.Name(),
		Parameter:  f.Parameter(),
		Symbol:     f.Symbol(),
		Length:     r.Length,
		DesignRate: r.DesignRate(),
		Decoder:    "peeling",
		Iterations: o.iterations.value,
		Seed:       o.seed.value,
		Confidence: o.confidence.value,
		Limits:     []report.SimulationLimit{},
		Points:     []report.SimulationPoint{},
		Warnings:   []string{},
	}
	if f.Name() != (channel.BEC{}).Name() {
		answer.Decoder = "sum-product, " + o.schedule.value
		if !o.iterations.given {
			answer.Iterations = montecarlo.DefaultIterations
		}
	}
	engine, err := engineFor("", f)
	if err != nil {
		return nil, nil, err
	}
	threshold, failed := engine.Threshold(cmd.Context(), e, f)
	if err := context.Cause(cmd.Context()); err != nil {
		return nil, nil, err
	}
	answer.Warnings = append(answer.Warnings, threshold.Warnings...)
	if failed != nil { // which is no reason not to measure
		answer.Warnings = append(answer.Warnings, "threshold: "+failed.Error())
	}
	add := func(name string, value float64, frameError *float64) {
		ebN0, _ := ratios(f, value, answer.DesignRate)
		answer.Limits = append(answer.Limits, report.SimulationLimit{Name: name, Value: value, EbN0DB: ebN0, FrameError: frameError})
	}
	if failed == nil {
		add(report.ThresholdName, threshold.Value, nil)
	}
	if limit, err := f.Inverse(answer.DesignRate); err == nil {
		add("Shannon limit", limit, nil)
	}
	if limit := finiteLimit(f, answer.DesignRate, answer.Length, o.frameError.value); limit != nil {
		add("finite-length limit", *limit, &o.frameError.value)
	}
	if f.Name() != (channel.BEC{}).Name() || len(threshold.Critical) == 0 {
		return answer, nil, nil
	}
	scaling, err := montecarlo.ScalingOf(e, threshold.Value, threshold.Critical[0].Entropy)
	if err != nil {
		// Another law holds, where stability decides.
		return answer, nil, nil
	}
	isolated := scaling.Isolated(answer.Length)
	answer.Scaling = &report.SimulationScaling{Alpha: scaling.Alpha, Beta: scaling.Beta, Isolated: isolated}
	if !isolated {
		return answer, nil, nil
	}
	return answer, &scaling, nil
}

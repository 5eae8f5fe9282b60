package main

import (
	"context"
	"fmt"
	"math"

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
	redundant, err := redundancy(cmd.Context(), g, answer.DesignRate)
	if err != nil {
		return nil, nil, err
	}
	answer.Warnings = append(answer.Warnings, redundant...)
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
	if !isolated || o.iterations.given { // the law is about decoding to the end
		return answer, nil, nil
	}
	return answer, &scaling, nil
}

const (
	// quickRankWork is the most work for the rank that is done before trials:
	// some tenths of a second.
	quickRankWork = 2e8
	// rateSlackDB is by how much Eb/N0 may be wrong without a word, because
	// some rows depend on others, as one does with even degrees only.
	rateSlackDB = 0.01
)

// redundancy warns if so many rows depend on others that the code has another
// rate than its matrix is designed for: Eb/N0 and the limits are at that.
func redundancy(ctx context.Context, g *tanner.Graph, designRate float64) (warnings []string, err error) {
	triangle := g.Triangulate()
	if triangle.RankWork() > quickRankWork {
		return nil, nil
	}
	rank, err := triangle.Rank(ctx)
	if err != nil {
		return nil, context.Cause(ctx)
	}
	rate := 1 - float64(rank)/float64(g.Variables())
	if rank == g.Checks() || designRate > 0 && 10*math.Log10(rate/designRate) < rateSlackDB {
		return nil, nil
	}
	return []string{fmt.Sprintf("the rank is %d, %d less than rows, so the rate of the code is %s; Eb/N0 and limits are at the design rate, %s",
		rank, g.Checks()-rank, report.Trimmed(rate, 9), report.Trimmed(designRate, 9))}, nil
}

package main

import (
	"context"

	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// shownDistance is how far below its threshold, as a share of it, the tunnel
// of a profile is shown: near enough to see where it is tight, and open.
const shownDistance = 0.01

// shownIterations is the most that are followed there.
const shownIterations = 2000

// tunnelAt follows the evolution at the parameter, or shownDistance below the
// threshold if it is nil; nil where there is nothing to show, as without a
// threshold or after an interruption.
func tunnelAt(ctx context.Context, e ensembles.Ensemble, f channel.Family, t de.Threshold, parameter *float64) *report.Trace {
	at := t.Value * (1 - shownDistance)
	if parameter != nil {
		at = *parameter
	}
	engine, err := de.EngineFor(t.Method)
	if err != nil {
		return nil
	}
	trace, err := engine.Trace(ctx, e, f, at, shownIterations)
	if err != nil || len(trace.Points) < 2 {
		return nil
	}
	return traceAnswer(trace, f, e.DesignRate())
}

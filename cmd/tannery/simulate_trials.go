package main

import (
	"encoding/json"
	"fmt"
	"runtime"
	"time"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/de/montecarlo"
	"tannery/ensembles/tanner"
)

// timed is what was measured at one value, and how long that took, since --time
// counts what was spent before an interruption.
type timed struct {
	montecarlo.Measurement
	Spent time.Duration `json:"nanoseconds"`
}

// measure makes the trials at all values, and adds a point to the answer for
// each at which there were any. It tells whether it was interrupted.
func (o *simulateOptions) measure(cmd *cobra.Command, g *tanner.Graph, f channel.Family, values []float64, answer *report.Simulation, scaling *montecarlo.Scaling) (interrupted bool, err error) {
	kept, done, err := o.resume(cmd, g, f, values)
	if err != nil {
		return false, err
	}
	complete := false
	defer func() {
		if failed := kept.close(complete); failed != nil {
			warn(cmd, []string{failed.Error()})
		}
	}()
	keep := func() {
		if kept != nil {
			state, _ := json.Marshal(done) // of numbers, which cannot fail
			kept.keep(state)
		}
	}
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd), 0)
	defer shown.finish()
	limits := montecarlo.Limits{
		Frames: int64(o.frames.value), FrameErrors: int64(o.frameErrors.value), Workers: min(o.workers.value, runtime.NumCPU()), // more would only take memory
	}
	var last time.Time // of the state that was handed over
	for i, value := range values {
		trials := o.trials(g, f, value)
		start, earlier := time.Now(), done[i].Spent
		if o.time.value > 0 {
			limits.Time = o.time.value - earlier
			if limits.Time <= 0 { // spent before the interruption
				o.add(cmd, done[i].Measurement, montecarlo.TimeUp, f, value, answer, scaling)
				continue
			}
		}
		m, status, err := trials.Run(cmd.Context(), done[i].Measurement, limits, func(m montecarlo.Measurement) {
			done[i] = timed{m, earlier + time.Since(start)}
			if time.Since(last) > checkpointInterval/10 {
				keep()
				last = time.Now()
			}
			share := max(float64(m.Counts.Frames)/float64(limits.Frames), float64(m.Counts.FrameErrors)/float64(limits.FrameErrors))
			if o.time.value > 0 {
				share = max(share, float64(done[i].Spent)/float64(o.time.value))
			}
			shown.update(fmt.Sprintf("%d of %d, %s %.6g", i+1, len(values), f.Symbol(), value), (float64(i)+min(share, 1))/float64(len(values)),
				fmt.Sprintf("%d of %d frames wrong", m.Counts.FrameErrors, m.Counts.Frames), 0)
		})
		if err != nil {
			return false, invalid(err)
		}
		keep()
		o.add(cmd, m, status, f, value, answer, scaling)
		if status == montecarlo.Interrupted {
			return true, nil
		}
	}
	complete = true
	return false, nil
}

// trials are those at one value.
func (o *simulateOptions) trials(g *tanner.Graph, f channel.Family, value float64) montecarlo.Trials {
	return montecarlo.Trials{
		Graph: g, Family: f, Parameter: value, Iterations: o.iterations.value, Schedule: montecarlo.Schedule(o.schedule.value), Seed: o.seed.value,
	}
}

// longestSpent is more time than anybody spends, and keeps sums from overflow.
const longestSpent = 100 * 365 * 24 * time.Hour

// resume opens the checkpoint, if there is one, and returns what is measured
// at each value.
func (o *simulateOptions) resume(cmd *cobra.Command, g *tanner.Graph, f channel.Family, values []float64) (*checkpoint, []timed, error) {
	done := make([]timed, len(values))
	if !cmd.Flags().Changed("checkpoint") {
		return nil, done, nil
	}
	asked, err := json.Marshal(map[string]any{
		"command": "simulate", "matrix": g.Digest(), "channel": o.channel.value, "values": values,
		"iterations": o.iterations.value, "schedule": o.schedule.value, "seed": o.seed.value,
	})
	if err != nil {
		return nil, nil, err
	}
	kept, state, err := openState(o.checkpoint, checkpointFile{Kind: measurementKind, Version: checkpointVersion, Program: program, Brief: asked})
	if err != nil || state == nil {
		return kept, done, err
	}
	broken := json.Unmarshal(state, &done) != nil || len(done) != len(values)
	for i := 0; i < len(values) && !broken; i++ {
		broken = done[i].Spent < 0 || done[i].Spent > longestSpent || o.trials(g, f, values[i]).Continues(done[i].Measurement) != nil
	}
	if broken {
		kept.close(false)
		return nil, nil, usagef("%s: found a damaged checkpoint; allowed: that of this measurement, another --checkpoint, or to remove the file and start anew", o.checkpoint)
	}
	if !quiet(cmd) {
		fmt.Fprintf(cmd.ErrOrStderr(), "tannery: continuing from %s\n", o.checkpoint)
	}
	return kept, done, nil
}

// add adds what was measured at one value to the answer, if there were trials.
func (o *simulateOptions) add(cmd *cobra.Command, m montecarlo.Measurement, status montecarlo.Status, f channel.Family, value float64, answer *report.Simulation, scaling *montecarlo.Scaling) {
	switch {
	case m.Counts.Frames > 0:
		answer.Points = append(answer.Points, o.point(m, status, f, answer, scaling))
	case status == montecarlo.TimeUp:
		missing := fmt.Sprintf("no frame was finished at %s = %g within --time", f.Symbol(), value)
		answer.Warnings = append(answer.Warnings, missing)
		warn(cmd, []string{missing})
	}
}

// point is what was measured at one parameter.
func (o *simulateOptions) point(m montecarlo.Measurement, status montecarlo.Status, f channel.Family, answer *report.Simulation, scaling *montecarlo.Scaling) report.SimulationPoint {
	p := report.SimulationPoint{
		Value:       m.Parameter,
		Status:      string(status),
		Frames:      int(m.Counts.Frames),
		FrameErrors: int(m.Counts.FrameErrors),
		Undetected:  int(m.Counts.Undetected),
		BitErrors:   int(m.Counts.BitErrors),
		Iterations:  m.MeanIterations(),
		Frame:       report.MeasuredRate(m.FrameErrorRate(o.confidence.value)),
		Bit:         report.MeasuredRate(m.BitErrorRate(o.confidence.value)),
	}
	p.EbN0DB, _ = ratios(f, m.Parameter, answer.DesignRate)
	if scaling != nil {
		frame, bit := scaling.FrameErrorRate(m.Length, m.Parameter), scaling.BitErrorRate(m.Length, m.Parameter)
		p.PredictedFrame, p.PredictedBit = &frame, &bit
	}
	return p
}

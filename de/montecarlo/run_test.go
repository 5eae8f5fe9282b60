package montecarlo

import (
	"context"
	"encoding/json"
	"fmt"
	"strings"
	"testing"
	"time"

	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/tanner"
)

func regularName(n int) string { return fmt.Sprintf("3,6/%d", n) }

func trialsOf(t testing.TB, f channel.Family, parameter float64, schedule Schedule) Trials {
	return Trials{
		Graph: regularGraph(t, 3, 6, 240, tanner.Settings{Seed: 1}), Family: f, Parameter: parameter,
		Schedule: schedule, Seed: 11, Iterations: 30,
	}
}

func run(t *testing.T, trials Trials, from Measurement, limits Limits) (Measurement, Status) {
	t.Helper()
	m, status, err := trials.Run(context.Background(), from, limits, nil)
	if err != nil {
		t.Fatal(err)
	}
	return m, status
}

// The counts are the same for any number of workers, however the run is cut
// into pieces, and the state survives being written as JSON.
func TestRunIsDeterministic(t *testing.T) {
	for _, trials := range []Trials{
		trialsOf(t, channel.BEC{}, 0.4, ""),
		trialsOf(t, channel.BSC{}, 0.07, Flooding),
		trialsOf(t, channel.BIAWGN{}, 0.8, Flooding),
		trialsOf(t, channel.BIAWGN{}, 0.8, Layered),
		trialsOf(t, channel.Rayleigh{}, 0.62, Flooding),
		trialsOf(t, channel.Laplace{}, 0.64, Flooding),
	} {
		want, status := run(t, trials, Measurement{}, Limits{FrameErrors: 30, Workers: 1})
		if status != EnoughErrors || want.Counts.FrameErrors != 30 || want.Counts.Frames <= 30 {
			t.Errorf("%s: %s with %+v; want 30 frame errors among more frames", trials.Family.Name(), status, want.Counts)
		}
		var first Measurement
		for _, workers := range []int{2, 5} {
			m, _ := run(t, trials, Measurement{}, Limits{FrameErrors: 30, Workers: workers})
			if m != want {
				t.Errorf("%s: %+v with %d workers, %+v with one", trials.Family.Name(), m.Counts, workers, want.Counts)
			}
			first, status = run(t, trials, Measurement{}, Limits{Frames: want.Counts.Frames / 3, Workers: workers})
			if status != EnoughFrames || first.Counts.Frames != want.Counts.Frames/3 {
				t.Errorf("%s: %s after %d frames", trials.Family.Name(), status, first.Counts.Frames)
			}
		}
		text, err := json.Marshal(first)
		if err != nil {
			t.Fatal(err)
		}
		var back Measurement
		if err := json.Unmarshal(text, &back); err != nil {
			t.Fatal(err)
		}
		if m, _ := run(t, trials, back, Limits{FrameErrors: 30, Workers: 3}); m != want {
			t.Errorf("%s: %+v after resuming, want %+v", trials.Family.Name(), m.Counts, want.Counts)
		}
	}
}

// What seeds give is frozen: a change here changes everybody's records.
func TestRunIsFrozen(t *testing.T) {
	m, _ := run(t, trialsOf(t, channel.BEC{}, 0.4, ""), Measurement{}, Limits{Frames: 1000})
	if want := (Counts{Frames: 1000, FrameErrors: 358, BitErrors: 23360, BitErrorSquares: 1606156, Iterations: 9888}); m.Counts != want {
		t.Errorf("counts %+v, want %+v", m.Counts, want)
	}
}

func TestRunStops(t *testing.T) {
	trials := trialsOf(t, channel.BIAWGN{}, 0.7, Flooding)
	if _, status := run(t, trials, Measurement{}, Limits{Time: time.Millisecond}); status != TimeUp {
		t.Errorf("status %q, want %q", status, TimeUp)
	}
	ctx, cancel := context.WithCancel(context.Background())
	calls := 0
	m, status, err := trials.Run(ctx, Measurement{}, Limits{}, func(m Measurement) {
		if calls++; calls == 2 {
			cancel()
		}
	})
	if err != nil || status != Interrupted || m.Counts.Frames == 0 {
		t.Errorf("status %q after %d frames, error %v; want %q", status, m.Counts.Frames, err, Interrupted)
	}
	if again, _ := run(t, trials, Measurement{}, Limits{Frames: m.Counts.Frames}); again != m {
		t.Errorf("interrupted with %+v, but as many frames give %+v", m.Counts, again.Counts)
	}
	if same, status := run(t, trials, m, Limits{Frames: 1}); same != m || status != EnoughFrames {
		t.Errorf("a limit that is reached already changes the counts: %q, %+v", status, same.Counts)
	}
}

func TestRunRefuses(t *testing.T) {
	good := trialsOf(t, channel.BIAWGN{}, 0.8, Flooding)
	start, _ := run(t, good, Measurement{}, Limits{Frames: 10})
	for _, test := range []struct {
		change func(*Trials, *Measurement, *Limits)
		want   string
	}{
		{func(tr *Trials, _ *Measurement, _ *Limits) { tr.Iterations = -1 }, "iterations -1: must be at least 1"},
		{func(tr *Trials, _ *Measurement, _ *Limits) { tr.Schedule = "random" }, `schedule "random": must be`},
		{func(tr *Trials, m *Measurement, _ *Limits) { tr.Parameter, *m = 0, Measurement{} }, "sigma 0: must"},
		{func(tr *Trials, _ *Measurement, _ *Limits) { tr.Seed = 12 }, "the earlier run was made with"},
		{func(_ *Trials, m *Measurement, _ *Limits) { m.Counts.FrameErrors = 11 }, "frame_errors 11 of 10"},
		{func(_ *Trials, m *Measurement, _ *Limits) { m.Counts.Undetected = -1 }, "undetected_errors -1"},
		{func(_ *Trials, m *Measurement, _ *Limits) { m.Counts.BitErrors = 1 << 40 }, "bit_errors 1099511627776"},
		{func(_ *Trials, m *Measurement, _ *Limits) { m.Counts.BitErrorSquares = 1 << 60 }, "bit_error_squares 1152921504606846976"},
		{func(_ *Trials, m *Measurement, _ *Limits) { m.Counts.Iterations = -1 }, "iterations -1"},
		{func(_ *Trials, _ *Measurement, l *Limits) { l.Frames = -1 }, "limits"},
	} {
		trials, m, limits := good, start, Limits{Frames: 20}
		test.change(&trials, &m, &limits)
		if _, _, err := trials.Run(context.Background(), m, limits, nil); err == nil || !strings.HasPrefix(err.Error(), test.want) {
			t.Errorf("error %v, want %s", err, test.want)
		}
	}
}

// The layered schedule needs fewer iterations and makes about as many errors.
func TestLayeredIsFaster(t *testing.T) {
	flooding, _ := run(t, trialsOf(t, channel.BIAWGN{}, 0.72, Flooding), Measurement{}, Limits{Frames: 2000})
	layered, _ := run(t, trialsOf(t, channel.BIAWGN{}, 0.72, Layered), Measurement{}, Limits{Frames: 2000})
	if ratio := layered.MeanIterations() / flooding.MeanIterations(); ratio > 0.7 {
		t.Errorf("layered needs %.2f of the iterations, want at most 0.7", ratio)
	}
	a, b := flooding.FrameErrorRate(0.999), layered.FrameErrorRate(0.999)
	if a.Low > b.High || b.Low > a.High {
		t.Errorf("frame error rates differ: %+v and %+v", a, b)
	}
}

func ExampleTrials_Run() {
	// A code of rate 1/2 for the harbour telemetry link.
	realization, err := ensembles.Realize(ensembles.Regular(3, 6), 504, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	graph, err := tanner.Build(context.Background(), realization, tanner.Settings{Seed: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	trials := Trials{Graph: graph, Family: channel.BEC{}, Parameter: 0.45, Seed: 1}
	m, status, err := trials.Run(context.Background(), Measurement{}, Limits{FrameErrors: 100}, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(status, m.Counts.FrameErrors, m.FrameErrorRate(0.95).High < 1)
	// Output: frame errors 100 true
}

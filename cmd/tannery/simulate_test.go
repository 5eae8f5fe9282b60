package main

import (
	"encoding/json"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"tannery/cmd/tannery/internal/report"
)

const (
	buoysMatrix = "../../testdata/matrices/buoys.mtx"
	simulation  = "simulate " + buoysMatrix + " --channel biawgn --eb-n0 0.5,1 --frame-errors 150 --seed 9 --no-progress --json"
)

// The counts depend neither on the number of workers nor on the other values
// measured.
func TestSimulationIsReproducible(t *testing.T) {
	want := succeed(t, "", strings.Fields(simulation)...)
	for _, workers := range []string{"1", "3"} {
		if got := succeed(t, "", append(strings.Fields(simulation), "--workers", workers)...); got != want {
			t.Errorf("%s workers: another answer", workers)
		}
	}
	alone := succeed(t, "", strings.Fields(strings.Replace(simulation, "0.5,1", "1", 1))...)
	var all, one report.Simulation
	if err := json.Unmarshal([]byte(want), &all); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal([]byte(alone), &one); err != nil {
		t.Fatal(err)
	}
	if a, b := all.Points[1], one.Points[0]; a.BitErrors != b.BitErrors || a.Frames != b.Frames || a.FrameErrors != 150 {
		t.Errorf("%+v beside another value, %+v alone", a, b)
	}
}

// A measurement that is killed again and again ends in the same counts, and
// leaves nothing but its answer.
func TestKilledSimulationEndsInTheSameCounts(t *testing.T) {
	const line = "simulate " + buoysMatrix + " --channel biawgn --eb-n0 0.5,1.25 --frame-errors 400 --seed 9 --no-progress --json"
	want := succeed(t, "", strings.Fields(line)...)
	folder := t.TempDir()
	state := filepath.Join(folder, "state")
	random := rand.New(rand.NewPCG(31, 32))
	kills := 0
	for {
		cmd, stderr := process(t, append(strings.Fields(line), "--checkpoint", state, "--quiet")...)
		var stdout strings.Builder
		cmd.Stdout = &stdout
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		done := make(chan error, 1)
		go func() { done <- cmd.Wait() }()
		pause := time.Duration(50+random.IntN(500)) * time.Millisecond
		if kills >= 12 {
			pause = time.Hour
		}
		select {
		case <-time.After(pause):
			if err := cmd.Process.Kill(); err != nil && kills == 0 {
				t.Fatal(err)
			}
			<-done
			kills++
			continue
		case err := <-done:
			if code := exitOf(t, err); code != 0 {
				t.Fatalf("exit code %d: %s", code, stderr)
			}
		}
		if kills == 0 {
			t.Error("ended before it was killed")
		}
		if stdout.String() != want {
			t.Errorf("after %d kills another answer", kills)
		}
		break
	}
	left, err := os.ReadDir(folder)
	for _, file := range left {
		if file.Name() != "state.lock" {
			t.Errorf("%s is left", file.Name())
		}
	}
	if err != nil {
		t.Error(err)
	}
}

// An interrupted measurement answers with what it has, keeps its checkpoint and
// ends with 130; one of other settings is refused, and a second process too.
func TestInterruptedSimulation(t *testing.T) {
	state := filepath.Join(t.TempDir(), "state")
	line := strings.Fields("simulate " + buoysMatrix + " --channel biawgn --eb-n0 1,3.5 --no-progress --json --checkpoint " + state)
	cmd, stderr := process(t, line...)
	var stdout strings.Builder
	cmd.Stdout = &stdout
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	for start := time.Now(); time.Since(start) < 20*time.Second; time.Sleep(20 * time.Millisecond) {
		if _, err := os.Stat(state); err == nil {
			break
		}
	}
	if code, _, message := command(t, "", line...); code != exitUsage || !strings.Contains(message, "in use by another process") {
		t.Errorf("second process: code %d, %s", code, message)
	}
	if err := cmd.Process.Signal(os.Interrupt); err != nil {
		t.Fatal(err)
	}
	if code := exitOf(t, cmd.Wait()); code != 130 {
		t.Errorf("exit code %d, want 130; %s", code, stderr)
	}
	var answer report.Simulation
	if err := json.Unmarshal([]byte(stdout.String()), &answer); err != nil || len(answer.Points) == 0 {
		t.Errorf("answer %q: %v", stdout.String(), err)
	}
	before, err := os.ReadFile(state)
	if err != nil {
		t.Fatal(err)
	}
	other := append(line, "--seed", "7")
	if code, _, message := command(t, "", other...); code != exitUsage || !strings.Contains(message, "found the checkpoint of another") {
		t.Errorf("other settings: code %d, %s", code, message)
	}
	if after, err := os.ReadFile(state); err != nil || string(after) != string(before) {
		t.Error("the refused checkpoint has changed")
	}
	// Time that was spent before the interruption is not spent again.
	var short report.Simulation
	if err := json.Unmarshal([]byte(succeed(t, "", append(line, "--time", "1ms")...)), &short); err != nil {
		t.Fatal(err)
	}
	if a, b := answer.Points[0], short.Points[0]; a.Frames != b.Frames || a.BitErrors != b.BitErrors {
		t.Errorf("%d frames interrupted, %d when the time is over", a.Frames, b.Frames)
	}
}

// That theory has nothing to say about a matrix is no reason not to measure it;
// but energy per bit needs bits.
func TestSimulationWithoutThreshold(t *testing.T) {
	const tall = "%%MatrixMarket matrix coordinate pattern general\n4 3 9\n1 1\n1 2\n2 2\n2 3\n3 1\n3 3\n4 1\n4 2\n4 3\n"
	code, stdout, stderr := command(t, tall, "simulate", "-", "--channel", "biawgn", "--parameter", "0.8", "--frames", "50")
	if code != 0 || !strings.Contains(stdout, "frame error rate") || !strings.Contains(stderr, "there is no threshold") {
		t.Errorf("code %d, %s, %s", code, stdout, stderr)
	}
	code, _, stderr = command(t, tall, "simulate", "-", "--channel", "biawgn", "--eb-n0", "3")
	if code != exitUsage || !strings.Contains(stderr, "--eb-n0: needs a design rate above 0, because Eb = Es/rate; found 4 rows for 3 columns; allowed: --parameter or --es-n0") {
		t.Errorf("code %d, %s", code, stderr)
	}
}

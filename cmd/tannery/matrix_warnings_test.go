package main

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"tannery/cmd/tannery/internal/report"
)

// What a matrix or a measurement lacks of what its options promise is said, in
// the answer as well as to people.
func TestMatrixWarnings(t *testing.T) {
	t.Chdir(t.TempDir())
	// Of six columns two and two are alike, and the rows add up to zero.
	const redundant = "%%MatrixMarket matrix coordinate pattern general\n3 6 12\n1 1\n2 1\n1 2\n2 2\n2 3\n3 3\n2 4\n3 4\n1 5\n3 5\n1 6\n3 6\n"
	if err := os.WriteFile("full.mtx", []byte("%%MatrixMarket matrix coordinate pattern general\n2 4 5\n1 1\n1 2\n1 3\n2 3\n2 4\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ line, stdin, want string }{
		{"build --lambda 2:1 --rho 4:1 --length 20 -o m.mtx", "", "no forest: 11 of the 20 variable nodes of degree 2 close cycles among themselves, which are codewords; up to 9, one less than the check nodes, can do without"},
		{"build --lambda 2:1 --rho 4:1 --length 20 -o m.mtx --degree-two free", "", ""},
		{"build --lambda 2:0.2,3:0.8 --rho 6:1 --length 120 -o m.mtx", "", ""},
		{"build --lambda 3:0.5,1000:0.5 --rho 20:1 --length 100 -o m.mtx", "", "100 code bits are too few for the profile: 50% of its edges are of variable degrees up to 1000 that have no node"},
		{"export --lambda 3:0.5,1000:0.5 --rho 20:1 --length 100 -o m.yaml", "", "100 code bits are too few for the profile: 50% of its edges are of variable degrees up to 1000 that have no node"},
		{"simulate - --channel bsc --parameter 0.1 --frames 5", redundant, "the rank is 2, 1 less than rows, so the rate of the code is 0.666666667; Eb/N0 and limits are at the design rate, 0.5"},
		{"simulate full.mtx --channel bsc --parameter 0.1 --frames 5", "", "degree 1"},
	} {
		args := append(strings.Fields(c.line), "--json")
		code, stdout, stderr := command(t, c.stdin, args...)
		var answer struct{ Warnings []string }
		if err := json.Unmarshal([]byte(stdout), &answer); err != nil || code != exitDone {
			t.Fatalf("%s: exit code %d, %v\n%s", c.line, code, err, stderr)
		}
		all := strings.Join(answer.Warnings, "\n")
		if !strings.Contains(all, c.want) || c.want == "" && all != "" || strings.Contains(all, "rank") && !strings.Contains(c.want, "rank") {
			t.Errorf("%s: warnings %q, want %q", c.line, all, c.want)
		}
		if c.want != "" && !strings.Contains(stderr, "tannery: warning: ") {
			t.Errorf("%s: not said to people: %q", c.line, stderr)
		}
	}
}

// The scaling law is about peeling to the end.
func TestNoScalingLawForFewIterations(t *testing.T) {
	t.Chdir(t.TempDir())
	succeed(t, "", strings.Fields("build --lambda 3:1 --rho 6:1 --length 1000 -o m.mtx")...)
	args := strings.Fields("simulate m.mtx --channel bec --parameter 0.4 --frames 20")
	if text := succeed(t, "", args...); !strings.Contains(text, "by law") {
		t.Errorf("to the end: no law in\n%s", text)
	}
	text := succeed(t, "", append(args, "--iterations", "4")...)
	if strings.Contains(text, "by law") || !strings.Contains(text, "decoding to the end, not in 4 iterations\nat most") {
		t.Errorf("in 4 iterations: another text\n%s", text)
	}
	var s report.Simulation
	if err := json.Unmarshal([]byte(succeed(t, "", append(args, "--iterations", "4", "--json")...)), &s); err != nil || s.Points[0].PredictedFrame != nil {
		t.Errorf("in 4 iterations: %+v, %v; want no prediction", s.Points, err)
	}
}

// A time in which no frame ends gives no answer, and says so.
func TestTimeForNoFrame(t *testing.T) {
	code, stdout, stderr := command(t, "", strings.Fields("simulate "+buoysMatrix+" --channel biawgn --eb-n0 1 --time 1ns --json")...)
	const want = "tannery: warning: no frame was finished at σ = 0.8912509381337456 within --time\ntannery: --time: too short, no frame was finished in it; nothing is written\n"
	if code != exitUnreached || stdout != "" || stderr != want {
		t.Errorf("code %d, stdout %q, stderr %q", code, stdout, stderr)
	}
}

// Less than nothing is nothing: the same trials, and no sign.
func TestMinusZeroIsZero(t *testing.T) {
	o := rangeOption{}
	if err := o.Set("-0"); err != nil || math.Signbit(o.values[0]) {
		t.Errorf("-0: %v, %v", o.values, err)
	}
}

// The checkpoint of another measurement is refused, and what may differ named.
func TestForeignMeasurementIsNamed(t *testing.T) {
	state := filepath.Join(t.TempDir(), "state")
	const line = "simulate " + buoysMatrix + " --channel biawgn --eb-n0 1 --frames 1000000 --frame-errors 1000000"
	cmd, _ := process(t, append(strings.Fields(line), "--checkpoint", state)...)
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	for range 600 {
		if info, err := os.Stat(state); err == nil && info.Size() > 0 {
			break
		}
		time.Sleep(50 * time.Millisecond)
	}
	cmd.Process.Kill()
	cmd.Wait()
	before := content(t, state)
	for _, other := range []string{"--seed 2", "--iterations 7", "--schedule layered"} {
		code, _, stderr := command(t, "", append(append(strings.Fields(line), "--checkpoint", state), strings.Fields(other)...)...)
		want := "tannery: " + state + ": found the checkpoint of another measurement: of another matrix, channel, values, iterations, schedule or seed; allowed: that of this measurement, another --checkpoint, or to remove the file and start anew\n"
		if code != exitUsage || stderr != want {
			t.Errorf("%s: code %d, %s", other, code, stderr)
		}
	}
	if string(content(t, state)) != string(before) {
		t.Error("the checkpoint was changed")
	}
}

package main

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"tannery/de/montecarlo"
)

// tinyMatrix is a matrix of which trials cost nothing.
const tinyMatrix = "%%MatrixMarket matrix coordinate pattern general\n3 6 12\n1 1\n1 2\n1 3\n1 4\n2 1\n2 2\n2 5\n2 6\n3 3\n3 4\n3 5\n3 6\n"

// resumed are commands that keep states of their own, with little to do.
var resumed = []string{
	"simulate - --channel bec --parameter 0.3,0.4 --frames 4 --frame-errors 3 -q",
	"sweep --channels bec --rates 0.5 --max-variable-degrees 3,4 --check-degrees 6 -q",
}

// answerForms are the ways in which the answer of a resumed command leaves.
var answerForms = []string{"--json", "--csv", "", "--plot OUT.svg"}

// interruptedState interrupts a command, later each time, until it leaves a
// checkpoint, and returns that. Trials without end are interrupted once there
// is one.
func interruptedState(t testing.TB, line string) checkpointFile {
	t.Helper()
	path := filepath.Join(t.TempDir(), "state")
	args := append(strings.Fields(line), "--checkpoint", path)
	if args[0] == "simulate" {
		args = append(args, "--frames", "1000000000", "--frame-errors", "1000000000")
	}
	for questions := range int64(1000) {
		ctx := newEndingContext(t.Context(), signalError{syscall.SIGINT}, questions)
		ended := make(chan struct{})
		go func() {
			for _, err := os.Stat(path); err != nil && ctx.Context.Err() == nil; _, err = os.Stat(path) {
				time.Sleep(time.Millisecond)
			}
			if args[0] == "simulate" {
				ctx.end(ctx.cause)
			}
			close(ended)
		}()
		var out strings.Builder
		run(ctx, args, strings.NewReader(tinyMatrix), &out, &out)
		ctx.end(ctx.cause)
		<-ended
		var found checkpointFile
		if content, err := os.ReadFile(path); err == nil && json.Unmarshal(content, &found) == nil {
			if args[0] == "simulate" {
				found.State = threeFrames(t, found.State)
			}
			return found
		}
	}
	t.Fatalf("tannery %s: never leaves a checkpoint", line)
	return checkpointFile{}
}

// threeFrames is the state of a measurement after three frames.
func threeFrames(t testing.TB, state []byte) []byte {
	t.Helper()
	var done []timed
	if err := json.Unmarshal(state, &done); err != nil {
		t.Fatal(err)
	}
	done[0].Counts = montecarlo.Counts{Frames: 3, FrameErrors: 1, BitErrors: 2, BitErrorSquares: 4, Iterations: 7}
	done[0].Spent = 1000
	text, err := json.Marshal(done)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// takeUpState continues a command from a state in an intact checkpoint of its
// own. The state is taken, and the command ends with an answer; or it is
// refused, and kept.
func takeUpState(t *testing.T, line, form string, head checkpointFile, state []byte) (taken bool) {
	t.Helper()
	head.State = state
	head.Digest = head.digest()
	content, err := json.Marshal(head)
	if err != nil {
		return false // not JSON: FuzzCheckpoint
	}
	if err := json.Unmarshal(content, &head); err != nil {
		t.Fatal(err)
	}
	head.Digest = head.digest() // of the state without spaces
	if content, err = json.Marshal(head); err != nil {
		t.Fatal(err)
	}
	folder := t.TempDir()
	path := filepath.Join(folder, "state")
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
	form = strings.ReplaceAll(form, "OUT", filepath.Join(folder, "out"))
	code, stdout, stderr := command(t, tinyMatrix, append(strings.Fields(line+" "+form), "--checkpoint", path)...)
	after, err := os.ReadFile(path)
	switch {
	case code == exitDone && (err == nil || stderr != "" || stdout == "" || form == "--json" && !json.Valid([]byte(stdout))):
		t.Errorf("%s\ntaken: stdout %q, stderr %q, checkpoint %q", state, stdout, stderr, after)
	case code == exitUsage && (stdout != "" || !strings.HasPrefix(stderr, "tannery: "+path+": found a damaged checkpoint; allowed: that of this ") || strings.Count(stderr, "\n") != 1):
		t.Errorf("%s\nrefused: stdout %q, stderr %q", state, stdout, stderr)
	case code == exitUsage && !bytes.Equal(after, content):
		t.Errorf("%s\nrefused, and changed to %q, %v", state, after, err)
	case code != exitDone && code != exitUsage:
		t.Errorf("%s\ncode %d, stdout %q, stderr %q", state, code, stdout, stderr)
	}
	return code == exitDone
}

// States that never were are refused: well-formed ones in an intact checkpoint.
func TestForeignStates(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	for _, line := range resumed {
		head := interruptedState(t, line)
		good := string(head.State)
		if !takeUpState(t, line, "--json", head, head.State) {
			t.Fatalf("%s: refused as it was", good)
		}
		swaps := [][2]string{
			{good, "null"}, {good, "{}"}, {good, `"text"`}, {good, "[1,2]"}, {good, "[{},{},{}]"},
			{`"frames":3`, `"frames":-3`}, {`"frames":3`, `"frames":9223372036854775807`}, {`"frames":3`, `"frames":0`}, {`"frames":3`, `"frames":3.5`},
			{`"frame_errors":1`, `"frame_errors":4`}, {`"frame_errors":1`, `"frame_errors":-1`}, {`"nanoseconds":1000`, `"nanoseconds":-1`}, {`"nanoseconds":1000`, `"nanoseconds":9223372036854775807`},
			{`"parameter":0.3`, `"parameter":0.4`}, {`"length":6`, `"length":7`}, {`"channel":"bec"`, `"channel":"\u001b[2J"`},
			{`"rate":0.5`, `"rate":0.6`}, {`"name":"bec-r0.5-d3"`, `"name":"bec-r0.5-d4"`}, {`"status":"`, `"status":"\u001b[2J`}, {`"note":""`, `"note":"\u0007"`},
			{`"threshold":0.`, `"threshold":1.`}, {`"lambda":"3:1"`, `"lambda":"3:0.5,4:0.5"`}, {"threshold: 0.", "threshold: 1."}, {"threshold: 0.", "threshold: -0."},
			{"kind: profile", "kind: brief"}, {`"seconds":`, `"seconds":-1`}, {"results:", "result:"},
		}
		tried := 0
		for _, swap := range swaps {
			if strings.Contains(good, swap[0]) {
				tried++
				if state := strings.Replace(good, swap[0], swap[1], 1); takeUpState(t, line, "--json", head, []byte(state)) {
					t.Errorf("taken:\n%s", state)
				}
			}
		}
		if tried < 12 {
			t.Errorf("%d alterations of %s", tried, good)
		}
	}
}

// A checkpoint is read like any input: not beyond what memory is for.
func TestLargeCheckpoint(t *testing.T) {
	path := filepath.Join(t.TempDir(), "state")
	if err := os.WriteFile(path, []byte("{"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Truncate(path, 1<<40); err != nil { // without taking up room
		t.Skip(err)
	}
	for _, line := range append([]string{resumableSearch}, resumed...) {
		code, stdout, stderr := command(t, tinyMatrix, append(strings.Fields(line), "--checkpoint", path)...)
		if code != exitUsage || stdout != "" || stderr != "tannery: "+path+": larger than 67108864 bytes, the most that is read\n" {
			t.Errorf("tannery %s: code %d, stdout %q, stderr %q", line, code, stdout, stderr)
		}
	}
}

// FuzzStates continues from states of any content; those of searches are
// those of FuzzRestore in optimize.
func FuzzStates(f *testing.F) {
	f.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	var heads []checkpointFile
	for i, line := range resumed {
		heads = append(heads, interruptedState(f, line))
		f.Add(uint8(i), []byte(heads[i].State))
	}
	f.Fuzz(func(t *testing.T, which uint8, state []byte) {
		i, form := int(which)%len(resumed), int(which)/len(resumed)%len(answerForms)
		takeUpState(t, resumed[i], answerForms[form], heads[i], state)
	})
}

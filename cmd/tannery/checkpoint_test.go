package main

import (
	"bytes"
	"encoding/json"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"tannery/cmd/tannery/internal/brief"
	"tannery/optimize"
)

// resumableSearch takes some two seconds, in a hundred pieces of work.
const resumableSearch = "search --channel biawgn --rate 0.5 --max-variable-degree 4 --seed 5 -q "

// uninterrupted returns the profile of resumableSearch.
func uninterrupted(t *testing.T) []byte {
	t.Helper()
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	file := filepath.Join(t.TempDir(), "whole.yaml")
	succeed(t, "", strings.Fields(resumableSearch+"--workers 2 -o "+file)...)
	if _, err := os.Stat(file + ".checkpoint"); err == nil {
		t.Error("the checkpoint of a settled search is still there")
	}
	return content(t, file)
}

func content(t *testing.T, file string) []byte {
	t.Helper()
	b, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// names lists a folder.
func names(t *testing.T, folder string) string {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	var all []string
	for _, e := range entries {
		all = append(all, e.Name())
	}
	return strings.Join(all, " ")
}

// A search that is killed again and again, by SIGKILL at random moments, ends
// in the same profile to the bit as one that was left alone, on one worker or
// two.
func TestKilledSearchEndsInTheSameProfile(t *testing.T) {
	want := uninterrupted(t)
	folder := t.TempDir()
	file := filepath.Join(folder, "best.yaml")
	random := rand.New(rand.NewPCG(4, 2))
	kills := 0
	for kills < 16 {
		cmd, stderr := process(t, strings.Fields(resumableSearch+"--workers 1 -o "+file)...)
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		ended := make(chan error, 1)
		go func() { ended <- cmd.Wait() }()
		// Not before there is a checkpoint, so that every run gets further.
		for deadline := time.Now().Add(time.Minute); time.Now().Before(deadline); time.Sleep(time.Millisecond) {
			if _, err := os.Stat(file + ".checkpoint"); err == nil {
				break
			}
		}
		select {
		case err := <-ended:
			if code := exitOf(t, err); code != exitDone {
				t.Fatalf("exit code %d: %s", code, stderr)
			}
		case <-time.After(time.Duration(random.IntN(400)) * time.Millisecond):
			if err := cmd.Process.Kill(); err != nil {
				t.Fatal(err)
			}
			<-ended
			kills++
			continue
		}
		break
	}
	if _, err := os.Stat(file); err != nil {
		if kills == 0 {
			t.Fatal("nothing was killed, and nothing is written")
		}
		succeed(t, "", strings.Fields(resumableSearch+"--workers 2 -o "+file)...)
	}
	if got := content(t, file); !bytes.Equal(got, want) {
		t.Errorf("after %d kills\n%s\nuninterrupted\n%s", kills, got, want)
	}
	if left := names(t, folder); left != "best.yaml" {
		t.Errorf("left behind: %s", left)
	}
}

// SIGINT and SIGTERM leave the best found and the checkpoint, from which the
// search ends as if nothing had happened.
func TestInterruptedSearchContinues(t *testing.T) {
	want := uninterrupted(t)
	for signal, code := range map[syscall.Signal]int{syscall.SIGINT: 130, syscall.SIGTERM: 143} {
		folder := t.TempDir()
		file := filepath.Join(folder, "best.yaml")
		var stdout, stderr strings.Builder
		// Each time later, until something has been found.
		for questions := int64(1000); ; questions *= 2 {
			ctx := newEndingContext(t.Context(), signalError{signal}, questions)
			if got := run(ctx, strings.Fields(resumableSearch+"-o "+file), strings.NewReader(""), &stdout, &stderr); got != code {
				t.Fatalf("code %d, want %d: %s", got, code, stderr.String())
			}
			if _, err := os.Stat(file); err == nil {
				break
			}
		}
		if left := names(t, folder); left != "best.yaml best.yaml.checkpoint" || !strings.Contains(stdout.String(), "to be continued") {
			t.Fatalf("left %s\n%s", left, stdout.String())
		}
		succeed(t, "", strings.Fields(resumableSearch+"-o "+file)...)
		if got := content(t, file); !bytes.Equal(got, want) {
			t.Errorf("%v: continued\n%s\nuninterrupted\n%s", signal, got, want)
		}
	}
}

// A search out of evaluations is continued by asking for more.
func TestCheckpointElsewhere(t *testing.T) {
	want := uninterrupted(t)
	folder := t.TempDir()
	file, kept := filepath.Join(folder, "best.yaml"), filepath.Join(folder, "state")
	left := kept + ".0123abcd.tmp"
	left = filepath.Join(folder, "."+filepath.Base(left))
	if err := os.WriteFile(left, []byte("half"), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, limit := range []string{"--evaluations 12", "--evaluations 40 --workers 2", ""} {
		succeed(t, "", strings.Fields(resumableSearch+limit+" -o "+file+" --checkpoint "+kept)...)
	}
	if got := content(t, file); !bytes.Equal(got, want) {
		t.Errorf("continued\n%s\nuninterrupted\n%s", got, want)
	}
	if found := names(t, folder); found != "best.yaml" {
		t.Errorf("left behind: %s", found)
	}
}

// A search that has settled is done, also where its profile is not enough for
// the link.
func TestCheckpointOfUnreachedLink(t *testing.T) {
	const text = "kind: brief\nversion: 1\nchannel: biawgn\nlink: {source_rate: 1, symbol_rate: 2, sigma: 0.95}\nvariable_degrees: {allowed: [2, 4]}\ncheck_degrees: {allowed: [6]}\n"
	folder := t.TempDir()
	code, _, stderr := command(t, text, "search", "-", "-o", filepath.Join(folder, "best.yaml"))
	if code != exitUnreached {
		t.Errorf("code %d, %s", code, stderr)
	}
	if found := names(t, folder); found != "best.yaml" {
		t.Errorf("left behind: %s", found)
	}
}

// Checkpoints that are damaged or of another search are refused, and neither
// they nor the profile beside them are touched.
func TestCheckpointsAreRefused(t *testing.T) {
	folder := t.TempDir()
	file := filepath.Join(folder, "best.yaml")
	const search = resumableSearch + "--evaluations 12 "
	succeed(t, "", strings.Fields(search+"-o "+file)...)
	path := file + ".checkpoint"
	good, profile := content(t, path), content(t, file)
	swap := func(old, new string) []byte {
		if bytes.Count(good, []byte(old)) == 0 {
			t.Fatalf("no %s in %s", old, good)
		}
		return bytes.Replace(good, []byte(old), []byte(new), 1)
	}
	const anew = "another --checkpoint, or to remove the file and start anew"
	const damaged = "found a damaged checkpoint, which does not match its digest; allowed: that of this search, " + anew
	const none = "found no checkpoint, or a damaged one; allowed: that of this search, " + anew
	const other = "found the checkpoint of another brief or seed; allowed: that of this search, " + anew
	for _, c := range []struct {
		name    string
		content []byte
		options string
		want    string
	}{
		{"empty", nil, "", none},
		{"truncated", good[:len(good)/2], "", none},
		{"one digit of the state", swap(`"Phase":1`, `"Phase":2`), "", damaged},
		{"something behind it", append(bytes.Clone(good), "{}"...), "", none},
		{"unknown key", swap(`{"kind"`, `{"state2":1,"kind"`), "", none},
		{"a key twice", swap(`{"kind"`, `{"version":1,"kind"`), "", none},
		{"a profile", profile, "", none},
		{"of a sweep", swap(`"kind":"checkpoint"`, `"kind":"series"`), "", "found the checkpoint of a series; allowed: that of this search, " + anew},
		{"of trials", swap(`"kind":"checkpoint"`, `"kind":"measurement"`), "", "found the checkpoint of a measurement; allowed: that of this search, " + anew},
		{"of something else", swap(`"kind":"checkpoint"`, `"kind":"\u001b[2J"`), "", none},
		{"text", []byte("not written by the program\n"), "", none},
		{"another program", swap(program, "tannery 9.9.9"), "", "found the checkpoint of tannery 9.9.9, version 1; allowed: that of " + program + ", version 1, " + anew},
		{"another version", swap(`"version":1`, `"version":2`), "", "found the checkpoint of " + program + ", version 2; allowed: that of " + program + ", version 1, " + anew},
		{"another seed", good, "--seed 6", other},
		{"another rate", good, "--rate 0.51", other},
		{"another channel", good, "--channel bsc", other},
		{"another limit", good, "--max-iterations 50", other},
	} {
		t.Run(c.name, func(t *testing.T) {
			if err := os.WriteFile(path, c.content, 0o600); err != nil {
				t.Fatal(err)
			}
			args := search
			if strings.HasPrefix(c.options, "--channel") {
				args = strings.Replace(args, "--channel biawgn", "", 1)
			}
			code, stdout, stderr := command(t, "", strings.Fields(args+"-o "+file+" "+c.options)...)
			if want := "tannery: " + path + ": " + c.want + "\n"; code != exitUsage || stdout != "" || stderr != want {
				t.Errorf("code %d, stdout %q\n got %swant %s", code, stdout, stderr, want)
			}
			if !bytes.Equal(content(t, path), c.content) || !bytes.Equal(content(t, file), profile) {
				t.Error("a file was changed")
			}
			if left := names(t, folder); left != "best.yaml best.yaml.checkpoint" {
				t.Errorf("left behind: %s", left)
			}
		})
	}
}

// What a measured channel is made of belongs to the search, not only the name
// of its file.
func TestCheckpointOfAnotherMeasurement(t *testing.T) {
	folder := t.TempDir()
	file, measured := filepath.Join(folder, "best.yaml"), filepath.Join(folder, "llr.csv")
	args := strings.Fields("search --channel " + measured + " --rate 0.5 --max-variable-degree 4 --check-degrees 6 --evaluations 5 -q -o " + file)
	if err := os.WriteFile(measured, content(t, "../../testdata/channels/receiver.csv"), 0o600); err != nil {
		t.Fatal(err)
	}
	succeed(t, "", args...)
	if err := os.WriteFile(measured, []byte("llr,mass\n-3,0.047425873\n3,0.952574127\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	before := content(t, file+".checkpoint")
	code, _, stderr := command(t, "", args...)
	if code != exitUsage || !strings.Contains(stderr, "another problem") || !bytes.Equal(content(t, file+".checkpoint"), before) {
		t.Errorf("code %d, %s", code, stderr)
	}
}

func TestCheckpointInUse(t *testing.T) {
	file := filepath.Join(t.TempDir(), "best.yaml")
	lock, ok, err := lockFile(file + ".checkpoint.lock")
	if err != nil || !ok {
		t.Fatal(ok, err)
	}
	code, stdout, stderr := command(t, "", strings.Fields(resumableSearch+"--evaluations 12 -o "+file)...)
	if want := "tannery: " + file + ".checkpoint: found in use by another process; allowed: to wait for it, or another --checkpoint\n"; code != exitUsage || stdout != "" || stderr != want {
		t.Errorf("code %d, stdout %q\n got %swant %s", code, stdout, stderr, want)
	}
	unlockFile(lock)
	succeed(t, "", strings.Fields(resumableSearch+"--evaluations 12 -o "+file)...)
}

func TestCheckpointOptions(t *testing.T) {
	folder := t.TempDir()
	for args, want := range map[string]string{
		quickSearch + " --checkpoint state":                                "--checkpoint: found state; allowed: nothing, because this search ends within seconds; only --method quantized takes longer",
		resumableSearch + "-o a.yaml --checkpoint ./a.yaml":                "--checkpoint and --output: found the same file, ./a.yaml; allowed: two",
		resumableSearch + "--checkpoint -":                                 `--checkpoint "-": must be a file name`,
		resumableSearch + "--checkpoint " + folder:                         "--checkpoint " + folder + ": found what is no file; allowed: a file",
		resumableSearch + "--evaluations 0":                                `--evaluations: found "0"; allowed: a whole number from 1 to 1000000000`,
		resumableSearch + "--target-error 1e-3":                            "--target-error: found 0.001; allowed: it beside a number of iterations",
		"search --channel ../../testdata/channels/receiver.csv --rate 0.7": "--rate: found 0.7; allowed: less than 0.628883, the capacity of receiver as measured",
		resumableSearch + "--degree-two odd":                               `--degree-two: found "odd"; allowed: parity or free`,
		resumableSearch + "--degradation flip":                             "--degradation: found flip; allowed: nothing, because no channel is a file",
		"search --channel bec,bec --rate 0.5":                              `--channel: found "bec,bec"; allowed: each channel once`,
		"search --channel biawgn,bsc --method exact --rate 0.5":            "--method: found exact; allowed for a search on several channels: quantized (exact searches on bec, gaussian on biawgn)",
		"search --channel ./none.csv --rate 0.5":                           "./none.csv: cannot be read: no such file or directory",
		"search --channel ../../testdata/channels/buoy.csv --rate 0.5":     "../../testdata/channels/buoy.csv: 3 inputs: must be 2 for density evolution",
	} {
		code, stdout, stderr := command(t, "", strings.Fields(args)...)
		if code != exitUsage || stdout != "" || stderr != "tannery: "+want+"\n" {
			t.Errorf("tannery %s\ncode %d, stdout %q\n got %swant tannery: %s", args, code, stdout, stderr, want)
		}
	}
}

// Whatever is accepted is what was written, byte for byte but for spaces.
func FuzzCheckpoint(f *testing.F) {
	head, err := checkpointHead(brief.Brief{Channel: "bsc", Rate: 0.5}, optimize.QuantizedDesign{})
	if err != nil {
		f.Fatal(err)
	}
	c := &checkpoint{path: "state", head: head}
	good, err := c.encode([]byte(`{"Format":1,"Points":[{"Gap":0.25}]}`))
	if err != nil {
		f.Fatal(err)
	}
	if state, err := c.decode(good); err != nil || len(state) == 0 {
		f.Fatalf("%s, %v", state, err)
	}
	f.Add(good)
	f.Add(good[:len(good)/2])
	f.Add([]byte(`{"kind":"checkpoint","version":1}`))
	f.Add([]byte("kind: checkpoint"))
	f.Fuzz(func(t *testing.T, content []byte) {
		state, err := c.decode(content)
		if err != nil {
			return
		}
		again, err := c.encode(state)
		var a, b bytes.Buffer
		if err != nil || json.Compact(&a, again) != nil || json.Compact(&b, content) != nil || a.String() != b.String() {
			t.Errorf("accepted %s, which is written as %s", content, again)
		}
	})
}

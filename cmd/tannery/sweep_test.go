package main

import (
	"encoding/csv"
	"encoding/json"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"tannery/cmd/tannery/internal/report"
	"tannery/optimize"
)

// series runs a command that does several searches and returns its rows
// without running times.
func series(t *testing.T, args string) []report.SeriesRow {
	t.Helper()
	var answer report.Series
	if err := json.Unmarshal([]byte(succeed(t, "", strings.Fields(args+" --json")...)), &answer); err != nil {
		t.Fatal(err)
	}
	for i := range answer.Rows {
		answer.Rows[i].Seconds = 0
	}
	return answer.Rows
}

// Each cell of a sweep is the search that it stands for.
func TestSweepIsSearches(t *testing.T) {
	rows := series(t, "sweep --channels bec --rates 0.4,0.6 --max-variable-degrees 5,9")
	if len(rows) != 4 {
		t.Fatalf("%d rows: want 4", len(rows))
	}
	var one struct {
		Threshold struct{ Threshold float64 }
	}
	text := succeed(t, "", strings.Fields("search --channel bec --rate 0.6 --max-variable-degree 5 --json")...)
	if err := json.Unmarshal([]byte(text), &one); err != nil {
		t.Fatal(err)
	}
	if got, want := rows[2].Threshold, one.Threshold.Threshold; got != want {
		t.Errorf("%s: threshold %v: the search has %v", rows[2].Name, got, want)
	}
	for i := 0; i < len(rows); i += 2 {
		if rows[i+1].Threshold < rows[i].Threshold {
			t.Errorf("%s is worse than %s, which its degrees include", rows[i+1].Name, rows[i].Name)
		}
	}
}

func TestSweepCSVAndUnreachable(t *testing.T) {
	text := succeed(t, "", strings.Fields("sweep --channels bec --rates 0.5,0.9 --max-variable-degrees 4 --check-degrees 7,8 --csv")...)
	lines, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(lines) != 3 {
		t.Fatalf("%d lines: want 3", len(lines))
	}
	status, threshold := 7, 8
	if lines[1][status] != optimize.Settled.String() || lines[1][threshold] == "" {
		t.Errorf("rate 0.5: %v", lines[1])
	}
	if lines[2][status] != "unreachable" || lines[2][threshold] != "" {
		t.Errorf("rate 0.9 with check degrees 7 and 8: %v", lines[2])
	}
}

const killedSweep = "sweep --channels bec --rates 0.3,0.4,0.5,0.6 --max-variable-degrees 7,12 --no-progress"

// A sweep that is killed again and again ends in the same table, and in the
// same profiles, as one that is not.
func TestKilledSweepEndsInTheSameTable(t *testing.T) {
	want := series(t, killedSweep)
	folder := t.TempDir()
	state, profiles := filepath.Join(folder, "state"), filepath.Join(folder, "profiles")
	args := killedSweep + " --checkpoint " + state + " --profiles " + profiles
	random := rand.New(rand.NewPCG(7, 7))
	for range 10 {
		cmd, _ := process(t, strings.Fields(args)...)
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		time.Sleep(time.Duration(50+random.IntN(700)) * time.Millisecond)
		cmd.Process.Kill()
		cmd.Wait()
	}
	got := series(t, args)
	for i := range want {
		if got[i] != want[i] && (got[i].Lambda != want[i].Lambda || got[i].Rho != want[i].Rho || got[i].Threshold != want[i].Threshold) {
			t.Errorf("row %d:\n%+v\nuninterrupted\n%+v", i, got[i], want[i])
		}
		if _, err := os.Stat(filepath.Join(profiles, want[i].Name+".yaml")); err != nil {
			t.Error(err)
		}
	}
	if _, err := os.Stat(state); err == nil {
		t.Error("the checkpoint of a finished sweep was not removed")
	}
}

// A checkpoint of another series is refused and kept.
func TestForeignSweepCheckpoint(t *testing.T) {
	state := filepath.Join(t.TempDir(), "state")
	const text = "not a checkpoint\n"
	if err := os.WriteFile(state, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	code, _, stderr := command(t, "", strings.Fields(killedSweep+" --checkpoint "+state)...)
	if code != exitUsage || !strings.Contains(stderr, "found no checkpoint, or a damaged one") {
		t.Errorf("exit code %d: %s", code, stderr)
	}
	if left, err := os.ReadFile(state); err != nil || string(left) != text {
		t.Errorf("the file was changed: %q, %v", left, err)
	}
}

func TestBadSeries(t *testing.T) {
	for args, want := range map[string]string{
		"sweep --channels bec --rates x":                    `--rates: found "x"; allowed: in a list with commas, a number above 0 and below 1`,
		"sweep --channels bec --rates 0.5,0.5":              "bec-r0.5-d15: found twice; allowed: each channel, rate and degree once",
		"sweep --channels bec --rates 0.5 --rate 0.4":       "--rate: found in tannery sweep; allowed: what tannery sweep --help lists",
		"sweep --channels bec --rates 0.5 --csv --json":     "--csv and --json: only one of the two",
		"sweep --channels bec --rates 0.5,0.6 --plot x.svg": "--plot: a picture shows one channel and one rate",
		"sweep -":                           "-: found standard input; allowed: a file, because the brief is read for each search",
		"tradeoff --channel bec --rate 0.5": "--at: missing; allowed: a list of limits, such as 2.8,3,3.2 edges per bit or 10,20,40 iterations",
		"tradeoff --channel bec --rate 0.5 --at 3,-1":                     `--at: found "-1"; allowed: in a list with commas, a number of at least 1`,
		"tradeoff --channel bec --rate 0.5 --at 3,3.0":                    "--at: found 3 twice; allowed: each limit once",
		"tradeoff --channel bec --rate 0.5 --at 3 --max-edges-per-bit 3":  "--max-edges-per-bit: found in tannery tradeoff; allowed: what tannery tradeoff --help lists",
		"tradeoff --channel bec --rate 0.5 --at 1.5 --against iterations": `--at: found "1.5"; allowed: in a list with commas, a whole number from 1 to 1000000`,
		"sweep": "--channels: missing; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name\ntannery: --rates: missing; allowed: a number above 0 and below 1\n",
		"sweep ../../testdata/briefs/harbour.yaml --channels biawgn --max-variable-degrees 3,0": `--max-variable-degrees: found "0"; allowed: in a list with commas, a whole number from 2 to 1000000`,
		"sweep --channels bec --rates 0.5 --max-variable-degrees 3 --variable-degrees 3":        "--max-variable-degrees and --variable-degrees: only one of the two",
		"sweep --channels bec --rates 0.5 --profiles=":                                          `--profiles "": must be the name of a folder`,
		"sweep --channels bec,bce --rates 0.5":                                                  `--channels: found "bce"; allowed: in a list with commas, bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name; did you mean bec?`,
		"tradeoff --channel bec --rate 0.5 --at 3,1.5":                                          "--at: found 1.5; allowed: at least 2, the least variable degree",
		"tradeoff --channel bec --rate 0.5 --at 3 --against time":                               "--against",
		"sweep --channels bec --rates 0.5 --max-variable-degrees 5,,8 --csv":                    "--max-variable-degrees",
	} {
		code, stdout, stderr := command(t, "", strings.Fields(args)...)
		if code != exitUsage || stdout != "" || !strings.Contains(stderr, want) {
			t.Errorf("tannery %s: exit code %d\n%s\nwant %s", args, code, stderr, want)
		}
	}
}

// A looser limit never has a worse threshold.
func TestTradeoffIsMonotone(t *testing.T) {
	for _, args := range []string{
		"tradeoff --channel bec --rate 0.5 --max-variable-degree 12 --at 3.4,2.8,3",
		"tradeoff --channel biawgn --rate 0.5 --variable-degrees 2,3,5 --against iterations --at 10,30 --target-error 1e-4",
	} {
		rows := series(t, args)
		for i, r := range rows {
			if r.MaxEdgesPerBit > 0 && r.EdgesPerBit > r.MaxEdgesPerBit*(1+1e-9) {
				t.Errorf("%s has %v edges per bit", r.Name, r.EdgesPerBit)
			}
			if i > 0 && r.Threshold < rows[i-1].Threshold {
				t.Errorf("%s: threshold %v is below that of %s, %v", r.Name, r.Threshold, rows[i-1].Name, rows[i-1].Threshold)
			}
		}
	}
}

// A folder in which the profiles cannot be written is found out before the
// searches, as is one in which they would replace a file of the command line.
func TestProfilesThatCannotBeWritten(t *testing.T) {
	folder := t.TempDir()
	brief := filepath.Join(folder, "bec-r0.5-d5.yaml")
	const text = "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\n"
	if err := os.WriteFile(brief, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(filepath.Join(folder, "bec-r0.5-d9.yaml"), 0o700); err != nil {
		t.Fatal(err)
	}
	for args, want := range map[string]string{
		"sweep --channels bec --rates 0.5 --max-variable-degrees 4,9 --profiles " + folder: "--profiles " + folder + "/bec-r0.5-d9.yaml: cannot be written: is a directory",
		"sweep " + brief + " --max-variable-degrees 4,5 --profiles " + folder:              "--profiles " + folder + ": found " + brief + ", which is read or written for something else; allowed: another folder",
		"sweep --channels bec --rates 0.5 --max-variable-degrees 4,6 --profiles " + folder + " --checkpoint " + folder + "/./bec-r0.5-d6.yaml": "--profiles " + folder + ": found " +
			folder + "/bec-r0.5-d6.yaml, which is read or written for something else; allowed: another folder",
	} {
		code, stdout, stderr := command(t, "", strings.Fields(args)...)
		if code == exitDone || stdout != "" || stderr != "tannery: "+want+"\n" {
			t.Errorf("tannery %s: exit code %d, %s%s", args, code, stdout, stderr)
		}
		if left := names(t, folder); left != "bec-r0.5-d5.yaml bec-r0.5-d9.yaml" || string(content(t, brief)) != text {
			t.Errorf("tannery %s: left %s", args, left)
		}
	}
}

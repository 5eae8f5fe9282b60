package main

import (
	"bytes"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"
)

// Products that are killed while they come about, by SIGKILL at random moments,
// are there whole or not at all, and an older one stays as it was.
func TestKilledProductsAreWhole(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	random := rand.New(rand.NewPCG(41, 42))
	for _, line := range []string{
		"export --lambda 2:0.3,3:0.7 --rho 6:1 --channel biawgn --length 3000 -q -o ",
		"build --lambda 3:1 --rho 6:1 --length 4000 -q -o ",
	} {
		file := filepath.Join(t.TempDir(), "product")
		start := time.Now()
		cmd, stderr := process(t, strings.Fields(line+file)...)
		if err := cmd.Run(); err != nil {
			t.Fatalf("%v: %s", err, stderr)
		}
		took := time.Since(start)
		want := content(t, file)
		before := []byte("before\n")
		for range 12 {
			if err := os.WriteFile(file, before, 0o600); err != nil {
				t.Fatal(err)
			}
			cmd, _ := process(t, strings.Fields(line+file)...)
			if err := cmd.Start(); err != nil {
				t.Fatal(err)
			}
			time.Sleep(time.Duration(random.Int64N(int64(took) * 11 / 10)))
			cmd.Process.Kill()
			cmd.Wait()
			if got := content(t, file); !bytes.Equal(got, before) && !bytes.Equal(got, want) {
				t.Fatalf("%s: %d bytes, neither the old nor the new ones", line, len(got))
			}
		}
		// What was left half-written goes with the next writing.
		succeed(t, "", strings.Fields(line+file)...)
		if left := names(t, filepath.Dir(file)); left != "product" {
			t.Errorf("left behind: %s", left)
		}
	}
}

// Where a file can grow no further the command fails, says so, and leaves
// neither a part nor a temporary file; an older file stays as it was.
func TestNoRoom(t *testing.T) {
	if runtime.GOOS != "linux" {
		t.Skip("the size of files is limited in the way of Linux")
	}
	for _, line := range []string{
		"export ru01-r50-d3 --length 3000 -q -o product",
		"build --lambda 3:1 --rho 6:1 --length 3000 -q -o product",
		"search --channel bec --rate 0.5 --max-variable-degree 8 -q -o product",
		"trace ru01-r50-d3 --channel bec --parameter 0.4 -q --plot product.svg",
		"report ru01-r50-d3 --channel bec -q -o product.html",
	} {
		t.Run(strings.Fields(line)[0], func(t *testing.T) {
			folder := t.TempDir()
			words := strings.Fields(line)
			name := words[len(words)-1]
			file := filepath.Join(folder, name)
			words[len(words)-1] = file
			if err := os.WriteFile(file, []byte("before\n"), 0o600); err != nil {
				t.Fatal(err)
			}
			cmd, stderr := process(t, words...)
			cmd.Env = append(os.Environ(), asTannery+"=cramped")
			err := cmd.Run()
			if code := exitOf(t, err); code != exitFailed || !strings.Contains(stderr.String(), file+": cannot be written: file too large") {
				t.Errorf("exit code %d, stderr %q", code, stderr)
			}
			if left := names(t, folder); left != name || string(content(t, file)) != "before\n" {
				t.Errorf("left behind: %s, of which %s is %q", left, name, content(t, file))
			}
		})
	}
}

// A search whose checkpoint cannot be written says so and goes on.
func TestNoRoomForCheckpoint(t *testing.T) {
	if runtime.GOOS != "linux" {
		t.Skip("the size of files is limited in the way of Linux")
	}
	state := filepath.Join(t.TempDir(), "state")
	cmd, stderr := process(t, strings.Fields("search --channel biawgn --rate 0.5 --max-variable-degree 4 --evaluations 60 --no-progress --json --checkpoint "+state)...)
	cmd.Env = append(os.Environ(), asTannery+"=cramped")
	out, err := cmd.Output()
	if code := exitOf(t, err); code != exitDone || !bytes.Contains(out, []byte(`"profile"`)) || !strings.Contains(stderr.String(), "cannot be written: file too large") {
		t.Errorf("exit code %d, stdout of %d bytes, stderr %q", code, len(out), stderr)
	}
	if _, err := os.Stat(state); err == nil {
		t.Error("a part of the checkpoint is left")
	}
}

// Standard output on a full device is a failure that is told.
func TestFullStandardOutput(t *testing.T) {
	full, err := os.OpenFile("/dev/full", os.O_WRONLY, 0)
	if err != nil {
		t.Skip("no /dev/full here")
	}
	defer full.Close()
	for _, line := range []string{
		"limit --channel bec --rate 0.5",
		"threshold ru01-r50-d3 --channel bec --json",
		"trace ru01-r50-d3 --channel bec --parameter 0.4 --csv",
		"export ru01-r50-d3 --length 100",
		"build ru01-r50-d3 --length 100 -o -",
		"simulate " + buoysMatrix + " --channel bec --parameter 0.44 --frames 10",
		"catalog",
		"schema profile",
		"--help",
	} {
		cmd, stderr := process(t, strings.Fields(line)...)
		cmd.Stdout = full
		if code := exitOf(t, cmd.Run()); code != exitFailed || !strings.Contains(stderr.String(), "no space left on device") {
			t.Errorf("tannery %s: exit code %d, stderr %q", line, code, stderr)
		}
	}
}

// A folder that nobody may write to is found out before the work.
func TestReadOnlyFolder(t *testing.T) {
	folder := t.TempDir()
	if err := os.Chmod(folder, 0o500); err != nil {
		t.Fatal(err)
	}
	if os.Geteuid() == 0 {
		// The superuser may write there; but not here.
		if folder = "/proc/self"; runtime.GOOS != "linux" {
			t.Skip("the superuser may write everywhere")
		}
	}
	for _, line := range []string{
		"export ru01-r50-d3 --length 100 -o ",
		"build ru01-r50-d3 --length 100 -o ",
		"search --channel bec --rate 0.5 --max-variable-degree 8 -o ",
		"report ru01-r50-d3 --channel bec -o ",
		"profile " + buoysMatrix + " -o ",
	} {
		code, stdout, stderr := command(t, "", strings.Fields(line+filepath.Join(folder, "product"))...)
		if code != exitFailed || stdout != "" || !strings.HasPrefix(stderr, "tannery: --output "+folder+"/product: cannot be written: ") {
			t.Errorf("tannery %s: exit code %d, stdout %q, stderr %q", line, code, stdout, stderr)
		}
	}
}

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

// writers are commands that write a file named last, one of each way to write.
var writers = []string{
	"export ru01-r50-d3 --length 3000 -q -o product",
	"build --lambda 3:1 --rho 6:1 --length 3000 -q -o product",
	"search --channel bec --rate 0.5 --max-variable-degree 8 -q -o product",
	"trace ru01-r50-d3 --channel bec --parameter 0.4 -q --plot product.svg",
	"report ru01-r50-d3 --channel bec -q -o product.html",
}

// A product that is killed by SIGKILL while its file is being written is not
// there at all, and an older one stays as it was. The matrix is one that takes
// many writings; each kill waits until a random part of it is on disk.
func TestKilledProductsAreWhole(t *testing.T) {
	random := rand.New(rand.NewPCG(41, 42))
	folder := t.TempDir()
	file := filepath.Join(folder, "product")
	line := strings.Fields("build --lambda 3:1 --rho 6:1 --length 100000 --construction randomized --girth 4 -q -o " + file)
	cmd, stderr := process(t, line...)
	if err := cmd.Run(); err != nil {
		t.Fatalf("%v: %s", err, stderr)
	}
	want, before := content(t, file), []byte("before\n")
	const kills, tries = 8, 40
	within := 0
	for range tries {
		if within == kills {
			break
		}
		if err := os.WriteFile(file, before, 0o600); err != nil {
			t.Fatal(err)
		}
		for _, left := range temporaries(t, file) { // of the kill before
			os.Remove(left)
		}
		cmd, stderr := process(t, line...)
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		part := 1 + random.Int64N(int64(len(want)))
		deadline := time.Now().Add(time.Minute)
		for left := int64(-1); left < part && sizeOf(file) == int64(len(before)); left = halfWritten(t, file) {
			if time.Now().After(deadline) {
				t.Fatalf("nothing was written: %s", stderr)
			}
			time.Sleep(20 * time.Microsecond)
		}
		cmd.Process.Kill()
		cmd.Wait()
		switch got := content(t, file); {
		case bytes.Equal(got, before) && halfWritten(t, file) >= part:
			within++
		case !bytes.Equal(got, before) && !bytes.Equal(got, want):
			t.Fatalf("%d bytes, neither the old %d nor the new %d ones", len(got), len(before), len(want))
		}
	}
	if within < kills {
		t.Errorf("%d of %d kills came while the file was being written, want %d", within, tries, kills)
	}
	// What was left half-written goes with the next writing.
	succeed(t, "", line...)
	if left := names(t, folder); left != "product" || !bytes.Equal(content(t, file), want) {
		t.Errorf("left behind: %s", left)
	}
}

// sizeOf returns the size of a file, -1 without one.
func sizeOf(file string) int64 {
	info, err := os.Stat(file)
	if err != nil {
		return -1
	}
	return info.Size()
}

// halfWritten returns the size of the temporary file beside a target, -1
// without one.
func halfWritten(t *testing.T, file string) int64 {
	t.Helper()
	left := temporaries(t, file)
	if len(left) == 0 {
		return -1
	}
	return sizeOf(left[0])
}

func temporaries(t *testing.T, file string) []string {
	t.Helper()
	left, err := filepath.Glob(filepath.Join(filepath.Dir(file), "."+filepath.Base(file)+".*.tmp"))
	if err != nil {
		t.Fatal(err)
	}
	return left
}

// Writing never touches the content of an older file: it stays under a second
// name that it has.
func TestProductsAreNotWrittenInPlace(t *testing.T) {
	for _, line := range writers {
		t.Run(strings.Fields(line)[0], func(t *testing.T) {
			folder := t.TempDir()
			words := strings.Fields(line)
			file := filepath.Join(folder, words[len(words)-1])
			words[len(words)-1] = file
			older := filepath.Join(folder, "older")
			if err := os.WriteFile(file, []byte("before\n"), 0o600); err != nil {
				t.Fatal(err)
			}
			if err := os.Link(file, older); err != nil {
				t.Skip("no second names here: ", err)
			}
			succeed(t, "", words...)
			if got := string(content(t, older)); got != "before\n" || string(content(t, file)) == got {
				t.Errorf("the older file holds %d bytes", len(got))
			}
		})
	}
}

// Where a file can grow no further the command fails, says so, and leaves
// neither a part nor a temporary file; an older file stays as it was.
func TestNoRoom(t *testing.T) {
	if runtime.GOOS != "linux" {
		t.Skip("the size of files is limited in the way of Linux")
	}
	for _, line := range writers {
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

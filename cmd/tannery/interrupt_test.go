package main

import (
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

// Every command that computes stops at a signal, says so in one line of its
// own words, and leaves no file but a checkpoint. When it stops is random, so
// that some may be done before.
func TestInterruptedCommands(t *testing.T) {
	for _, line := range []string{
		"threshold ru01-r50-d3 --channel rayleigh --iterations 1000000 --target-error 1e-15",
		"threshold rsu01-r50-d15 --channel biawgn",
		"threshold ru01-r50-d3 --channel biawgn --method gaussian --iterations 1000000 --target-error 1e-15",
		"trace ru01-r50-d3 --channel biawgn --parameter 0.880910 --iterations 1000000 --plot OUT.svg",
		"compare rsu01-r50-d15 rsu01-r50-d20 rsu01-r50-d30 --channel biawgn --plot OUT.svg",
		"export rsu01-r50-d30 --channel biawgn --length 64800 -o OUT",
		"report rsu01-r50-d30 --channel biawgn -o OUT",
		"sweep --channels biawgn --rates 0.5 --max-variable-degrees 4,5 --plot OUT.svg --checkpoint OUT",
		"tradeoff --channel biawgn --rate 0.5 --at 2.8,3 --plot OUT.svg --checkpoint OUT",
		"build rsu01-r50-d15 --length 20000 -o OUT",
		"profile - -o OUT",
	} {
		t.Run(strings.Fields(line)[0], func(t *testing.T) {
			stopped := 0
			for _, questions := range []int64{0, 3, 50} {
				folder := t.TempDir()
				args := strings.Fields(strings.ReplaceAll(line, "OUT", filepath.Join(folder, "out")))
				var stdout, stderr strings.Builder
				ctx := newEndingContext(t.Context(), signalError{syscall.SIGINT}, questions)
				code := run(ctx, append(args, "-q"), strings.NewReader(string(content(t, buoysMatrix))), &stdout, &stderr)
				switch {
				case code == exitDone:
					continue
				case code != exitSignalBase+int(syscall.SIGINT) || stderr.String() != "tannery: interrupted\n" || stdout.Len() > 0:
					t.Errorf("after %d questions: exit code %d, stdout %q, stderr %q", questions, code, stdout.String(), stderr.String())
				}
				stopped++
				if _, err := os.Stat(filepath.Join(folder, "out.svg")); err == nil {
					t.Error("a picture is written")
				}
				if left := names(t, folder); left != "" && left != "out" {
					t.Errorf("left behind: %s", left)
				}
			}
			if stopped == 0 {
				t.Error("never stopped")
			}
		})
	}
}

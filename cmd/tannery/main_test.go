package main

import (
	"context"
	"errors"
	"io"
	"os"
	"strings"
	"syscall"
	"testing"
)

// command runs one command line in process.
func command(t *testing.T, stdin string, args ...string) (code int, stdout, stderr string) {
	t.Helper()
	var out, errs strings.Builder
	code = run(t.Context(), args, strings.NewReader(stdin), &out, &errs)
	return code, out.String(), errs.String()
}

// succeed runs a command line that must end with 0, and returns its answer.
func succeed(t *testing.T, stdin string, args ...string) string {
	t.Helper()
	code, stdout, stderr := command(t, stdin, args...)
	if code != exitDone {
		t.Fatalf("tannery %s: exit code %d\n%s", strings.Join(args, " "), code, stderr)
	}
	return stdout
}

func TestUnknownNamesAreSuggested(t *testing.T) {
	for _, c := range []struct{ args, want string }{
		{"exprot", "tannery: exprot: unknown command; did you mean export?; tannery --help lists them\n"},
		{"frobnicate", "tannery: frobnicate: unknown command; tannery --help lists them\n"},
		{"limit --chanel bec", "tannery: --chanel: unknown option; did you mean --channel?\n"},
		{"limit -z", "tannery: -z: unknown option\n"},
		{"limit --channel biawg", "tannery: --channel: found \"biawg\"; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name; did you mean biawgn?\n"},
		{"limit extra", "tannery: \"extra\": unexpected; limit takes options only\n"},
	} {
		code, stdout, stderr := command(t, "", strings.Fields(c.args)...)
		if code != exitUsage || stdout != "" || stderr != c.want {
			t.Errorf("tannery %s: code %d, stdout %q, stderr %q; want code 2 and %q", c.args, code, stdout, stderr, c.want)
		}
	}
}

func TestHelpShowsExamplesFirst(t *testing.T) {
	root := newRoot()
	for _, c := range append(root.Commands(), root) {
		if c.Name() == "completion" || c.Name() == "help" {
			continue
		}
		args := append(strings.Fields(c.CommandPath())[1:], "--help")
		text := succeed(t, "", args...)
		examples, options := strings.Index(text, "\nExamples\n"), strings.Index(text, "\nOptions\n")
		if examples < 0 || options < examples {
			t.Errorf("tannery %s: examples at %d, options at %d", strings.Join(args, " "), examples, options)
		}
		for line := range strings.Lines(text) {
			if n := len([]rune(strings.TrimRight(line, "\n"))); n > 80 {
				t.Errorf("tannery %s: %d columns: %s", strings.Join(args, " "), n, line)
			}
		}
	}
}

// failingWriter is a standard output that does not take what it is given.
type failingWriter struct{ err error }

func (w failingWriter) Write([]byte) (int, error) { return 0, w.err }

func TestStandardOutputThatFails(t *testing.T) {
	full := &os.PathError{Op: "write", Path: "/dev/stdout", Err: syscall.ENOSPC}
	closed := &os.PathError{Op: "write", Path: "/dev/stdout", Err: syscall.EPIPE}
	for _, c := range []struct {
		err  error
		code int
		want string
	}{
		{closed, 141, ""},
		{full, exitFailed, "tannery: standard output: write /dev/stdout: no space left on device\n"},
	} {
		for _, args := range [][]string{{"--help"}, {"limit", "--channel", "bec", "--rate", "0.5"}, {"limit", "--channel", "bec", "--rate", "0.5", "--json"}} {
			var stderr strings.Builder
			code := run(t.Context(), args, strings.NewReader(""), failingWriter{c.err}, &stderr)
			if code != c.code || stderr.String() != c.want {
				t.Errorf("%v with %v: code %d, stderr %q; want %d and %q", args, c.err, code, stderr.String(), c.code, c.want)
			}
		}
	}
}

func TestExitCodes(t *testing.T) {
	interrupted, cancel := context.WithCancelCause(t.Context())
	cancel(signalError{syscall.SIGINT})
	terminated, cancel := context.WithCancelCause(t.Context())
	cancel(signalError{syscall.SIGTERM})
	plain := errors.New("no")
	for _, c := range []struct {
		ctx  context.Context
		err  error
		want int
	}{
		{t.Context(), nil, 0},
		{t.Context(), plain, 1},
		{t.Context(), invalid(plain), 2},
		{t.Context(), errors.Join(plain, invalid(plain)), 2},
		{t.Context(), unreachedError{plain}, 3},
		{interrupted, context.Canceled, 130},
		{terminated, context.Canceled, 143},
		{t.Context(), &os.PathError{Err: syscall.EPIPE}, 141},
	} {
		if got := exitCode(c.ctx, c.err); got != c.want {
			t.Errorf("%v: exit code %d, want %d", c.err, got, c.want)
		}
	}
}

// endlessReader never runs dry, as a device does.
type endlessReader struct{}

func (endlessReader) Read(b []byte) (int, error) { return len(b), nil }

func TestInputIsBounded(t *testing.T) {
	var stderr strings.Builder
	code := run(t.Context(), []string{"threshold", "-", "--channel", "bec"}, endlessReader{}, io.Discard, &stderr)
	if want := "tannery: standard input: larger than 67108864 bytes, the most that is read\n"; code != exitUsage || stderr.String() != want {
		t.Errorf("code %d, stderr %q; want 2 and %q", code, stderr.String(), want)
	}
}

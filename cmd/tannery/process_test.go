package main

import (
	"bufio"
	"bytes"
	"context"
	"errors"
	"os"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"
)

// asTannery makes the test binary behave as the program, for what only shows
// in a process of its own: pipes and signals.
const asTannery = "TANNERY_AS_PROCESS"

func TestMain(m *testing.M) {
	switch os.Getenv(asTannery) {
	case "1":
		main()
	case "cramped":
		limitFileSize()
		main()
	case "stubborn":
		ctx, _ := withSignals(context.Background())
		os.Stdout.WriteString("ready\n")
		<-ctx.Done()
		os.Stdout.WriteString("first\n")
		time.Sleep(time.Hour)
	}
	os.Exit(m.Run())
}

// process prepares a command line to run as a process.
func process(t *testing.T, args ...string) (cmd *exec.Cmd, stderr *bytes.Buffer) {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd = exec.CommandContext(t.Context(), self, args...)
	cmd.Env = append(os.Environ(), asTannery+"=1")
	cmd.WaitDelay = time.Second
	stderr = &bytes.Buffer{}
	cmd.Stderr = stderr
	return cmd, stderr
}

// exitOf returns the exit code that Wait reported.
func exitOf(t *testing.T, err error) int {
	t.Helper()
	var exit *exec.ExitError
	switch {
	case err == nil:
		return 0
	case errors.As(err, &exit):
		return exit.ExitCode()
	}
	t.Fatal(err)
	return -1
}

// A reader that goes away after the first line ends a long trace quietly.
func TestClosedPipe(t *testing.T) {
	cmd, stderr := process(t, strings.Fields("trace --lambda 3:1 --rho 6:1 --channel bec --parameter 0.429439814 --csv --iterations 100000")...)
	pipe, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	line, err := bufio.NewReaderSize(pipe, 16).ReadString('\n')
	if err != nil || !strings.HasPrefix(line, "iteration,") {
		t.Errorf("first line %q, %v", line, err)
	}
	pipe.Close()
	if code := exitOf(t, cmd.Wait()); code != exitClosedPipe || stderr.Len() > 0 {
		t.Errorf("exit code %d, stderr %q; want %d and nothing", code, stderr, exitClosedPipe)
	}
}

// A signal ends a command that waits for its input.
func TestSignalWhileReading(t *testing.T) {
	for _, c := range []struct {
		signal syscall.Signal
		code   int
		want   string
	}{
		{syscall.SIGINT, 130, "tannery: interrupted\n"},
		{syscall.SIGTERM, 143, "tannery: ended by SIGTERM\n"},
	} {
		cmd, stderr := process(t, "threshold", "-", "--channel", "bec")
		stdin, err := cmd.StdinPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		// More than a pipe holds: once it is taken, the command is reading.
		if _, err := stdin.Write(bytes.Repeat([]byte("# harbour\n"), 50_000)); err != nil {
			t.Fatal(err)
		}
		if err := cmd.Process.Signal(c.signal); err != nil {
			t.Fatal(err)
		}
		if code := exitOf(t, cmd.Wait()); code != c.code || stderr.String() != c.want {
			t.Errorf("%v: exit code %d, stderr %q; want %d and %q", c.signal, code, stderr, c.code, c.want)
		}
	}
}

// A second signal ends the process at once, whatever it does.
func TestSecondSignal(t *testing.T) {
	cmd, _ := process(t)
	cmd.Env = append(os.Environ(), asTannery+"=stubborn")
	pipe, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(pipe)
	for _, want := range []string{"ready", "first"} {
		if !lines.Scan() || lines.Text() != want {
			t.Fatalf("%q, want %q", lines.Text(), want)
		}
		if err := cmd.Process.Signal(syscall.SIGINT); err != nil {
			t.Fatal(err)
		}
	}
	if code := exitOf(t, cmd.Wait()); code != 130 {
		t.Errorf("exit code %d, want 130", code)
	}
}

package main

import (
	"bufio"
	"bytes"
	"errors"
	"os"
	"os/exec"
	"strings"
	"testing"
)

// asTannery makes the test binary behave as the program, for what only shows
// in a process of its own: pipes and signals.
const asTannery = "TANNERY_AS_PROCESS"

func TestMain(m *testing.M) {
	if os.Getenv(asTannery) != "" {
		main()
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

package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"syscall"

	"tannery/cmd/tannery/internal/report"
)

// The exit codes. After a signal the code is exitSignalBase plus its number:
// 130 for SIGINT, 143 for SIGTERM. A reader that closes the pipe before
// everything is written is no failure of ours; the code is the one a shell
// gives to a program that SIGPIPE has ended, so that scripts can tell.
const (
	exitDone       = 0
	exitFailed     = 1
	exitUsage      = 2
	exitUnreached  = 3
	exitSignalBase = 128
	exitClosedPipe = exitSignalBase + int(syscall.SIGPIPE)
)

// usageError is wrong usage or invalid input: the command line, a profile, a
// brief or a matrix. Nothing was computed.
type usageError struct{ error }

func (e usageError) Unwrap() error { return e.error }

// usagef returns a usageError with a formatted message.
func usagef(format string, args ...any) error {
	return usageError{fmt.Errorf(format, args...)}
}

// invalid marks err, if there is one, as invalid input.
func invalid(err error) error {
	if err == nil {
		return nil
	}
	return usageError{err}
}

// unreachedError is a search that finished without what was asked for. What
// it found has been written all the same.
type unreachedError struct{ error }

func (e unreachedError) Unwrap() error { return e.error }

// exitCode maps an error to the exit code it ends the program with.
func exitCode(ctx context.Context, err error) int {
	var (
		signal    signalError
		usage     usageError
		unreached unreachedError
	)
	switch {
	case err == nil:
		return exitDone
	case errors.Is(err, syscall.EPIPE):
		return exitClosedPipe
	case errors.As(context.Cause(ctx), &signal):
		return exitSignalBase + int(signal.signal)
	case errors.As(err, &unreached):
		return exitUnreached
	case errors.As(err, &usage):
		return exitUsage
	}
	return exitFailed
}

// printError writes one line per problem: joined errors are problems found
// together.
func printError(w io.Writer, err error) {
	for _, problem := range problems(err) {
		for line := range strings.Lines(problem.Error()) {
			fmt.Fprintf(w, "tannery: %s\n", report.Visible(strings.TrimSuffix(line, "\n")))
		}
	}
}

// problems takes joined errors apart, through usageError.
func problems(err error) []error {
	if usage, ok := err.(usageError); ok {
		return problems(usage.error)
	}
	joined, ok := err.(interface{ Unwrap() []error })
	if !ok {
		return []error{err}
	}
	var all []error
	for _, e := range joined.Unwrap() {
		all = append(all, problems(e)...)
	}
	return all
}

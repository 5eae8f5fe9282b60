package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

// signalError is the cause of a context that a signal has ended.
type signalError struct{ signal syscall.Signal }

func (e signalError) Error() string {
	if e.signal == syscall.SIGTERM {
		return "ended by SIGTERM"
	}
	return "interrupted"
}

// withSignals returns a context that the first SIGINT or SIGTERM ends, with a
// signalError as its cause. The second one ends the process at once. SIGPIPE
// is caught so that a closed pipe is an error of the write, which lets a
// search still store its profile.
func withSignals(parent context.Context) (ctx context.Context, stop func()) {
	ctx, cancel := context.WithCancelCause(parent)
	signal.Ignore(syscall.SIGPIPE)
	received := make(chan os.Signal, 2)
	signal.Notify(received, syscall.SIGINT, syscall.SIGTERM)
	go func() {
		first, ok := (<-received).(syscall.Signal)
		if !ok {
			return
		}
		cancel(signalError{first})
		if second, ok := (<-received).(syscall.Signal); ok {
			os.Exit(exitSignalBase + int(second))
		}
	}()
	return ctx, func() {
		signal.Stop(received)
		close(received)
		cancel(nil)
	}
}

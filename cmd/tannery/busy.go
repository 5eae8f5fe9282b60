package main

import (
	"fmt"
	"time"

	"github.com/spf13/cobra"
)

// busy tells on standard error, every few seconds, that a measurement is under
// way whose end nobody knows. The function that it returns ends that, and must
// be called before anything else is written.
func busy(cmd *cobra.Command, what string) (stop func()) {
	if quiet(cmd) {
		return func() {}
	}
	w := cmd.ErrOrStderr()
	before, after := "", "\n"
	if isTerminal(w) {
		before, after = "\r\x1b[K", ""
	}
	done, ended := make(chan struct{}), make(chan struct{})
	start := time.Now()
	go func() {
		defer close(ended)
		ticks := time.NewTicker(plainInterval)
		defer ticks.Stop()
		told := false
		for {
			select {
			case <-ticks.C:
				fmt.Fprintf(w, "%stannery: %s, %v so far%s", before, what, time.Since(start).Round(time.Second), after)
				told = true
			case <-done:
				if told {
					fmt.Fprint(w, before)
				}
				return
			}
		}
	}()
	return func() {
		close(done)
		<-ended
	}
}

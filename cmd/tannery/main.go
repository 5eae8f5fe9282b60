// Command tannery finds degree profiles for Tanner graphs: the decoding
// threshold of a profile, the search for the best one at a rate, its gap to
// the Shannon limit, and its exact integer node counts.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"syscall"
)

// version is written into profiles as their provenance.
const version = "0.1.0"

func main() {
	ctx, stop := withSignals(context.Background())
	code := run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr)
	stop()
	os.Exit(code)
}

// run executes one command line and returns its exit code. Everything that
// main does except for signals, so that tests can run in process.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	root := newRoot()
	root.SetArgs(args)
	root.SetIn(stdin)
	root.SetOut(&pipeWriter{w: stdout})
	root.SetErr(stderr)
	err := root.ExecuteContext(ctx)
	if pipe, ok := root.OutOrStdout().(*pipeWriter); ok && pipe.err != nil && err == nil {
		err = pipe.err
	}
	if err == nil {
		return exitDone
	}
	if errors.Is(err, context.Canceled) && ctx.Err() != nil {
		err = context.Cause(ctx) // how it came about, in our words
	}
	code := exitCode(ctx, err)
	if code != exitClosedPipe {
		printError(stderr, err)
	}
	return code
}

// pipeWriter remembers the first error of standard output, so that an answer
// nobody could read never ends with exit code 0.
type pipeWriter struct {
	w   io.Writer
	err error
}

func (p *pipeWriter) Write(b []byte) (int, error) {
	if p.err != nil {
		return 0, p.err
	}
	n, err := p.w.Write(b)
	if err != nil {
		if !errors.Is(err, syscall.EPIPE) {
			err = fmt.Errorf("standard output: %w", err)
		}
		p.err = err
	}
	return n, err
}

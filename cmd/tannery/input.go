package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
)

// maxInput is the largest input that is read, in bytes. Measured matrices
// and profiles of 10^5 degrees stay far below it; a device or a wrong file
// is refused before it fills the memory.
const maxInput = 64 << 20

// readInput reads a file whole, or standard input for "-", and returns the
// name to use for it in errors. A file that is not there is wrong usage.
func readInput(ctx context.Context, path string, stdin io.Reader) (content []byte, name string, err error) {
	if path == "" {
		return nil, "", usagef("file name \"\": must be a file, or - for standard input")
	}
	name, source := inputName(path), stdin
	if path != "-" {
		f, err := os.Open(path)
		if err != nil {
			return nil, path, invalid(inputError(path, err))
		}
		defer f.Close()
		source = f
	}
	content, err = readAll(ctx, source)
	if ctx.Err() != nil {
		return nil, name, context.Cause(ctx)
	}
	if err != nil {
		return nil, name, invalid(inputError(name, err))
	}
	if len(content) > maxInput {
		return nil, name, usagef("%s: larger than %d bytes, the most that is read", name, maxInput)
	}
	return content, name, nil
}

// inputName is how errors call an input.
func inputName(path string) string {
	if path == "-" {
		return "standard input"
	}
	return path
}

// readAll reads up to one byte more than maxInput, or until ctx ends: a
// terminal or a pipe may never say anything.
func readAll(ctx context.Context, source io.Reader) (content []byte, err error) {
	done := make(chan struct{})
	go func() {
		content, err = io.ReadAll(io.LimitReader(source, maxInput+1))
		close(done)
	}()
	select {
	case <-done:
		return content, err
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

// inputError says once which file could not be read, and why.
func inputError(name string, err error) error {
	var pathError *fs.PathError
	if errors.As(err, &pathError) {
		err = pathError.Err
	}
	return fmt.Errorf("%s: cannot be read: %w", name, err)
}

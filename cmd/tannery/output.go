package main

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"syscall"
)

// outputFile is a file that appears whole or not at all: the content goes to
// a temporary file in the same folder, is synced and renamed over the target.
type outputFile struct {
	path   string      // with symbolic links resolved
	mode   fs.FileMode // of the target if it exists
	exists bool
	direct bool // a device or a named pipe: written to as it is
}

// openOutput finds out whether path can be written, before any long work is
// done for it, and leaves nothing behind. The option names it in errors.
func openOutput(option, path string) (*outputFile, error) {
	if path == "" {
		return nil, usagef("%s \"\": must be a file name, or - for standard output", option)
	}
	out, err := prepareOutput(path)
	if err != nil {
		return nil, outputError(option, path, err)
	}
	return out, nil
}

func prepareOutput(path string) (*outputFile, error) {
	out := &outputFile{path: path, mode: 0o666}
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if target, err := os.Readlink(path); err == nil {
			return nil, fmt.Errorf("is a symbolic link to %s, which does not exist", target)
		}
	case err != nil:
		return nil, err
	case info.IsDir():
		return nil, errors.New("is a directory")
	default:
		if out.path, err = filepath.EvalSymlinks(path); err != nil {
			return nil, err
		}
		out.exists, out.mode = true, info.Mode().Perm()
		out.direct = !info.Mode().IsRegular()
		if out.direct {
			return out, nil // opening a named pipe would wait for its reader
		}
		// Rename would replace a file that is protected from writing.
		f, err := os.OpenFile(out.path, os.O_WRONLY, 0)
		if err != nil {
			return nil, err
		}
		f.Close()
	}
	out.sweep()
	probe, err := out.temporary()
	if err != nil {
		return nil, err
	}
	defer unlockFile(probe)
	if out.exists {
		// Some file systems know no permissions.
		err = probe.Chmod(out.mode)
	}
	return out, err
}

// sweep removes what processes have left that were killed while they wrote the
// same target. Those that live hold locks.
func (o *outputFile) sweep() {
	folder, name := filepath.Split(o.path)
	entries, err := os.ReadDir(filepath.Clean(folder + "."))
	if err != nil {
		return
	}
	for _, e := range entries {
		if !e.Type().IsRegular() {
			continue // what is behind a link is not ours
		}
		middle, isOurs := strings.CutPrefix(e.Name(), "."+name+".")
		middle, isTemporary := strings.CutSuffix(middle, ".tmp")
		if _, err := strconv.ParseUint(middle, 16, 32); err != nil || !isOurs || !isTemporary || len(middle) != 8 {
			continue
		}
		if left, ok, err := lockFile(filepath.Join(folder, e.Name())); err == nil && ok {
			unlockFile(left)
		}
	}
}

// write stores the content under the target's name.
func (o *outputFile) write(content []byte) error {
	return o.stream(func(w io.Writer) error {
		_, err := w.Write(content)
		return err
	})
}

// stream stores what the function writes under the target's name.
func (o *outputFile) stream(write func(io.Writer) error) error {
	if err := o.store(write); err != nil {
		return outputError("", o.path, err)
	}
	return nil
}

func (o *outputFile) store(write func(io.Writer) error) error {
	if o.direct {
		f, err := os.OpenFile(o.path, os.O_WRONLY, 0)
		if err != nil {
			return err
		}
		return errors.Join(write(f), f.Close())
	}
	f, err := o.temporary()
	if err != nil {
		return err
	}
	err = write(f)
	if err == nil && o.exists {
		err = f.Chmod(o.mode)
	}
	if err == nil {
		err = f.Sync()
	}
	if runtime.GOOS == "windows" {
		f.Close() // an open file cannot be renamed there
	}
	if err == nil {
		// Still under its lock, so that nobody takes it for a leftover.
		err = os.Rename(f.Name(), o.path)
	}
	if err != nil {
		unlockFile(f)
		return err
	}
	f.Close()
	return syncFolder(filepath.Dir(o.path))
}

// temporary creates a new file beside the target and locks it. Unlike
// os.CreateTemp it leaves the permissions to the user's umask.
func (o *outputFile) temporary() (*os.File, error) {
	folder, name := filepath.Split(o.path)
	for {
		f, ok, err := lockFile(filepath.Join(folder, fmt.Sprintf(".%s.%08x.tmp", name, rand.Uint32())))
		if ok || err != nil {
			return f, err
		}
	}
}

// syncFolder makes a rename durable. Some file systems cannot sync a folder;
// the content is safe on them all the same.
func syncFolder(path string) error {
	f, err := os.Open(path)
	if err != nil {
		return nil
	}
	defer f.Close()
	if err := f.Sync(); err != nil && !errors.Is(err, syscall.EINVAL) && !errors.Is(err, syscall.ENOTSUP) {
		return err
	}
	return nil
}

// outputError names the file as the user did, once, with what went wrong.
func outputError(option, path string, err error) error {
	var pathError *fs.PathError
	var linkError *os.LinkError
	switch {
	case errors.As(err, &pathError):
		err = pathError.Err
	case errors.As(err, &linkError):
		err = linkError.Err
	}
	if option != "" {
		option += " "
	}
	return fmt.Errorf("%s%s: cannot be written: %w", option, path, err)
}

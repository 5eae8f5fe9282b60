//go:build !unix

package main

import (
	"errors"
	"io/fs"
	"os"
)

// lockFile makes a file that must not be there yet; it reports false if it is.
// After a crash the file stays, and must be removed by hand.
func lockFile(path string) (f *os.File, ok bool, err error) {
	f, err = os.OpenFile(path, os.O_RDWR|os.O_CREATE|os.O_EXCL, 0o666)
	if errors.Is(err, fs.ErrExist) {
		return nil, false, nil
	}
	return f, err == nil, err
}

// unlockFile gives the lock back.
func unlockFile(f *os.File) {
	f.Close()
	os.Remove(f.Name())
}

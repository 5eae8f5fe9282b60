//go:build unix

package main

import (
	"errors"
	"os"
	"syscall"
)

// lockFile takes a lock that ends with the process, however that ends; it
// reports false if another process has it. The file is made if it is missing.
func lockFile(path string) (f *os.File, ok bool, err error) {
	for {
		f, err = os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o666)
		if err != nil {
			return nil, false, err
		}
		err = syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		if err != nil {
			f.Close()
			if errors.Is(err, syscall.EWOULDBLOCK) {
				return nil, false, nil
			}
			return nil, false, err
		}
		// The one who had the lock before may have removed the file after it
		// was opened here: then it locks nothing.
		opened, err := f.Stat()
		if err != nil {
			f.Close()
			return nil, false, err
		}
		if named, err := os.Stat(path); err == nil && os.SameFile(opened, named) {
			return f, true, nil
		}
		f.Close()
	}
}

// unlockFile removes the file and gives the lock back, in this order, so that
// nobody else can have it in between.
func unlockFile(f *os.File) {
	os.Remove(f.Name())
	f.Close()
}

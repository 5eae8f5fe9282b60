package main

import "syscall"

// limitFileSize lets no file of the process grow beyond some hundred bytes.
func limitFileSize() {
	limit := syscall.Rlimit{Cur: 200, Max: 200}
	if err := syscall.Setrlimit(syscall.RLIMIT_FSIZE, &limit); err != nil {
		panic(err)
	}
}

package main

import (
	"bytes"
	"os"
	"strconv"
)

// availableMemory returns how many bytes a process may still take without
// swapping, as the kernel estimates it and its control group allows.
func availableMemory() (n int64, known bool) {
	content, err := os.ReadFile("/proc/meminfo")
	if err != nil {
		return 0, false
	}
	for line := range bytes.Lines(content) {
		if fields := bytes.Fields(line); len(fields) >= 2 && string(fields[0]) == "MemAvailable:" {
			if n, err = strconv.ParseInt(string(fields[1]), 10, 64); err != nil {
				return 0, false
			}
			n, known = n<<10, true // it is given in units of 1024 bytes
		}
	}
	number := func(file string) (int64, bool) {
		content, err := os.ReadFile("/sys/fs/cgroup/" + file)
		if err != nil {
			return 0, false
		}
		n, err := strconv.ParseInt(string(bytes.TrimSpace(content)), 10, 64)
		return n, err == nil // the limit may be "max"
	}
	if most, limited := number("memory.max"); limited && known {
		if used, ok := number("memory.current"); ok {
			n = min(n, max(0, most-used))
		}
	}
	return n, known
}

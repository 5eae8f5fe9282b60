package main

import (
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// Setting the clock neither ends nor prolongs anything: spans of time come from
// time.Since and timers, which use the monotonic clock, as long as nobody takes
// the wall clock out of a time. Only the date in files does.
func TestWallClockIsOnlyWrittenDown(t *testing.T) {
	wall := regexp.MustCompile(`time\.Now\(\)\.|\.Round\(0\)|\.Unix(Nano|Milli|Micro)?\(\)|\.Truncate\(time`)
	found := 0
	err := filepath.WalkDir("../..", func(path string, entry fs.DirEntry, err error) error {
		if err != nil || !strings.HasSuffix(path, ".go") || strings.HasSuffix(path, "_test.go") {
			return err
		}
		content, err := os.ReadFile(path)
		for _, use := range wall.FindAllString(string(content), -1) {
			found++
			if filepath.Base(path) != "product_output.go" {
				t.Errorf("%s: %s takes the wall clock", path, use)
			}
		}
		return err
	})
	if err != nil || found == 0 {
		t.Errorf("%d uses found, %v", found, err)
	}
}

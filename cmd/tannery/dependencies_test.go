package main

import (
	"os"
	"slices"
	"strings"
	"testing"
)

// TestDependencies keeps the list of libraries short: what is not in it needs
// a reason that convinces the others.
func TestDependencies(t *testing.T) {
	allowed := []string{
		"github.com/schollz/progressbar/v3",
		"github.com/spf13/cobra",
		"github.com/spf13/pflag", // part of cobra's interface
		"golang.org/x/image",     // part of plot's interface
		"gonum.org/v1/gonum",
		"gonum.org/v1/plot",
		"gopkg.in/yaml.v3",
	}
	content, err := os.ReadFile("../../go.mod")
	if err != nil {
		t.Fatal(err)
	}
	direct := 0
	for line := range strings.Lines(string(content)) {
		fields := strings.Fields(strings.TrimPrefix(strings.TrimSpace(line), "require "))
		if len(fields) < 2 || !strings.HasPrefix(fields[1], "v") || strings.HasSuffix(strings.TrimSpace(line), "// indirect") {
			continue
		}
		direct++
		if !slices.Contains(allowed, fields[0]) {
			t.Errorf("go.mod requires %s, which is not among %s", fields[0], strings.Join(allowed, ", "))
		}
	}
	if direct == 0 {
		t.Error("no requirements found in go.mod")
	}
}

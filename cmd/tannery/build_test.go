package main

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"tannery/ensembles"
)

// profileIn reads a profile file.
func profileIn(t *testing.T, path string) ensembles.Profile {
	t.Helper()
	p, _, err := ensembles.DecodeProfile(path, content(t, path))
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// countsIn reads the realization of a profile file.
func countsIn(t *testing.T, path string) ensembles.Realization {
	t.Helper()
	p := profileIn(t, path)
	if p.Realization == nil {
		t.Fatalf("%s: no realization", path)
	}
	return *p.Realization
}

// From profile to matrix and back, every step in a process of its own: the
// counts of the export are those of the matrix.
func TestExportBuildProfile(t *testing.T) {
	testdata, err := filepath.Abs("../../testdata")
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	for _, c := range []struct{ profile, length, more string }{
		{filepath.Join(testdata, "profiles/harbour.yaml"), "2048", "--degree-two chain"},
		{filepath.Join(testdata, "profiles/buoys.yaml"), "1000", "--construction randomized"},
		{"en302307-r50-d8", "4000", "--seed 5"},
		{"ru01-r50-d3", "501", ""},
	} {
		for _, line := range []string{
			"export " + c.profile + " --length " + c.length + " -o counts.yaml",
			"build counts.yaml -o matrix.mtx " + c.more,
			"profile matrix.mtx -o found.yaml",
		} {
			cmd, stderr := process(t, strings.Fields(line)...)
			if err := cmd.Run(); err != nil {
				t.Fatalf("tannery %s: %v\n%s", line, err, stderr)
			}
		}
		want, got := countsIn(t, "counts.yaml"), countsIn(t, "found.yaml")
		if want.Length != got.Length || want.Checks != got.Checks || want.Edges != got.Edges ||
			!slices.Equal(want.VariableNodes, got.VariableNodes) || !slices.Equal(want.CheckNodes, got.CheckNodes) {
			t.Errorf("%s, length %s: exported %+v, built %+v", c.profile, c.length, want, got)
		}
	}
}

// An interrupted construction leaves nothing behind.
func TestInterruptedBuild(t *testing.T) {
	folder := t.TempDir()
	cmd, stderr := process(t, "build", "--lambda", "3:1", "--rho", "6:1", "--length", "90000", "-o", filepath.Join(folder, "long.mtx"))
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	time.Sleep(300 * time.Millisecond)
	if err := cmd.Process.Signal(os.Interrupt); err != nil {
		t.Fatal(err)
	}
	if code := exitOf(t, cmd.Wait()); code != 130 {
		t.Errorf("exit code %d, want 130; %s", code, stderr)
	}
	if left, err := os.ReadDir(folder); err != nil || len(left) > 0 {
		t.Errorf("left behind: %v, %v", left, err)
	}
}

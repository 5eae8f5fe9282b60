package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const measured = "../../testdata/simulations/buoys-2048.json"

// Measured rates appear beside the Shannon limit, the threshold, and the limit
// at their length.
func TestReportWithSimulation(t *testing.T) {
	page := succeed(t, "", "report", "../../testdata/profiles/buoys.yaml", "--simulation", measured, "--frame-error", "0.01")
	got := outline(t, page)
	for _, want := range []string{
		"section by simulation\n", "h2 Measured error rates\n", "h3 buoys-2048\n", "figure figure-simulation-1\n", "th frame error rate\n",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("no %q in\n%s", want, got)
		}
	}
	for _, want := range []string{"Shannon limit at 0.5", "threshold at 0.49", "finite-length limit at frame error rate 0.01 at 0.4", "9\u202f923"} {
		if !strings.Contains(page, want) {
			t.Errorf("no %q on the page", want)
		}
	}
}

// A curve of another profile's matrix is shown beside its own threshold, and
// the page says so.
func TestReportWithSimulationOfAnotherProfile(t *testing.T) {
	code, page, stderr := command(t, "", "report", "ru01-r50-d3", "--channel", "bec", "--simulation", measured)
	if code != 0 || !strings.Contains(stderr, measured+": its matrix has the threshold ε = 0.489962, this profile 0.42944: it seems to be that of another profile") {
		t.Errorf("code %d, %s", code, stderr)
	}
	for _, want := range []string{"Note: its matrix has the threshold", "threshold at 0.49; Shannon", "2\u202f048 code bits, peeling;"} {
		if !strings.Contains(page, want) {
			t.Errorf("no %q on the page", want)
		}
	}
}

// What was warned of when a curve was measured stands beside it.
func TestReportKeepsWarningsOfSimulations(t *testing.T) {
	file := filepath.Join(t.TempDir(), "rates.json")
	text := strings.Replace(string(content(t, measured)), `"warnings": []`, `"warnings": ["the rank is <2>"]`, 1)
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	if page := succeed(t, "", "report", "ru01-r50-d3", "--channel", "bec", "--simulation", file, "--quiet"); !strings.Contains(page, "Note: the rank is &lt;2&gt;.") {
		t.Error("no warning on the page")
	}
}

func TestReportRefusesSimulations(t *testing.T) {
	content, err := os.ReadFile(measured)
	if err != nil {
		t.Fatal(err)
	}
	file := filepath.Join(t.TempDir(), "rates.json")
	for _, c := range []struct{ old, new, want string }{
		{"{", "[", "found a syntax error"},
		{"tannery/simulate/1", "tannery/threshold/1", `schema: found "tannery/threshold/1"; allowed: tannery/simulate/1`},
		{`"bec"`, `"bce"`, `channel: found "bce"; allowed: bec, bsc, biawgn, laplace, rayleigh`},
		{`"confidence": 0.95`, `"confidence": 95`, "confidence: found 95; allowed: a number above 0 and below 1"},
		{`"length": 2048`, `"length": 0`, "length: found 0; allowed: a whole number of at least 1"},
		{`"frames": 9923`, `"frames": 0`, "points[0].frames: found 0; allowed: a whole number of at least 1"},
		{`"frame_errors": 200`, `"frame_errors": 9924`, "points[0].frame_errors: found 9924; allowed: from 0 to 9923, its frames"},
		{`"high": 0.023115648252363896`, `"high": 0.001`, "points[0].frame_error_rate: found"},
	} {
		bad := strings.Replace(string(content), c.old, c.new, 1)
		if err := os.WriteFile(file, []byte(bad), 0o600); err != nil {
			t.Fatal(err)
		}
		code, stdout, stderr := command(t, "", "report", "ru01-r50-d3", "--channel", "bec", "--simulation", file)
		if code != exitUsage || stdout != "" || !strings.Contains(stderr, file+":") || !strings.Contains(stderr, ": "+c.want) {
			t.Errorf("%s for %s: code %d, %s", c.new, c.old, code, stderr)
		}
	}
}

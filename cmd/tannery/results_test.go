package main

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// resultsRow is a row of the table of results of README.md: largest degree,
// threshold, gap, edges per bit, seconds.
var resultsRow = regexp.MustCompile(`(?m)^\| (\d+) \| (.* ± .*) \| ([0-9.]+) \| ([0-9.]+) \| ([0-9.]+) \|$`)

// largestMeasured is the largest degree whose threshold is measured again: the
// others take longer.
const largestMeasured = 30

// TestResults holds the table of README.md against the profiles that it is
// about, and these against density evolution: their rate, their degrees, and
// their thresholds, once by the engine and once more below and above it.
func TestResults(t *testing.T) {
	const file = "../../README.md"
	content, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	rows := resultsRow.FindAllStringSubmatch(string(content), -1)
	if len(rows) == 0 {
		t.Fatal("no table of results")
	}
	text := string(content)
	for _, row := range rows {
		degree, err := strconv.Atoi(row[1])
		if err != nil {
			t.Fatal(err)
		}
		name := fmt.Sprintf("biawgn-r50-d%d.yaml", degree)
		data, err := os.ReadFile(filepath.Join("../../testdata/profiles", name))
		if err != nil {
			t.Error(err)
			continue
		}
		p, warnings, err := ensembles.DecodeProfile(name, data)
		if err != nil || len(warnings) > 0 || len(p.Results) != 1 {
			t.Errorf("%s: %v %v", name, err, warnings)
			continue
		}
		e, r := p.Ensemble, p.Results[0]
		if e.Lambda.Max() > degree || math.Abs(e.DesignRate()-0.5) > 1e-12 || r.Channel != "biawgn" || r.Method != "quantized" || r.Gap.DB == nil {
			t.Errorf("%s: largest degree %d, rate %v, result %+v", name, e.Lambda.Max(), e.DesignRate(), r)
			continue
		}
		want := fmt.Sprintf("| %d | %s | %.4f | %.2f | %s |", degree, report.WithUncertainty(r.Threshold, r.Uncertainty), *r.Gap.DB, e.EdgesPerBit(), row[5])
		if *update {
			text = strings.Replace(text, row[0], want, 1)
		} else if row[0] != want {
			t.Errorf("%s has\n%s\nin README.md, want (go test ./cmd/tannery -update rewrites it)\n%s", name, row[0], want)
		}
		if degree <= largestMeasured {
			remeasure(t, name, e, r)
		}
	}
	if *update && text != string(content) {
		if err := os.WriteFile(file, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// remeasure compares a threshold with the engine's, and with an evolution that
// must converge a little below it.
func remeasure(t *testing.T, name string, e ensembles.Ensemble, r ensembles.Result) {
	t.Helper()
	engine := de.QuantizedEngine{}
	again, err := engine.Threshold(context.Background(), e, channel.BIAWGN{})
	if err != nil {
		t.Fatal(err)
	}
	if d := math.Abs(again.Value - r.Threshold); d > r.Uncertainty+again.Uncertainty {
		t.Errorf("%s: threshold %v ± %v, measured again %v ± %v", name, r.Threshold, r.Uncertainty, again.Value, again.Uncertainty)
	}
	const below = 2e-3
	trace, err := engine.Trace(context.Background(), e, channel.BIAWGN{}, r.Threshold*(1-below), maxIterations)
	if err != nil || trace.Outcome != de.Converged {
		t.Errorf("%s: %v, %v at %v of its threshold", name, trace.Outcome, err, 1-below)
	}
}

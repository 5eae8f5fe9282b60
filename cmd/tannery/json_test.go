package main

import (
	"encoding/json"
	"os"
	"slices"
	"strings"
	"testing"
)

// The keys of JSON answers are a contract with other programs: they may grow
// but none may go.
func TestJSONKeys(t *testing.T) {
	const (
		thresholdKeys = "schema channel parameter method threshold uncertainty design_rate limit gap eb_n0_db es_n0_db stability iterations warnings"
		searchKeys    = "schema profile profile.results status evaluations seconds programmes edges_per_bit binding relaxations phases thresholds threshold resumed warnings"
		limitKeys     = "schema channel parameter value rate eb_n0_db es_n0_db"
	)
	for _, c := range []struct{ args, schema, keys string }{
		{"threshold --lambda 3:1 --rho 6:1 --channel bec", "tannery/threshold/1", thresholdKeys + " gap.parameter gap.db gap.rate stability.bound stability.margin"},
		{"threshold --lambda 3:1 --rho 6:1 --channel biawgn --method gaussian", "tannery/threshold/1", thresholdKeys},
		{"threshold --lambda 1:0.5,3:0.5 --rho 6:1 --channel bec", "tannery/threshold/1", thresholdKeys},
		{"threshold --lambda 3:1 --rho 3:1 --channel bec", "tannery/threshold/1", thresholdKeys},
		{"threshold --lambda 3:1 --rho 6:1 --channel bsc --iterations 9 --target-error 1e-3", "tannery/threshold/1", thresholdKeys + " limited.iterations limited.target_error"},
		{"threshold --lambda 3:1 --rho 6:1 --channel ../../testdata/channels/receiver.csv", "tannery/threshold/1", thresholdKeys},
		{"search --channel bec --rate 0.5 --max-variable-degree 4", "tannery/search/1", searchKeys},
		{"search --channel biawgn,bsc --rate 0.5 --variable-degrees 2,4 --check-degrees 6 --evaluations 5", "tannery/search/1", searchKeys},
		{"limit --channel ../../testdata/channels/receiver.csv --rate 0.4", "tannery/limit/1", limitKeys + " warnings"},
		{"trace --lambda 3:1 --rho 6:1 --channel laplace --parameter 0.5 --iterations 9", "tannery/trace/1", "schema channel parameter value method outcome narrowest points warnings"},
		{"limit --channel biawgn --rate 0.5", "tannery/limit/1", limitKeys},
		{"limit --channel bsc --parameter 0.11", "tannery/limit/1", limitKeys},
		{"limit --channel bsc --parameter 0.5", "tannery/limit/1", limitKeys},
		{"limit --channel biawgn --parameter 1 --rate 0.7", "tannery/limit/1", limitKeys + " question.fits question.margin question.lowest_bit_error_rate"},
		{"limit --channel biawgn --parameter 1 --source-rate 1 --symbol-rate 3", "tannery/limit/1", limitKeys + " link.fits link.largest_code_rate link.margin"},
		{"limit --channel biawgn --rate 0.5 --length 1000 --frame-error 1e-3", "tannery/limit/1", limitKeys + " finite_length.value"},
		{"limit --matrix ../../testdata/channels/buoy.csv", "tannery/limit/1", limitKeys + " capacity lower upper distribution"},
		{"trace --lambda 3:1 --rho 6:1 --channel bec --parameter 0.3", "tannery/trace/1", "schema channel parameter value method outcome narrowest points warnings"},
		{"compare ru01-r50-d3 en302307-r50-d8 --channel bec", "tannery/compare/1", "schema distance target_error sort rows"},
		{"catalog --rate 0.5", "tannery/catalog/1", "schema entries"},
		{"catalog rsu01-r50-d4", "tannery/catalog-entry/1", "schema name source trust design_rate published profile.lambda"},
		{"export --lambda 3:1 --rho 6:1 --channel bec --length 100", "tannery/export/1", "schema profile profile.kind profile.realization profile.realization.variable_nodes warnings"},
		{"build --lambda 3:1 --rho 6:1 --length 100 -o " + os.DevNull, "tannery/build/1", "schema file construction seed degree_two profile profile.realization profile_digest graph.girth graph.shortest_cycles graph.rank graph.rate graph.encoding_gap graph.digest warnings"},
		{"simulate ../../testdata/matrices/buoys.mtx --channel bec --parameter 0.44 --frames 9", "tannery/simulate/1", "schema matrix title channel parameter length design_rate decoder max_iterations seed confidence limits scaling points warnings"},
		{"profile ../../testdata/matrices/buoys.mtx", "tannery/profile/1", "schema profile profile.realization.variable_nodes graph.girth graph.rank graph.rate warnings"},
	} {
		text := succeed(t, "", append(strings.Fields(c.args), "--json")...)
		var object map[string]any
		decoder := json.NewDecoder(strings.NewReader(text))
		if err := decoder.Decode(&object); err != nil || decoder.More() {
			t.Errorf("tannery %s: not one JSON object: %v\n%s", c.args, err, text)
			continue
		}
		if object["schema"] != c.schema {
			t.Errorf("tannery %s: schema %v, want %s", c.args, object["schema"], c.schema)
		}
		for _, key := range strings.Fields(c.keys) {
			if !hasKey(object, key) {
				t.Errorf("tannery %s: no key %s", c.args, key)
			}
		}
	}
}

func hasKey(object map[string]any, path string) bool {
	head, tail, nested := strings.Cut(path, ".")
	value, ok := object[head]
	if !nested {
		return ok
	}
	inner, isObject := value.(map[string]any)
	return isObject && hasKey(inner, tail)
}

// A profile goes through export, threshold and back without change.
func TestProfilesPassFromCommandToCommand(t *testing.T) {
	exported := succeed(t, "", "export", "--lambda", "2:0.3,3:0.7", "--rho", "6:1", "--channel", "bec", "--length", "1000")
	again := succeed(t, exported, "export", "-", "--channel", "bec", "--length", "1000")
	if exported != again {
		t.Errorf("exported twice:\n%s\n%s", exported, again)
	}
	var a, b struct{ Threshold float64 }
	if err := json.Unmarshal([]byte(succeed(t, exported, "threshold", "-", "--channel", "bec", "--json")), &a); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal([]byte(succeed(t, "", "threshold", "--lambda", "2:0.3,3:0.7", "--rho", "6:1", "--channel", "bec", "--json")), &b); err != nil {
		t.Fatal(err)
	}
	if a != b {
		t.Errorf("threshold %v from the file, %v from the options", a, b)
	}
}

// CSV, JSON and text of a trace show the same evolution, CSV and JSON whole.
func TestTraceIsWholeInCSVAndJSON(t *testing.T) {
	args := strings.Fields("trace --lambda 3:1 --rho 6:1 --channel bec --parameter 0.4294")
	var answer struct{ Points []struct{ Iteration int } }
	if err := json.Unmarshal([]byte(succeed(t, "", append(args, "--json")...)), &answer); err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(succeed(t, "", append(args, "--csv")...)), "\n")
	if n := len(answer.Points); n < 400 || len(lines) != n+1 {
		t.Errorf("%d points in JSON, %d lines of CSV", n, len(lines))
	}
}

func TestCompletionKnowsNames(t *testing.T) {
	for args, want := range map[string]string{
		"__complete threshold --channel ": "biawgn",
		"__complete threshold --method ":  "gaussian-fit",
		"__complete tr":                   "trace",
		"__complete schema ":              "brief",
		"__complete limit --sym":          "--symbol-rate",
	} {
		words := strings.Split(args, " ")
		if out := succeed(t, "", words...); !slices.ContainsFunc(strings.Split(out, "\n"), func(line string) bool { return strings.HasPrefix(line, want) }) {
			t.Errorf("%s: %q lacks %s", args, out, want)
		}
	}
}

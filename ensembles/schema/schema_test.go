package schema_test

import (
	"encoding/json"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"

	"tannery/ensembles"
	"tannery/ensembles/schema"
	"tannery/ensembles/schema/schematest"
)

const head = "kind: profile\nversion: 1\nlambda: {3: 1}\nrho: {6: 1}\n"

// full has every key that a profile may have.
const full = head + `title: for the harbour
design_rate: 0.5
results:
  - {channel: biawgn, parameter: sigma, method: quantized, threshold: 0.88, uncertainty: 1e-6, limit: 0.97, gap: {parameter: 0.1, db: 0.9, rate: 0.06}}
provenance: {program: tannery 0.1.0, seed: 18446744073709551615, created: "2026-12-01T10:00:00Z", brief: {kind: brief}}
realization:
  length: 100
  checks: 50
  edges: 300
  variable_nodes: {3: 100}
  check_nodes: {6: 50}
  design_rate: 0.5
  results: []
`

func TestSchemasAreJSON(t *testing.T) {
	for name, text := range map[string][]byte{"profile": schema.Profile(), "brief": schema.Brief()} {
		var s struct {
			Schema string `json:"$schema"`
		}
		if err := json.Unmarshal(text, &s); err != nil {
			t.Errorf("%s: %v", name, err)
		}
		if want := "http://json-schema.org/draft-07/schema#"; s.Schema != want {
			t.Errorf("%s: $schema is %q, want %q", name, s.Schema, want)
		}
	}
}

// Where the decoder and the schema must agree whether a profile is valid.
func TestProfileSchemaAgreesWithDecoder(t *testing.T) {
	profile := full
	replace := func(old, new string) string {
		if !strings.Contains(profile, old) {
			t.Fatalf("%q is not in the profile", old)
		}
		return strings.Replace(profile, old, new, 1)
	}
	tests := []struct {
		name, text string
		valid      bool
	}{
		{"least", head, true},
		{"full", profile, true},
		{"editor's key", head + "$schema: profile.json\n", true},
		{"JSON", `{"kind": "profile", "version": 1, "lambda": {"3": 1}, "rho": {"6": 1}}`, true},
		{"largest degree", replace("lambda: {3: 1}", "lambda: {1000000: 1}"), true},
		{"degree 1", replace("lambda: {3: 1}", "lambda: {1: 1}"), true},
		{"no dB", replace("db: 0.9, ", ""), true},
		{"other kind", replace("kind: profile", "kind: brief"), false},
		{"other version", replace("version: 1", "version: 2"), false},
		{"no lambda", replace("lambda: {3: 1}\n", ""), false},
		{"no rho", replace("rho: {6: 1}\n", ""), false},
		{"empty lambda", replace("lambda: {3: 1}", "lambda: {}"), false},
		{"lambda as list", replace("lambda: {3: 1}", "lambda: [3, 1]"), false},
		{"degree 0", replace("lambda: {3: 1}", "lambda: {0: 1}"), false},
		{"check degree 1", replace("rho: {6: 1}", "rho: {1: 1}"), false},
		{"degree too large", replace("lambda: {3: 1}", "lambda: {1000001: 1}"), false},
		{"octal degree", replace("lambda: {3: 1}", `lambda: {"03": 1}`), false},
		{"negative fraction", replace("lambda: {3: 1}", "lambda: {3: -0.5}"), false},
		{"fraction above 1", replace("lambda: {3: 1}", "lambda: {3: 1.5}"), false},
		{"quoted fraction", replace("lambda: {3: 1}", `lambda: {3: "1"}`), false},
		{"unknown key", head + "lamda: {3: 1}\n", false},
		{"text as rate", replace("design_rate: 0.5", "design_rate: half"), false},
		{"results as mapping", head + "results: {}\n", false},
		{"unknown key of a result", replace("channel: biawgn", "channel: biawgn, sigma: 1"), false},
		{"no channel", replace("channel: biawgn, ", ""), false},
		{"no gap rate", replace(", rate: 0.06", ""), false},
		{"negative threshold", replace("threshold: 0.88", "threshold: -0.88"), false},
		{"negative seed", replace("seed: 18446744073709551615", "seed: -1"), false},
		{"unknown key of provenance", replace("seed: 1", "sede: 1"), false},
		{"fractional length", replace("length: 100", "length: 100.5"), false},
		{"no length", replace("  length: 100\n", ""), false},
		{"too many checks", replace("checks: 50", "checks: 5000000000"), false},
		{"no nodes", replace("variable_nodes: {3: 100}", "variable_nodes: {3: 100, 4: 0}"), false},
		{"unknown key of the realization", replace("  edges: 300", "  edges: 300\n  edgs: 300"), false},
	}
	for _, test := range tests {
		problems, err := schematest.Validate(schema.Profile(), []byte(test.text))
		if err != nil {
			t.Fatalf("%s: %v", test.name, err)
		}
		if valid := len(problems) == 0; valid != test.valid {
			t.Errorf("%s: the schema says valid: %v (%q), want %v", test.name, valid, problems, test.valid)
		}
		_, _, err = ensembles.DecodeProfile("profile.yaml", []byte(test.text))
		if valid := err == nil; valid != test.valid {
			t.Errorf("%s: the decoder says valid: %v (%v), want %v", test.name, valid, err, test.valid)
		}
	}
}

// The decoder names the keys it knows when it meets one it does not.
func TestProfileSchemaHasTheDecodersKeys(t *testing.T) {
	known := map[string]bool{}
	for path, text := range map[string]string{
		"":                            head + "?: 1",
		"results[0].":                 head + "results: [{?: 1}]",
		"results[0].gap.":             head + "results: [{gap: {?: 1}}]",
		"provenance.":                 head + "provenance: {?: 1}",
		"realization.":                head + "realization: {?: 1}",
		"realization.results[0].":     head + "realization: {results: [{?: 1}]}",
		"realization.results[0].gap.": head + "realization: {results: [{gap: {?: 1}}]}",
	} {
		_, _, err := ensembles.DecodeProfile("p", []byte(strings.Replace(text, "?", "unheard-of", 1)))
		m := regexp.MustCompile(`unheard-of: found an unknown key; allowed: (.*)`).FindStringSubmatch(err.Error())
		if m == nil {
			t.Fatalf("no unknown key in %v", err)
		}
		for _, key := range strings.Split(m[1], ", ") {
			known[path+key] = true
		}
	}
	var decoder []string
	for key := range known {
		decoder = append(decoder, key)
	}
	slices.Sort(decoder)
	keys, err := schematest.Keys(schema.Profile())
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(keys, decoder) {
		t.Errorf("keys of the schema  %q\nkeys of the decoder %q", keys, decoder)
	}
}

// What is written obeys the schema.
func TestWrittenProfileObeysSchema(t *testing.T) {
	p, _, err := ensembles.DecodeProfile("p", []byte(full))
	if err != nil {
		t.Fatal(err)
	}
	p.Results[0].Uncertainty = math.SmallestNonzeroFloat64
	yaml, err := p.Encode()
	if err != nil {
		t.Fatal(err)
	}
	text, err := p.MarshalJSON()
	if err != nil {
		t.Fatal(err)
	}
	for _, written := range [][]byte{yaml, text} {
		problems, err := schematest.Validate(schema.Profile(), written)
		if err != nil || len(problems) > 0 {
			t.Errorf("%v %q in\n%s", err, problems, written)
		}
	}
}

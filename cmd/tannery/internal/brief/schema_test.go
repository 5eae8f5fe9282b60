package brief

import (
	"regexp"
	"slices"
	"strings"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles/schema"
	"tannery/ensembles/schema/schematest"
)

const schemaHead = "kind: brief\nversion: 1\n"

const schemaWhole = schemaHead + `title: for the harbour
channel: biawgn
rate: 0.5
method: gaussian
variable_degrees: {max: 15}
check_degrees: {allowed: [7, 8]}
limits: {iterations: 200, target_error: 1e-5, edges_per_bit: 4, degree_two: parity, distinct_degrees: 3, stability_margin: 0.02}
search: {seed: 18446744073709551615, time: 60s, evaluations: 9000, workers: 2}
`

// Where the decoder and the schema must agree whether a brief is valid.
func TestSchemaAgreesWithDecoder(t *testing.T) {
	swap := func(old, new string) string {
		if !strings.Contains(schemaWhole, old) {
			t.Fatalf("%q is not in the brief", old)
		}
		return strings.Replace(schemaWhole, old, new, 1)
	}
	tests := []struct {
		name, text string
		valid      bool
	}{
		{"least", schemaHead, true},
		{"whole", schemaWhole, true},
		{"link", swap("rate: 0.5", "link: {source_rate: 1000, source_probability: 0.1, symbol_rate: 2000, sigma: 0.8}"), true},
		{"link in decibels", swap("rate: 0.5", "link: {source_rate: 1000, symbol_rate: 2000, es_n0_db: -1.5}"), true},
		{"editor's key", schemaHead + "$schema: brief.json\n", true},
		{"other kind", swap("kind: brief", "kind: profile"), false},
		{"no version", swap("version: 1\n", ""), false},
		{"unknown key", schemaHead + "rates: 0.5\n", false},
		{"unknown channel", swap("biawgn", "awgn"), false},
		{"several channels", swap("biawgn", "[biawgn, bsc]"), true},
		{"one channel as a list", swap("biawgn", "[bsc]"), true},
		{"no channels", swap("biawgn", "[]"), false},
		{"channel twice", swap("biawgn", "[bsc, bsc]"), false},
		{"unknown channel in a list", swap("biawgn", "[bsc, awgn]"), false},
		{"channel as a number", swap("biawgn", "3"), false},
		{"degradation", schemaHead + "degradation: flip\n", true},
		{"unknown degradation", schemaHead + "degradation: noise\n", false},
		{"unknown method", swap("gaussian", "guess"), false},
		{"rate 1", swap("rate: 0.5", "rate: 1"), false},
		{"rate as text", swap("rate: 0.5", "rate: half"), false},
		{"rate and link", schemaWhole + "link: {source_rate: 1000, symbol_rate: 2000, sigma: 0.8}\n", false},
		{"link without symbols", swap("rate: 0.5", "link: {source_rate: 1000, sigma: 0.8}"), false},
		{"link of no source", swap("rate: 0.5", "link: {source_rate: 0, symbol_rate: 2000, sigma: 0.8}"), false},
		{"certain source", swap("rate: 0.5", "link: {source_rate: 1, source_probability: 1, symbol_rate: 2000, sigma: 0.8}"), false},
		{"degree 1", swap("max: 15", "max: 1"), false},
		{"degree too large", swap("max: 15", "max: 1000001"), false},
		{"no degrees", swap("{max: 15}", "{}"), false},
		{"empty list", swap("[7, 8]", "[]"), false},
		{"degree twice", swap("[7, 8]", "[7, 7]"), false},
		{"both forms", swap("{max: 15}", "{max: 15, allowed: [2]}"), false},
		{"no iterations", swap("iterations: 200", "iterations: 0"), false},
		{"too many iterations", swap("iterations: 200", "iterations: 1000001"), false},
		{"target error 0", swap("1e-5", "0"), false},
		{"target error of a guess", swap("1e-5", "0.5"), false},
		{"no distinct degrees", swap("distinct_degrees: 3", "distinct_degrees: 0"), false},
		{"stability margin 1", swap("0.02", "1"), false},
		{"no stability margin", swap("0.02", "0"), true},
		{"no evaluations", swap("evaluations: 9000", "evaluations: 0"), false},
		{"too few edges", swap("edges_per_bit: 4", "edges_per_bit: 0.5"), false},
		{"unknown rule", swap("parity", "odd"), false},
		{"unknown limit", swap("iterations:", "iteration:"), false},
		{"negative seed", swap("seed: 1", "seed: -1"), false},
		{"time without unit", swap("time: 60s", "time: 60"), false},
		{"no workers", swap("workers: 2", "workers: 0"), false},
		{"too many workers", swap("workers: 2", "workers: 1025"), false},
	}
	for _, test := range tests {
		problems, err := schematest.Validate(schema.Brief(), []byte(test.text))
		if err != nil {
			t.Fatalf("%s: %v", test.name, err)
		}
		if valid := len(problems) == 0; valid != test.valid {
			t.Errorf("%s: the schema says valid: %v (%q), want %v", test.name, valid, problems, test.valid)
		}
		err = Decode("brief.yaml", []byte(test.text), Channels{}).Err()
		if valid := err == nil; valid != test.valid {
			t.Errorf("%s: the decoder says valid: %v (%v), want %v", test.name, valid, err, test.valid)
		}
	}
}

// The decoder names the keys it knows when it meets one it does not.
func TestSchemaHasTheDecodersKeys(t *testing.T) {
	texts := map[string][]string{
		"":                  {schemaHead + "?: 1"},
		"variable_degrees.": {schemaHead + "variable_degrees: {max: 5, ?: 1}"},
		"check_degrees.":    {schemaHead + "check_degrees: {max: 5, ?: 1}"},
		"limits.":           {schemaHead + "limits: {?: 1}"},
		"search.":           {schemaHead + "search: {?: 1}"},
	}
	for _, name := range channel.Names() { // each has its own parameter
		texts["link."] = append(texts["link."], schemaHead+"channel: "+name+"\nlink: {?: 1}")
	}
	known := map[string]bool{}
	for path, list := range texts {
		for _, text := range list {
			err := Decode("b", []byte(strings.Replace(text, "?", "unheard-of", 1)), Channels{}).Err()
			m := regexp.MustCompile(`unheard-of: found an unknown key; allowed: (.*)`).FindStringSubmatch(err.Error())
			if m == nil {
				t.Fatalf("no unknown key in %v", err)
			}
			for _, key := range strings.Split(m[1], ", ") {
				known[path+key] = true
			}
		}
	}
	var decoder []string
	for key := range known {
		decoder = append(decoder, key)
	}
	slices.Sort(decoder)
	keys, err := schematest.Keys(schema.Brief())
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(keys, decoder) {
		t.Errorf("keys of the schema  %q\nkeys of the decoder %q", keys, decoder)
	}
}

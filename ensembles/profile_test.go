package ensembles

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"tannery/ensembles/document"
)

const least = "kind: profile\nversion: 1\nlambda: {3: 1}\nrho: {6: 1}\n"

const whole = `kind: profile
version: 1
title: half-rate profile for a harbour telemetry link
lambda: {2: 0.25, 3: 0.25, 8: 0.5}
rho: {7: 0.75, 8: 0.25}
design_rate: 0.489010989010989
results:
  - channel: biawgn
    parameter: sigma
    method: quantized
    threshold: 0.9631
    uncertainty: 0.00001
    limit: 0.97869
    gap: {parameter: 0.01559, db: 0.139, rate: 0.0093}
  - channel: bec
    parameter: epsilon
    method: exact
    threshold: 0.44
    uncertainty: 1.0e-12
    limit: 0.5
    gap: {parameter: 0.06, rate: 0.06}
provenance:
  program: tannery 0.1.0
  seed: 18446744073709551615
  created: 2026-12-01T10:00:00.5Z
  brief: {kind: brief, version: 1, rate: 0.50, title: "07"}
realization:
  length: 100
  checks: 50
  edges: 300
  variable_nodes: {3: 100}
  check_nodes: {6: 50}
  design_rate: 0.5
  results:
    - channel: bec
      parameter: epsilon
      method: exact
      threshold: 0.42944
      uncertainty: 1.0e-12
      limit: 0.5
      gap: {parameter: 0.07056, rate: 0.07056}
`

func decode(t *testing.T, text string) Profile {
	t.Helper()
	p, _, err := DecodeProfile("p", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// What the program writes is read and written again as it stands.
func TestProfileIsWrittenAsRead(t *testing.T) {
	p, warnings, err := ReadProfile("p", strings.NewReader(whole))
	if err != nil || len(warnings) > 0 {
		t.Fatal(warnings, err)
	}
	rate := p.Ensemble.DesignRate()
	want := strings.Replace(whole, "0.489010989010989", document.FormatFloat(rate), 1)
	var b bytes.Buffer
	if n, err := p.WriteTo(&b); err != nil || n != int64(b.Len()) || b.String() != want {
		t.Errorf("%d bytes, %v:\n%s", n, err, b.String())
	}
	if math.Abs(rate-89./182) > 1e-15 { // 1 - (3/28 + 1/32)/(1/8 + 1/12 + 1/16)
		t.Errorf("the design rate is %v", rate)
	}
	if p.Results[1].Gap.DB != nil || *p.Results[0].Gap.DB != 0.139 || *p.Provenance.Seed != math.MaxUint64 {
		t.Errorf("got %+v", p)
	}
	if want := time.Date(2026, 12, 1, 10, 0, 0, 5e8, time.UTC); !p.Provenance.Created.Equal(want) {
		t.Errorf("created at %v, want %v", p.Provenance.Created, want)
	}
}

func TestProfileJSON(t *testing.T) {
	p := decode(t, whole)
	text, err := json.Marshal(p)
	if err != nil {
		t.Fatal(err)
	}
	back := decode(t, string(text))
	back.Provenance.Brief, p.Provenance.Brief = document.Tree{}, document.Tree{} // YAML writes it otherwise
	if !reflect.DeepEqual(back, p) {
		t.Errorf("%s\ncame back as %+v", text, back)
	}
	want := `{"kind":"profile","version":1,"lambda":{"3":1},"rho":{"6":1},"design_rate":0.5}`
	if text, err := json.Marshal(Profile{Ensemble: Regular(3, 6)}); err != nil || string(text) != want {
		t.Errorf("got %s, %v; want %s", text, err, want)
	}
}

// Random ensembles come back to the same bits, with their realizations.
func TestProfileRoundTrip(t *testing.T) {
	r := seeded(41)
	for range 200 {
		e := randomEnsemble(r, 10, 60)
		p := Profile{Ensemble: e}
		if realization, err := Realize(e, 1000+r.IntN(10_000), nil); err == nil {
			p.Realization = &realization
		}
		db := -r.ExpFloat64()
		p.Results = []Result{{"biawgn", "sigma", "gaussian", r.Float64(), math.Exp(-30 * r.Float64()), r.ExpFloat64(), Gap{r.NormFloat64(), &db, r.Float64() - 0.5}}}
		text, err := p.Encode()
		if err != nil {
			t.Fatal(err)
		}
		back, warnings, err := DecodeProfile("p", text)
		// A brief may come back in other quotes.
		asWritten := back
		if back.Provenance.Brief.Equal(p.Provenance.Brief) {
			asWritten.Provenance.Brief = p.Provenance.Brief
		}
		if err != nil || len(warnings) > 0 || !reflect.DeepEqual(asWritten, p) {
			t.Fatalf("%s\ncame back as %+v, %v, %v", text, back, warnings, err)
		}
	}
}

func TestProfileRefuses(t *testing.T) {
	const result = "{channel: bec, parameter: epsilon, method: exact, threshold: 0.4, uncertainty: 0, limit: 0.5, gap: {parameter: 0.1, rate: 0.1}}"
	const counts = "realization: {length: 100, checks: 50, edges: 300, variable_nodes: {3: 100}, check_nodes: {6: 50}}\n"
	const fractions = "degrees with their fractions of the edges, such as {2: 0.3, 3: 0.7}"
	swap := func(text, old, new string) string {
		if !strings.Contains(text, old) {
			t.Fatalf("%q is not in %q", old, text)
		}
		return strings.Replace(text, old, new, 1)
	}
	tests := []struct{ name, text, want string }{
		{"brief", "kind: brief\nversion: 1\nrate: 0.5\n", `p:1:7: kind: found "brief"; allowed: profile`},
		{"no lambda", swap(least, "lambda: {3: 1}\n", ""), "p:1:1: lambda: missing; allowed: " + fractions},
		{"slip in a key", swap(least, "lambda", "lamda"), "p:1:1: lambda: missing; allowed: " + fractions + "\n" +
			"p:3:1: lamda: found an unknown key; allowed: lambda (nearest of kind, version, title, lambda, rho, design_rate, results, provenance, realization)"},
		{"list", swap(least, "{3: 1}", "[3, 1]"), "p:3:9: lambda: found a list; allowed: " + fractions},
		{"empty", swap(least, "{3: 1}", "{}"), "p:3:9: lambda: found an empty mapping; allowed: " + fractions},
		{"degree 0", swap(least, "{3: 1}", "{0: 0.5, 3: 0.5}"), "p:3:10: lambda: found the key 0; allowed: a whole number from 1 to 1000000"},
		{"check degree 1", swap(least, "{6: 1}", "{1: 0.5, 6: 0.5}"), "p:4:7: rho: found the key 1; allowed: a whole number from 2 to 1000000"},
		{"degree too large", swap(least, "{3: 1}", "{1000001: 1}"), "p:3:10: lambda: found the key 1000001; allowed: a whole number from 1 to 1000000"},
		{"degree as fraction", swap(least, "{3: 1}", "{3.0: 1}"), "p:3:10: lambda: found the key 3.0; allowed: a whole number from 1 to 1000000"},
		{"degree twice", swap(least, "{3: 1}", "{3: 0.5, 3: 0.5}"), "p:3:18: lambda.3: found a duplicate key; allowed: each key once (first on line 3)"},
		{"negative fraction", swap(least, "{3: 1}", "{2: -0.5, 3: 1.5}"), "p:3:13: lambda.2: found -0.5; allowed: a number of at least 0"},
		{"NaN", swap(least, "{3: 1}", "{3: .nan}"), "p:3:13: lambda.3: found .nan; allowed: a number of at least 0"},
		{"infinity", swap(least, "{3: 1}", "{3: .inf}"), "p:3:13: lambda.3: found .inf; allowed: a number of at least 0"},
		{"sum", swap(least, "{3: 1}", "{2: 0.3, 3: 0.6}"), "p:3:9: lambda: found fractions that sum to 0.9; allowed: a sum of 1 within 1e-06"},
		{"sum of zeros", swap(least, "{6: 1}", "{6: 0}"), "p:4:6: rho: found fractions that sum to 0; allowed: a sum of 1 within 1e-06"},
		{"sum overflows", swap(least, "{6: 1}", "{6: 1e308, 7: 1e308}"), "p:4:6: rho: found fractions that sum to +Inf; allowed: a sum of 1 within 1e-06"},
		{"infinite rate", least + "design_rate: .inf\n", "p:5:14: design_rate: found .inf; allowed: a finite number"},
		{"second document", least + "---\n" + least, "p:5:1: found a second document; allowed: one document"},
		{"no method", least + "results: [" + swap(result, "method: exact, ", "") + "]\n", "p:5:11: results[0].method: missing; allowed: a word"},
		{"negative threshold", least + "results: [" + swap(result, "0.4", "-0.4") + "]\n", "p:5:72: results[0].threshold: found -0.4; allowed: a number of at least 0"},
		{"no gap", least + "results: [" + swap(result, ", gap: {parameter: 0.1, rate: 0.1}", "") + "]\n", "p:5:11: results[0].gap: missing; allowed: a mapping of keys to values"},
		{"gap in decibels", least + "results: [" + swap(result, "rate: 0.1", "dB: 1, rate: 0.1") + "]\n", "p:5:127: results[0].gap.dB: found an unknown key; allowed: db (nearest of parameter, db, rate)"},
		{"seed", least + "provenance: {seed: 1.5}\n", "p:5:20: provenance.seed: found 1.5; allowed: a whole number from 0 to 18446744073709551615"},
		{"created", least + "provenance: {created: 2026}\n", "p:5:23: provenance.created: found 2026; allowed: a time such as 2026-12-01T10:00:00Z"},
		{"created out of reach", least + "provenance: {created: 9999-12-31T23:00:00-12:00}\n", "p:5:23: provenance.created: found 9999-12-31T23:00:00-12:00; allowed: a time such as 2026-12-01T10:00:00Z"},
		{"alias in the brief", least + "provenance: {brief: {a: &a 1}}\n", "p:5:25: provenance.brief.a: found the anchor &a; allowed: a value without an anchor"},
		{"count as fraction", least + swap(counts, "{3: 100}", "{3: 1e2}"), "p:5:72: realization.variable_nodes.3: found 1e2; allowed: a whole number from 1 to 1000000000"},
		{"count of zero", least + swap(counts, "{3: 100}", "{3: 100, 4: 0}"), "p:5:80: realization.variable_nodes.4: found 0; allowed: a whole number from 1 to 1000000000"},
		{"length", least + swap(counts, "100", "99"), "p:5:23: realization.length: found 99; allowed: 100, the sum of variable_nodes, and at most 1000000000"},
		{"checks", least + swap(counts, "50", "51"), "p:5:36: realization.checks: found 51; allowed: 50, the sum of check_nodes, and at most 1000000000"},
		{"edges", least + swap(counts, "300", "301"), "p:5:47: realization.edges: found 301; allowed: 300, the sum of degree times number over variable_nodes"},
		{"sockets", least + swap(counts, "{6: 50}", "{6: 49, 7: 1}"), "p:5:91: realization.check_nodes: found 301 edges; allowed: 300 edges, as at variable_nodes"},
		{"repeated edges", least + "realization: {length: 3, checks: 2, edges: 9, variable_nodes: {3: 3}, check_nodes: {4: 1, 5: 1}}\n",
			"p:5:63: realization.variable_nodes: found degrees that no graph has without joining two nodes twice; allowed: degrees that fit check_nodes"},
		{"rate of the realization", least + swap(counts, "}}\n", "}, design_rate: 0.49}\n"), "p:5:113: realization.design_rate: found 0.49; allowed: 0.5, which is 1 - checks/length"},
	}
	for _, test := range tests {
		_, _, err := DecodeProfile("p", []byte(test.text))
		if err == nil || err.Error() != test.want {
			t.Errorf("%s:\n got %v\nwant %s", test.name, err, test.want)
		}
	}
}

func TestProfileWarns(t *testing.T) {
	tests := []struct {
		text string
		want []string
	}{
		{least, nil},
		{"kind: profile\nversion: 1\nlambda: {2: 0.1, 3: 0.2, 4: 0.7}\nrho: {6: 1}\n", nil}, // a sum within rounding
		{"kind: profile\nversion: 1\nlambda: {3: 0.9999995}\nrho: {6: 1}\n", []string{"p:3:9: lambda: the fractions sum to 0.9999995 and were normalised to sum to 1"}},
		{least + "design_rate: 0.500001\n", nil},
		{least + "design_rate: 0.51\n", []string{"p:5:14: design_rate: 0.51 is not the design rate of lambda and rho, which is 0.500000; results in this file may be out of date"}},
	}
	for _, test := range tests {
		p, warnings, err := DecodeProfile("p", []byte(test.text))
		if err != nil || !slices.Equal(warnings, test.want) {
			t.Errorf("%q: got %q, %v; want %q", test.text, warnings, err, test.want)
		}
		if x := Excess(p.Ensemble.Lambda); math.Abs(x) > roundingTolerance {
			t.Errorf("%q: the sum misses 1 by %g", test.text, x)
		}
	}
}

// Nothing is written that could not be read.
func TestEncodeRefuses(t *testing.T) {
	result := Result{"bec", "epsilon", "exact", 0.4, 0, 0.5, Gap{0.1, nil, 0.1}}
	bad := func(change func(*Result)) Profile {
		r := result
		change(&r)
		return Profile{Ensemble: Regular(3, 6), Results: []Result{r}}
	}
	tests := []struct {
		p    Profile
		want string
	}{
		{Profile{}, "profile:3:9: lambda: found an empty mapping; allowed: degrees with their fractions of the edges, such as {2: 0.3, 3: 0.7}\n" +
			"profile:4:6: rho: found an empty mapping; allowed: degrees with their fractions of the edges, such as {2: 0.3, 3: 0.7}"},
		{Profile{Ensemble: Ensemble{Distribution{{4, 0.5}, {3, 0.5}}, Distribution{{6, 1}}}}, "lambda and rho: must be made by NewDistribution, in order and with fractions that sum to 1"},
		{bad(func(r *Result) { r.Threshold = math.NaN() }), `profile:10:16: results[0].threshold: found "NaN"; allowed: a number of at least 0`},
		{bad(func(r *Result) { r.Limit = math.Inf(1) }), `profile:12:12: results[0].limit: found "+Inf"; allowed: a number of at least 0`},
		{bad(func(r *Result) { r.Gap.Rate = math.Inf(-1) }), `profile:13:33: results[0].gap.rate: found "-Inf"; allowed: a finite number`},
		{bad(func(r *Result) { r.Channel = "" }), `profile:7:14: results[0].channel: found ""; allowed: a word`},
		{Profile{Ensemble: Regular(3, 6), Realization: &Realization{Length: 10, Checks: 5, Edges: 31, VariableNodes: Counts{{3, 10}}, CheckNodes: Counts{{6, 5}}}},
			"profile:9:10: realization.edges: found 31; allowed: 30, the sum of degree times number over variable_nodes"},
	}
	for _, test := range tests {
		_, err := test.p.Encode()
		if err == nil || err.Error() != test.want {
			t.Errorf("Encode:\n got %v\nwant %s", err, test.want)
		}
		if _, err := test.p.MarshalJSON(); err == nil {
			t.Errorf("MarshalJSON wrote what gives %q", test.want)
		}
	}
}

func TestValidate(t *testing.T) {
	good := Realization{Length: 10, Checks: 5, Edges: 30, VariableNodes: Counts{{3, 10}}, CheckNodes: Counts{{6, 5}}}
	if err := good.Validate(); err != nil {
		t.Error(err)
	}
	tests := []struct {
		change func(*Realization)
		want   string
	}{
		{func(r *Realization) { r.VariableNodes = nil }, "variable_nodes: found no nodes; allowed: at least one"},
		{func(r *Realization) { r.CheckNodes = Counts{{1, 30}} }, "check_nodes: found degree 1; allowed: degrees from 2 to 1000000"},
		{func(r *Realization) { r.VariableNodes = Counts{{3, -10}} }, "variable_nodes: found -10 nodes of degree 3; allowed: from 1 to 1000000000"},
		{func(r *Realization) { r.VariableNodes = Counts{{3, 5}, {3, 5}} }, "variable_nodes: found degree 3 after 3; allowed: degrees in increasing order"},
		{func(r *Realization) { r.Length = 11; r.Checks = 6 }, "length: found 11; allowed: 10, the sum of variable_nodes, and at most 1000000000\n" +
			"checks: found 6; allowed: 5, the sum of check_nodes, and at most 1000000000"},
		{func(r *Realization) { r.Edges = 31 }, "edges: found 31; allowed: 30, the sum of degree times number over variable_nodes"},
	}
	for _, test := range tests {
		r := good
		test.change(&r)
		if err := r.Validate(); err == nil || err.Error() != test.want {
			t.Errorf("got %v, want %s", err, test.want)
		}
	}
}

// The rate is what 1 - checks/length gives in double precision, to the bit.
func TestRealizationRate(t *testing.T) {
	r := Realization{Length: 3, Checks: 1}
	if got, third := r.DesignRate(), 1.0/3; got != 1-third {
		t.Errorf("got %v, want %v", got, 1-third)
	}
}

// What is accepted is written, and from then on nothing changes any more.
func FuzzDecodeProfile(f *testing.F) {
	f.Add([]byte(least))
	f.Add([]byte(whole))
	f.Add([]byte(`{"kind": "profile", "version": 1, "lambda": {"3": 1}, "rho": {"6": 0.9999999}, "design_rate": -1e-300}`))
	f.Add([]byte(least + "provenance:\n  brief: [{0:0}]\n"))
	f.Add([]byte(least + "title: >\n  a\n\n  b\nprovenance:\n  created: 2026-12-01T10:00:00+14:00\n  brief: [1, {a: ~}]\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		p, _, err := DecodeProfile("p", data)
		if err != nil {
			return
		}
		text, err := p.Encode()
		if err != nil {
			t.Fatalf("%q: %v", data, err)
		}
		back, warnings, err := DecodeProfile("p", text)
		// A brief may come back in other quotes.
		asWritten := back
		if back.Provenance.Brief.Equal(p.Provenance.Brief) {
			asWritten.Provenance.Brief = p.Provenance.Brief
		}
		if err != nil || len(warnings) > 0 || !reflect.DeepEqual(asWritten, p) {
			t.Fatalf("%q was written as %q and came back as %+v, %v, %v; want %+v", data, text, back, warnings, err, p)
		}
		if again, err := back.Encode(); err != nil || !bytes.Equal(again, text) {
			t.Fatalf("%q was written as %q and then as %q, %v", data, text, again, err)
		}
		if text, err := json.Marshal(p); err != nil || !json.Valid(text) {
			t.Fatalf("%q as JSON: %q, %v", data, text, err)
		}
	})
}

func ExampleDecodeProfile() {
	_, _, err := DecodeProfile("quay.yaml", []byte(`kind: profile
version: 1
lambda: {2: 0.3, 3: 0.6}
rho: {6.5: 1}
desing_rate: 0.5
`))
	fmt.Println(err)
	// Output:
	// quay.yaml:3:9: lambda: found fractions that sum to 0.9; allowed: a sum of 1 within 1e-06
	// quay.yaml:4:7: rho: found the key 6.5; allowed: a whole number from 2 to 1000000
	// quay.yaml:5:1: desing_rate: found an unknown key; allowed: design_rate (nearest of kind, version, title, lambda, rho, design_rate, results, provenance, realization)
}

func ExampleProfile_Encode() {
	lambda, _ := ParseDistribution("2:0.4,3:0.6")
	text, err := Profile{Title: "quay 7", Ensemble: Ensemble{lambda, Concentrated(5)}}.Encode()
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Print(string(text))
	// Output:
	// kind: profile
	// version: 1
	// title: quay 7
	// lambda: {2: 0.4, 3: 0.6}
	// rho: {5: 1}
	// design_rate: 0.5
}

func BenchmarkDecodeProfile(b *testing.B) {
	b.SetBytes(int64(len(whole)))
	for b.Loop() {
		if _, _, err := DecodeProfile("p", []byte(whole)); err != nil {
			b.Fatal(err)
		}
	}
}

package document

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
	"testing/iotest"
	"time"
)

// sample asks for something of every type.
func sample(d *Document) {
	root := d.Kind("sample", 1)
	_ = root.Optional("title").String()
	root.Optional("name").Word()
	root.Optional("channel").Choice("bec", "bsc", "biawgn")
	root.Optional("rate").Float(Between(0, 1))
	root.Optional("gap").Float(Finite)
	root.Optional("iterations").Int(1, 1000)
	root.Optional("edges").Int(1, math.MaxInt)
	root.Optional("seed").Uint64()
	root.Optional("plot").Bool()
	root.Optional("time").Duration(time.Millisecond, time.Hour)
	root.Optional("created").Time()
	root.Optional("allowed").Ints(2, 100)
	root.Optional("masses").Floats(AtLeast(0))
	root.Optional("notes").Strings()
	root.Optional("kept").Tree()
	for _, e := range root.Optional("lambda").ByDegree(1, 100, "degrees with fractions") {
		e.Value.Float(FromTo(0, 1))
	}
	if link := root.Optional("link"); link.Present() {
		m := link.Mapping()
		m.Required("symbol_rate").Float(Above(0))
		m.Optional("source").Mapping().Required("bits").Int(1, 8)
	}
}

const sampleHead = "kind: sample\nversion: 1\n"

func TestAccepts(t *testing.T) {
	for _, text := range []string{
		sampleHead,
		"# yaml-language-server: $schema=sample.json\n" + sampleHead,
		"$schema: sample.json\n" + sampleHead,
		"---\n" + sampleHead + "...\n",
		"\ufeff" + sampleHead,
		strings.ReplaceAll(sampleHead, "\n", "\r\n"),
		`{"kind": "sample", "version": 1, "lambda": {"2": 0.5, "3": 5e-1}}`,
		"{\n\t\"kind\": \"sample\",\n\t\"version\": 1\n}\n",
		sampleHead + "title: 2026\nname: x\nchannel: \"bec\"\nrate: .5\ngap: -1.5e+3\niterations: 1000\nedges: 9223372036854775807\n" +
			"seed: 18446744073709551615\nplot: true\ntime: 90s\ncreated: 2026-12-01T10:00:00+01:00\nallowed: [3, 2]\nmasses: [0, 1.5]\n" +
			"notes: []\nkept: [{a: b}, null]\nlambda: {2: 1, 3: 0}\nlink:\n  symbol_rate: 1e6\n  source: {bits: 8}\n",
	} {
		d := Parse("sample.yaml", []byte(text))
		if sample(d); d.Err() != nil {
			t.Errorf("%q: %v", text, d.Err())
		}
	}
}

func TestValues(t *testing.T) {
	d := Parse("f", []byte(`
title: "a: b"
plain: 0.10
n: -7
seed: 18446744073709551615
yes: true
time: 1h30m
created: 2026-12-01T10:00:00+01:00
allowed: [3, 2]
masses: [0, 1.5]
notes: [a, 2]
lambda: {3: 0.75, 2: 0.25}
`))
	m := d.Root()
	check := func(what string, got, want any) {
		t.Helper()
		if fmt.Sprint(got) != fmt.Sprint(want) {
			t.Errorf("%s: got %v, want %v", what, got, want)
		}
	}
	check("String", m.Required("title").String(), "a: b")
	check("String of a number", m.Required("plain").String(), "0.10")
	check("Float", m.Required("plain").Float(Finite), 0.1)
	check("Int", m.Required("n").Int(-10, 10), -7)
	check("Uint64", m.Required("seed").Uint64(), uint64(math.MaxUint64))
	check("Bool", m.Required("yes").Bool(), true)
	check("Duration", m.Required("time").Duration(0, 2*time.Hour), 90*time.Minute)
	check("Time", m.Required("created").Time(), time.Date(2026, 12, 1, 9, 0, 0, 0, time.UTC))
	check("Ints", m.Required("allowed").Ints(1, 5), []int{3, 2})
	check("Floats", m.Required("masses").Floats(Finite), []float64{0, 1.5})
	check("Strings", m.Required("notes").Strings(), []string{"a", "2"})
	entries := m.Required("lambda").ByDegree(1, 5, "degrees")
	check("first degree", entries[0].Key, 3)
	check("its fraction", entries[0].Value.Float(Finite), 0.75)
	check("path", entries[1].Value.Key(), "lambda.2")
	check("missing", m.Optional("other").Int(5, 6), 0)
	check("missing is present", m.Optional("other").Present(), false)
	if err := d.Err(); err != nil {
		t.Error(err)
	}
}

func TestProblems(t *testing.T) {
	deep := sampleHead + "kept: " + strings.Repeat("[", 40) + strings.Repeat("]", 40) + "\n"
	tests := []struct{ name, text, want string }{
		// The document.
		{"empty", "", "f:1:1: found an empty document; allowed: a mapping of keys to values"},
		{"comment alone", "# nothing\n", "f:1:1: found an empty document; allowed: a mapping of keys to values"},
		{"null", "~\n", "f:1:1: found nothing; allowed: a mapping of keys to values"},
		{"text", "threshold\n", `f:1:1: found "threshold"; allowed: a mapping of keys to values`},
		{"list", "- kind: sample\n", "f:1:1: found a list; allowed: a mapping of keys to values"},
		{"second document", sampleHead + "---\nrate: 0.5\n", "f:3:1: found a second document; allowed: one document"},
		{"empty second document", sampleHead + "---\n", "f:3:1: found a second document; allowed: one document"},
		{"trailing text", sampleHead + "...\ntext\n", "f:4:1: found a syntax error (did not find expected <document start>); allowed: YAML"},
		{"too deep", deep, "f:3:38: kept" + strings.Repeat("[0]", 31) + ": found nesting deeper than 32; allowed: nesting up to 32"},
		{"too large", strings.Repeat("#", MaxSize+1), "f:1:1: found more than 4 MiB; allowed: at most 4 MiB"},
		// Kind and version.
		{"no kind", "version: 1\n", "f:1:1: kind: missing; allowed: sample"},
		{"other kind", "kind: profile\nversion: 2\nlambda: {3: 1}\n", `f:1:7: kind: found "profile"; allowed: sample`},
		{"no version", "kind: sample\n", "f:1:1: version: missing; allowed: 1"},
		{"other version", "kind: sample\nversion: 2\n", "f:2:10: version: found 2; allowed: 1"},
		// Syntax.
		{"colon in text", sampleHead + "title: a: b\n", "f:3:1: found a syntax error (mapping values are not allowed in this context); allowed: YAML"},
		{"tab", "link:\n\tsymbol_rate: 1\n", "f:2:2: found a syntax error (found character that cannot start any token); allowed: YAML"},
		{"open bracket", sampleHead + "allowed: [2, 3\n", "f:3:1: found a syntax error (did not find expected ',' or ']'); allowed: YAML"},
		{"open quote", "kind: \"sample\n", "f:2:1: found a syntax error (found unexpected end of stream); allowed: YAML"},
		{"not UTF-8", sampleHead + "title: \xff\n", "f:3:1: found a syntax error (bytes that are not UTF-8); allowed: YAML"},
		{"control character", sampleHead + "title: \x01\n", "f:3:1: found a syntax error (control characters are not allowed); allowed: YAML"},
		{"unknown alias", sampleHead + "rate: *half\n", "f:3:1: found a syntax error (unknown anchor 'half' referenced); allowed: YAML"},
		// Structure.
		{"anchor", sampleHead + "title: &a x\n", "f:3:8: title: found the anchor &a; allowed: a value without an anchor"},
		{"alias", sampleHead + "title: &a x\nname: *a\n", "f:3:8: title: found the anchor &a; allowed: a value without an anchor\nf:4:7: name: found the alias *a; allowed: a value written out"},
		{"alias of itself", sampleHead + "kept: &a [*a]\n", "f:3:7: kept: found the anchor &a; allowed: a value without an anchor\nf:3:11: kept[0]: found the alias *a; allowed: a value written out"},
		{"merge key", sampleHead + "<<: {rate: 0.5}\n", "f:3:1: <<: found a merge key; allowed: keys written out"},
		{"tag", sampleHead + "iterations: !!int \"5\"\n", "f:3:13: iterations: found the tag !!int; allowed: a value without a tag"},
		{"own tag", sampleHead + "kept: {a: !b c}\n", "f:3:11: kept.a: found the tag !b; allowed: a value without a tag"},
		{"key that is a list", sampleHead + "? [a]\n: 1\n", "f:3:3: found a key that is a list; allowed: a key of one word"},
		{"duplicate key", sampleHead + "rate: 0.5\nrate: 0.6\n", "f:4:1: rate: found a duplicate key; allowed: each key once (first on line 3)"},
		{"duplicate key deep down", sampleHead + "kept: [{a: 1, a: 1}]\n", "f:3:15: kept[0].a: found a duplicate key; allowed: each key once (first on line 3)"},
		{"degree twice", sampleHead + "lambda: {2: 0.5, \"2\": 0.5}\n", "f:3:18: lambda.2: found a duplicate key; allowed: each key once (first on line 3)"},
		// Keys.
		{"slip in a key", sampleHead + "link: {symbolrate: 1, symbol_rate: 1}\n", "f:3:8: link.symbolrate: found an unknown key; allowed: symbol_rate (nearest of symbol_rate, source)"},
		{"foreign key", sampleHead + "link: {symbol_rate: 1, blocks: 1}\n", "f:3:24: link.blocks: found an unknown key; allowed: symbol_rate, source"},
		{"key with a point", sampleHead + "link: {symbol_rate: 1, a.b: 1}\n", `f:3:24: link."a.b": found an unknown key; allowed: symbol_rate, source`},
		{"missing key", sampleHead + "link: {}\n", "f:3:7: link.symbol_rate: missing; allowed: a number above 0"},
		{"missing key deep down", sampleHead + "link: {symbol_rate: 1, source: {}}\n", "f:3:32: link.source.bits: missing; allowed: a whole number from 1 to 8"},
		{"empty value", sampleHead + "rate:\n", "f:3:1: rate: found nothing; allowed: a number above 0 and below 1"},
		{"null as text", sampleHead + "title: null\n", "f:3:8: title: found nothing; allowed: text"},
		{"mapping for text", sampleHead + "title: {a: b}\n", "f:3:8: title: found a mapping; allowed: text"},
		{"text for a mapping", sampleHead + "link: fast\n", `f:3:7: link: found "fast"; allowed: a mapping of keys to values`},
		// Words.
		{"two words", sampleHead + "name: two words\n", `f:3:7: name: found "two words"; allowed: a word`},
		{"no word", sampleHead + "name: ''\n", `f:3:7: name: found ""; allowed: a word`},
		{"slip in a choice", sampleHead + "channel: biwagn\n", `f:3:10: channel: found "biwagn"; allowed: biawgn (nearest of bec, bsc, biawgn)`},
		{"no choice", sampleHead + "channel: optical\n", `f:3:10: channel: found "optical"; allowed: bec, bsc, biawgn`},
		{"long value", sampleHead + "channel: " + strings.Repeat("é", 50) + "\n", `f:3:10: channel: found "` + strings.Repeat("é", 30) + `"…; allowed: bec, bsc, biawgn`},
		{"yes", sampleHead + "plot: yes\n", `f:3:7: plot: found "yes"; allowed: true or false`},
		{"quoted truth", sampleHead + "plot: \"true\"\n", `f:3:7: plot: found "true"; allowed: true or false`},
		{"no unit", sampleHead + "time: 60\n", "f:3:7: time: found 60; allowed: a length of time from 1ms to 1h with its unit, such as 90s or 1h30m"},
		{"too long", sampleHead + "time: 61m\n", `f:3:7: time: found "61m"; allowed: a length of time from 1ms to 1h with its unit, such as 90s or 1h30m`},
		{"no time", sampleHead + "created: yesterday\n", `f:3:10: created: found "yesterday"; allowed: a time such as 2026-12-01T10:00:00Z`},
		{"day alone", sampleHead + "created: 2026-12-01\n", "f:3:10: created: found 2026-12-01; allowed: a time such as 2026-12-01T10:00:00Z"},
		// Numbers.
		{"end of an open range", sampleHead + "rate: 1\n", "f:3:7: rate: found 1; allowed: a number above 0 and below 1"},
		{"below", sampleHead + "rate: -0.5\n", "f:3:7: rate: found -0.5; allowed: a number above 0 and below 1"},
		{"infinity", sampleHead + "gap: .inf\n", "f:3:6: gap: found .inf; allowed: a finite number"},
		{"minus infinity", sampleHead + "gap: -Inf\n", `f:3:6: gap: found "-Inf"; allowed: a finite number`},
		{"not a number", sampleHead + "gap: .nan\n", "f:3:6: gap: found .nan; allowed: a finite number"},
		{"overflow", sampleHead + "gap: 1e999\n", `f:3:6: gap: found "1e999"; allowed: a finite number`},
		{"quoted number", sampleHead + "gap: \"1\"\n", `f:3:6: gap: found "1"; allowed: a finite number`},
		{"comma", sampleHead + "gap: 0,5\n", `f:3:6: gap: found "0,5"; allowed: a finite number`},
		{"hexadecimal", sampleHead + "gap: 0x10\n", "f:3:6: gap: found 0x10; allowed: a finite number"},
		{"underscore", sampleHead + "gap: 1_000\n", "f:3:6: gap: found 1_000; allowed: a finite number"},
		{"leading zero", sampleHead + "gap: 010\n", "f:3:6: gap: found 010; allowed: a finite number"},
		{"fraction for a whole number", sampleHead + "iterations: 1.5\n", "f:3:13: iterations: found 1.5; allowed: a whole number from 1 to 1000"},
		{"point for a whole number", sampleHead + "iterations: 5.0\n", "f:3:13: iterations: found 5.0; allowed: a whole number from 1 to 1000"},
		{"exponent for a whole number", sampleHead + "iterations: 1e2\n", "f:3:13: iterations: found 1e2; allowed: a whole number from 1 to 1000"},
		{"octal", sampleHead + "iterations: 010\n", "f:3:13: iterations: found 010; allowed: a whole number from 1 to 1000"},
		{"new octal", sampleHead + "iterations: 0o10\n", "f:3:13: iterations: found 0o10; allowed: a whole number from 1 to 1000"},
		{"plus", sampleHead + "iterations: +5\n", "f:3:13: iterations: found +5; allowed: a whole number from 1 to 1000"},
		{"quoted whole number", sampleHead + "iterations: '5'\n", `f:3:13: iterations: found "5"; allowed: a whole number from 1 to 1000`},
		{"beyond 64 bits", sampleHead + "edges: 9223372036854775808\n", "f:3:8: edges: found 9223372036854775808; allowed: a whole number of at least 1"},
		{"negative seed", sampleHead + "seed: -1\n", "f:3:7: seed: found -1; allowed: a whole number from 0 to 18446744073709551615"},
		{"seed beyond 64 bits", sampleHead + "seed: 18446744073709551616\n", "f:3:7: seed: found 18446744073709551616; allowed: a whole number from 0 to 18446744073709551615"},
		// Lists and degrees.
		{"empty list", sampleHead + "allowed: []\n", "f:3:10: allowed: found an empty list; allowed: a list of different numbers, each a whole number from 2 to 100"},
		{"one number for a list", sampleHead + "allowed: 5\n", "f:3:10: allowed: found 5; allowed: a list of different numbers, each a whole number from 2 to 100"},
		{"number twice", sampleHead + "allowed: [2, 3, 2]\n", "f:3:17: allowed[2]: found 2 a second time; allowed: each number once"},
		{"bad item", sampleHead + "allowed: [2, 1]\n", "f:3:14: allowed[1]: found 1; allowed: a whole number from 2 to 100"},
		{"text among numbers", sampleHead + "masses:\n  - 1\n  - x\n", `f:5:5: masses[1]: found "x"; allowed: a number of at least 0`},
		{"degree as fraction", sampleHead + "lambda: {2.5: 1}\n", "f:3:10: lambda: found the key 2.5; allowed: a whole number from 1 to 100"},
		{"degree 0", sampleHead + "lambda: {0: 1}\n", "f:3:10: lambda: found the key 0; allowed: a whole number from 1 to 100"},
		{"degree as octal", sampleHead + "lambda: {010: 1}\n", "f:3:10: lambda: found the key 010; allowed: a whole number from 1 to 100"},
		{"no degree", sampleHead + "lambda: {}\n", "f:3:9: lambda: found an empty mapping; allowed: degrees with fractions"},
		{"degrees as list", sampleHead + "lambda: [2, 3]\n", "f:3:9: lambda: found a list; allowed: degrees with fractions"},
		{"fraction of a degree", sampleHead + "lambda:\n  2: 0.5\n  3: half\n", `f:5:6: lambda.3: found "half"; allowed: a number from 0 to 1`},
		// All of them, in order.
		{"several", "kind: sample\nrate: 2\nversion: 1\niterations: x\n", "f:2:7: rate: found 2; allowed: a number above 0 and below 1\nf:4:13: iterations: found \"x\"; allowed: a whole number from 1 to 1000"},
	}
	for _, test := range tests {
		d := Parse("f", []byte(test.text))
		sample(d)
		err := d.Err()
		if err == nil {
			t.Errorf("%s: no problem found", test.name)
			continue
		}
		if err.Error() != test.want {
			t.Errorf("%s:\n got %v\nwant %s", test.name, err, test.want)
		}
		if problems := (Problems)(nil); !errors.As(err, &problems) {
			t.Errorf("%s: the error is a %T", test.name, err)
		}
	}
}

func TestManyProblems(t *testing.T) {
	d := Parse("f", []byte("masses:\n"+strings.Repeat("  - x\n", 60)))
	d.Root().Required("masses").Floats(Finite)
	lines := strings.Split(d.Err().Error(), "\n")
	if want := "f: and 10 more problems"; len(lines) != 51 || lines[50] != want {
		t.Errorf("%d lines, the last %q; want 51, the last %q", len(lines), lines[len(lines)-1], want)
	}
}

func TestReadError(t *testing.T) {
	d := Read("f", iotest.ErrReader(errors.New("is a directory")))
	sample(d)
	if want := "f: found is a directory; allowed: a readable file"; d.Err() == nil || d.Err().Error() != want {
		t.Errorf("got %v, want %s", d.Err(), want)
	}
	d = Read("f", strings.NewReader(strings.Repeat(" ", MaxSize+1)))
	if want := "f:1:1: found more than 4 MiB; allowed: at most 4 MiB"; d.Err() == nil || d.Err().Error() != want {
		t.Errorf("got %v, want %s", d.Err(), want)
	}
}

func TestWarnings(t *testing.T) {
	d := Parse("f", []byte("rate: 0.5\n"))
	d.Root().Required("rate").Warn("is an old key")
	if got, want := d.Warnings(), []string{"f:1:7: rate: is an old key"}; !slices.Equal(got, want) || d.Err() != nil {
		t.Errorf("got %q, %v; want %q", got, d.Err(), want)
	}
}

// Known keys need not be asked for; nothing follows from a value that is
// missing or was refused.
func TestKnownAndSilence(t *testing.T) {
	d := Parse("f", []byte("a: 1\nb: [\n  x]\n"))
	m := d.Root()
	m.Known("a")
	b := m.Required("b").Mapping()
	b.Required("c").Int(1, 2)
	b.Optional("d").Mapping().Required("e").Float(Finite)
	if b.Present() {
		t.Error("a list is present as a mapping")
	}
	if want := "f:2:4: b: found a list; allowed: a mapping of keys to values"; d.Err() == nil || d.Err().Error() != want {
		t.Errorf("got %v, want %s", d.Err(), want)
	}
}

func TestRange(t *testing.T) {
	tests := []struct {
		r    Range
		text string
		in   []float64
		out  []float64
	}{
		{Finite, "a finite number", []float64{0, -1e308}, []float64{math.Inf(1), math.NaN()}},
		{FromTo(0, 0.5), "a number from 0 to 0.5", []float64{0, 0.5}, []float64{-1e-9, 0.6}},
		{Between(0, 1), "a number above 0 and below 1", []float64{0.5}, []float64{0, 1}},
		{AtLeast(-3), "a number of at least -3", []float64{-3, 1e300}, []float64{-3.1, math.Inf(1)}},
		{Above(0), "a number above 0", []float64{5e-324}, []float64{0}},
		{Range{Low: 0, High: 1, OpenHigh: true}, "a number of at least 0 and below 1", []float64{0}, []float64{1}},
		{Range{Low: math.Inf(-1), High: 2}, "a number of at most 2", []float64{2}, []float64{2.1, math.Inf(-1)}},
	}
	for _, test := range tests {
		if got := test.r.String(); got != test.text {
			t.Errorf("got %q, want %q", got, test.text)
		}
		for _, x := range test.in {
			if !test.r.Contains(x) {
				t.Errorf("%v does not contain %v", test.r, x)
			}
		}
		for _, x := range test.out {
			if test.r.Contains(x) {
				t.Errorf("%v contains %v", test.r, x)
			}
		}
	}
}

func TestNearest(t *testing.T) {
	keys := []string{"lambda", "rho", "design_rate", "results"}
	for word, want := range map[string]string{"lamda": "lambda", "lambad": "lambda", "design-rate": "design_rate", "ro": "rho", "x": "", "threshold": "", "": ""} {
		if got := nearest(word, keys); got != want {
			t.Errorf("nearest to %q is %q, want %q", word, got, want)
		}
	}
}

// A short text that stands for 2³⁰ values is refused at once.
func TestNestedAliases(t *testing.T) {
	text := "a0: &a0 [x, x]\n"
	for i := 1; i <= 30; i++ {
		text += fmt.Sprintf("a%d: &a%d [*a%d, *a%d]\n", i, i, i-1, i-1)
	}
	d := Parse("f", []byte(text))
	d.Root()
	if problems := (Problems)(nil); !errors.As(d.Err(), &problems) || len(problems) < 60 {
		t.Errorf("got %d problems", len(problems))
	}
}

// Whatever the text, reading ends without panic, and what is wrong has a
// place within the text.
func FuzzParse(f *testing.F) {
	for _, text := range []string{
		sampleHead, sampleHead + "lambda: {2: 1}\nlink: {symbol_rate: 1}\n", "a: &b [*b]\n", "? {a: b}\n: c\n", "<<: {}\n", "--- |\n  x\n...\n# c\n",
		"kind: sample\nversion: 1\ntitle: >\n  a\n\n  b\nallowed: [2,2]\n", "{\"a\": \"\\u0000\"}", "\xef\xbb\xbf\r\n", "a: !!binary x\n", "%YAML 1.1\n---\na: 1\n", "- - - -\n", "a:\n - b\n  c\n",
	} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		d := Parse("f", data)
		sample(d)
		problems := Problems(nil)
		if err := d.Err(); err != nil && !errors.As(err, &problems) {
			t.Fatalf("the error is a %T", err)
		}
		lines := strings.Count(strings.NewReplacer("\r\n", "\n", "\r", "\n", "\u0085", "\n", "\u2028", "\n", "\u2029", "\n").Replace(string(data)), "\n") + 2
		for _, p := range problems {
			if p.Line < 1 || p.Line > lines || p.Column < 1 || p.Allowed == "" {
				t.Errorf("%+v in %d lines", p, lines)
			}
		}
	})
}

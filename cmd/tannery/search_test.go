package main

import (
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"sync/atomic"
	"syscall"
	"testing"

	"tannery/cmd/tannery/internal/brief"
	"tannery/de/channel"
	"tannery/ensembles"
)

// quickSearch takes a fraction of a second.
const quickSearch = "search --channel bec --rate 0.5 --max-variable-degree 6 --seed 1"

func TestSearchSendsEachThingItsWay(t *testing.T) {
	file := filepath.Join(t.TempDir(), "best.yaml")
	code, report, stderr := command(t, "", strings.Fields(quickSearch+" -o "+file)...)
	if code != exitDone || stderr != "" || !strings.Contains(report, "Shannon limit") {
		t.Fatalf("-o FILE: code %d, stdout %q, stderr %q", code, report, stderr)
	}
	content, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	p, _, err := ensembles.DecodeProfile(file, content)
	if err != nil || len(p.Results) != 1 || p.Provenance.Brief.IsZero() || *p.Provenance.Seed != 1 {
		t.Errorf("profile %+v, %v", p, err)
	}
	if rate := p.Ensemble.DesignRate(); rate < 0.5-1e-12 || rate > 0.5+1e-12 {
		t.Errorf("design rate %v, want 0.5", rate)
	}

	t.Setenv("SOURCE_DATE_EPOCH", "0")
	code, yaml, stderr := command(t, "", strings.Fields(quickSearch+" -o -")...)
	if code != exitDone || !strings.Contains(stderr, "Shannon limit") {
		t.Errorf("-o -: code %d, stderr %q", code, stderr)
	}
	again, _, err := ensembles.DecodeProfile("-", []byte(yaml))
	if err != nil || !reflect.DeepEqual(again.Ensemble, p.Ensemble) {
		t.Errorf("-o -: %v\n%s", err, yaml)
	}

	code, yaml, stderr = command(t, "", strings.Fields(quickSearch+" -o - --quiet")...)
	if code != exitDone || stderr != "" || !strings.HasPrefix(yaml, "kind: profile\n") {
		t.Errorf("-o - --quiet: code %d, stdout %q, stderr %q", code, yaml, stderr)
	}
}

func TestSearchJSON(t *testing.T) {
	var answer struct {
		Schema      string
		Profile     map[string]any
		Status      string
		Evaluations int
		Seconds     float64
		Certificate struct{ Bound, Above float64 }
	}
	text := succeed(t, "", strings.Fields(quickSearch+" --json")...)
	if err := json.Unmarshal([]byte(text), &answer); err != nil {
		t.Fatal(err)
	}
	if answer.Schema != "tannery/search/1" || answer.Profile["kind"] != "profile" || answer.Status == "" || answer.Evaluations < 1 || answer.Seconds <= 0 {
		t.Errorf("%+v", answer)
	}
	if c := answer.Certificate; !(c.Bound > 0.4 && c.Bound < 0.5 && c.Above < 1e-9) {
		t.Errorf("certificate %+v", c)
	}
}

// Several channels with a decoder's limits: the worst gap is told first, and
// the profile has a result for each channel, for a decoder without a limit on
// iterations.
func TestSearchOnSeveralChannels(t *testing.T) {
	args := strings.Fields("search --channel biawgn,bsc --rate 0.5 --variable-degrees 2,3,5 --check-degrees 6 --evaluations 10")
	type threshold struct {
		Channel   string
		Threshold float64
		Gap       struct{ Rate float64 }
		Limited   struct {
			Iterations  int
			TargetError float64 `json:"target_error"`
		}
	}
	var answer struct {
		Status     string
		Thresholds []threshold
		Profile    struct{ Results []threshold }
	}
	if err := json.Unmarshal([]byte(succeed(t, "", append(args, "--max-iterations", "30", "--json")...)), &answer); err != nil {
		t.Fatal(err)
	}
	if answer.Status != "evaluation limit" || len(answer.Thresholds) != 2 || len(answer.Profile.Results) != 2 {
		t.Fatalf("%+v", answer)
	}
	for i, name := range []string{"biawgn", "bsc"} {
		limited, whole := answer.Thresholds[i], answer.Profile.Results[i]
		if limited.Channel != name || whole.Channel != name || limited.Limited.Iterations != 30 || limited.Limited.TargetError != 1e-6 || !(limited.Threshold < whole.Threshold) {
			t.Errorf("%+v, without the limit %+v", limited, whole)
		}
	}
	text := succeed(t, "", args...)
	table := text[strings.Index(text, "Channels, the worst gap in rate first"):]
	first, other := "bsc", "biawgn"
	if strings.Index(table, " biawgn") < strings.Index(table, " bsc") {
		first, other = other, first
	}
	if !strings.Contains(table, "Threshold on "+first) || strings.Contains(table, "Threshold on "+other) {
		t.Errorf("not of the worst channel:\n%s", text)
	}
}

// The profile found does not depend on the number of workers.
func TestSearchIsReproducible(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "0")
	one := succeed(t, "", strings.Fields(quickSearch+" -o - -q --workers 1")...)
	three := succeed(t, "", strings.Fields(quickSearch+" -o - -q --workers 3")...)
	if one != three {
		t.Errorf("one worker:\n%s\nthree:\n%s", one, three)
	}
	const quantized = "search --channel biawgn --rate 0.5 --max-variable-degree 5 --evaluations 25 -o - -q --workers "
	one = succeed(t, "", strings.Fields(quantized+"1")...)
	two := succeed(t, "", strings.Fields(quantized+"2")...)
	if one != two {
		t.Errorf("one worker:\n%s\ntwo:\n%s", one, two)
	}
}

func TestOptionsWinOverTheBrief(t *testing.T) {
	const text = "kind: brief\nversion: 1\nchannel: biawgn\nrate: 0.3\nvariable_degrees: {max: 9}\n"
	yaml := succeed(t, text, strings.Fields("search - --channel bec --rate 0.5 --variable-degrees 2,3,6 --seed 4 -o - -q")...)
	for _, want := range []string{"channel: bec", "rate: 0.5", "allowed: [2, 3, 6]", "seed: 4"} {
		if !strings.Contains(yaml, want) {
			t.Errorf("no %q in\n%s", want, yaml)
		}
	}
}

// What is written into a profile about its brief reads back as that brief.
func TestBriefOfProvenance(t *testing.T) {
	for _, want := range []brief.Brief{
		{Channel: "bec", Rate: 0.5, Seed: 7},
		{Title: "harbour: it's full", Channel: "biawgn", Rate: 0.25, Method: "gaussian", VariableDegrees: brief.Degrees{Max: 15},
			CheckDegrees: brief.Degrees{Allowed: []int{3, 9}}, Iterations: 9, TargetError: 1e-5, EdgesPerBit: 3.25, DegreeTwo: "parity",
			DistinctDegrees: 3, StabilityMargin: 0.02, Seed: 1<<64 - 1},
		{Channel: "bsc", Rate: 0.5, Link: &brief.Link{SourceRate: 9600, SourceProbability: 0.5, SymbolRate: 19200, Parameter: 0.01}},
		{Channel: "biawgn", Also: []string{"bsc", "laplace"}, Rate: 0.5},
	} {
		for _, name := range append([]string{want.Channel}, want.Also...) {
			f, err := channel.ByName(name)
			if err != nil {
				t.Fatal(err)
			}
			want.Families = append(want.Families, f)
		}
		tree, err := asked(want)
		if err != nil {
			t.Fatal(err)
		}
		text, err := tree.YAML()
		if err != nil {
			t.Fatal(err)
		}
		got, err := brief.Decode("provenance", text, brief.Channels{}).Finish()
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Errorf("%v\n%s got %+v\nwant %+v", err, text, got, want)
		}
	}
}

func TestBadBriefs(t *testing.T) {
	for _, c := range []struct {
		args, stdin string
		code        int
		want        string
	}{
		{"search", "", exitUsage, "--channel: missing; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name\ntannery: --rate: missing; allowed: a number above 0 and below 1"},
		{"search -", "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\nlimits: {iteration: 3}\n", exitUsage,
			"standard input:5:10: limits.iteration: found an unknown key; allowed: iterations (nearest of iterations, target_error, edges_per_bit, degree_two, distinct_degrees, stability_margin)"},
		{"search -", "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\nrate: 0.4\n", exitUsage,
			"standard input:5:1: rate: found a duplicate key; allowed: each key once (first on line 4)"},
		{"search -", "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\n---\n", exitUsage,
			"standard input:5:1: found a second document; allowed: one document"},
		{"search -", "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\nsearch: {workers: 1.5}\n", exitUsage,
			"standard input:5:19: search.workers: found 1.5; allowed: a whole number from 1 to 1024"},
		{"search --channel bec --rate 0.5 --variable-degrees 3,4 --check-degrees 5,6", "", exitUsage,
			"--rate: found 0.5; allowed: a rate below 0.5, which is 1 - 3/6 with the least variable degree 3 and the largest check degree 6"},
		{"search --channel bec --rate 0.7 --variable-degrees 3,4 --check-degrees 5,6", "", exitUsage,
			"--rate: found 0.7; allowed: a rate below 0.5, which is 1 - 3/6 with the least variable degree 3 and the largest check degree 6"},
		{"search --channel bec --rate 0.5 --variable-degrees 2,x", "", exitUsage,
			`--variable-degrees: found "2,x"; allowed: different whole numbers from 2 to 1000000 with commas between them, such as 2,3,8`},
		{"search --channel bec --rate 0.5 --variable-degrees 0,3", "", exitUsage,
			`--variable-degrees: found "0,3"; allowed: different whole numbers from 2 to 1000000 with commas between them, such as 2,3,8`},
		{"search --channel bec --rate 0.5 --max-variable-degree 4 --variable-degrees 2,3", "", exitUsage,
			"--max-variable-degree and --variable-degrees: only one of the two"},
		{"search --channel bec --rate 0.5 --time 5", "", exitUsage, `--time: found "5"; allowed: a time above 0 and up to 720h with its unit, such as 60s or 5m`},
		{"search --channel bec --rate 0.5 --time -5s", "", exitUsage, `--time: found "-5s"; allowed: a time above 0 and up to 720h with its unit, such as 60s or 5m`},
		{"search --channel bec --rate 0.5 --seed -1", "", exitUsage, `--seed: found "-1"; allowed: a whole number from 0 to 18446744073709551615`},
		{"search --channel laplace --rate 0.5 --method gaussian", "", exitUsage,
			"--method: found gaussian; allowed for a search on channel laplace: quantized (exact searches on bec, gaussian on biawgn)"},
		{"search --channel bec --rate 0.5 -o ", "", exitUsage, "--output: needs a value"},
		{"search a.yaml b.yaml", "", exitUsage, `"b.yaml": unexpected; search takes one brief`},
		{"search none.yaml", "", exitUsage, "none.yaml: cannot be read: no such file or directory"},
	} {
		code, stdout, stderr := command(t, c.stdin, strings.Fields(c.args)...)
		if code != c.code || stdout != "" || stderr != "tannery: "+c.want+"\n" {
			t.Errorf("tannery %s\ncode %d, stdout %q\n got %swant tannery: %s", c.args, code, stdout, stderr, c.want)
		}
	}
}

// A link that the best profile cannot serve: the profile is written, and the
// exit code is 3.
func TestUnreachedLink(t *testing.T) {
	const text = `kind: brief
version: 1
channel: bec
link: {source_rate: 500, symbol_rate: 1000, epsilon: 0.499}
variable_degrees: {max: 4}
`
	file := filepath.Join(t.TempDir(), "best.yaml")
	code, report, stderr := command(t, text, "search", "-", "-o", file)
	if code != exitUnreached || !strings.Contains(report, "not served") || !strings.HasPrefix(stderr, "tannery: the brief is not reached: the link's ε = 0.499 needs") {
		t.Errorf("code %d, stdout %q, stderr %q", code, report, stderr)
	}
	if _, err := os.Stat(file); err != nil {
		t.Errorf("the best found: %v", err)
	}
}

func TestSearchFindsUnwritableOutputFirst(t *testing.T) {
	folder := t.TempDir()
	code, stdout, stderr := command(t, "", strings.Fields("search --channel bec --rate 0.5 --max-variable-degree 1000 -o "+folder)...)
	if want := "tannery: --output " + folder + ": cannot be written: is a directory\n"; code != exitFailed || stdout != "" || stderr != want {
		t.Errorf("code %d, stdout %q, stderr %q; want 1 and %q", code, stdout, stderr, want)
	}
}

// endingContext ends by itself, as by a signal, when it has been asked often
// enough whether it has: in the middle of a search, however fast that is.
type endingContext struct {
	context.Context
	end   context.CancelCauseFunc
	cause error
	left  atomic.Int64
}

func newEndingContext(parent context.Context, cause error, questions int64) *endingContext {
	c := &endingContext{cause: cause}
	c.Context, c.end = context.WithCancelCause(parent)
	c.left.Store(questions)
	return c
}

func (c *endingContext) Err() error {
	if c.left.Add(-1) < 0 {
		c.end(c.cause)
	}
	return c.Context.Err()
}

func TestInterruptedSearchWritesTheBest(t *testing.T) {
	for _, c := range []struct {
		signal syscall.Signal
		code   int
	}{{syscall.SIGINT, 130}, {syscall.SIGTERM, 143}} {
		file := filepath.Join(t.TempDir(), "best.yaml")
		ctx := newEndingContext(t.Context(), signalError{c.signal}, 30)
		var stdout, stderr strings.Builder
		code := run(ctx, strings.Fields("search --channel bec --rate 0.5 --max-variable-degree 30 -o "+file), strings.NewReader(""), &stdout, &stderr)
		if code != c.code {
			t.Fatalf("%v: code %d, stderr %q; want %d", c.signal, code, stderr.String(), c.code)
		}
		content, err := os.ReadFile(file)
		if err != nil {
			t.Fatalf("%v: %v", c.signal, err)
		}
		if _, _, err := ensembles.DecodeProfile(file, content); err != nil || !strings.Contains(stdout.String(), "interrupted after") {
			t.Errorf("%v: %v\n%s", c.signal, err, stdout.String())
		}
	}
}

// A search that is interrupted before it has found anything writes nothing.
func TestInterruptedAtOnce(t *testing.T) {
	file := filepath.Join(t.TempDir(), "best.yaml")
	ctx, cancel := context.WithCancelCause(t.Context())
	cancel(signalError{syscall.SIGINT})
	var stdout, stderr strings.Builder
	code := run(ctx, strings.Fields(quickSearch+" -o "+file), strings.NewReader(""), &stdout, &stderr)
	if want := "tannery: interrupted before anything was found; nothing is written\n"; code != 130 || stdout.String() != "" || stderr.String() != want {
		t.Errorf("code %d, stdout %q, stderr %q; want 130 and %q", code, stdout.String(), stderr.String(), want)
	}
	if _, err := os.Stat(file); err == nil {
		t.Error("something is written")
	}
}

package brief

import (
	"math"
	"os"
	"path/filepath"
	"reflect"
	"testing"
	"time"

	"tannery/de/channel"
)

func TestDecode(t *testing.T) {
	const text = `kind: brief
version: 1
title: wave buoys
channel: biawgn
rate: 0.5
method: gaussian
variable_degrees: {allowed: [8, 2, 3]}
check_degrees: {max: 12}
limits: {iterations: 50, target_error: 1e-4, edges_per_bit: 3.5, degree_two: parity, distinct_degrees: 4, stability_margin: 0.05}
search: {seed: 18446744073709551615, time: 1m30s, evaluations: 100, workers: 2}
`
	got, err := Decode("brief.yaml", []byte(text), Channels{}).Finish()
	want := Brief{
		Title:           "wave buoys",
		Channel:         "biawgn",
		Families:        []channel.Family{channel.BIAWGN{}},
		Rate:            0.5,
		Method:          "gaussian",
		VariableDegrees: Degrees{Allowed: []int{2, 3, 8}},
		CheckDegrees:    Degrees{Max: 12},
		Iterations:      50,
		TargetError:     1e-4,
		EdgesPerBit:     3.5,
		DegreeTwo:       "parity",
		DistinctDegrees: 4,
		StabilityMargin: 0.05,
		Seed:            math.MaxUint64,
		Time:            90 * time.Second,
		Evaluations:     100,
		Workers:         2,
	}
	if err != nil || !reflect.DeepEqual(got, want) {
		t.Errorf("%+v, %v\nwant %+v", got, err, want)
	}
}

// A link of 8000 fair bits per second over 16000 symbols needs rate 1/2; at
// σ = 0.94 (Es/N0 = 1/(2σ²)) the Gaussian channel has more than that.
func TestRateOfLink(t *testing.T) {
	const head = "kind: brief\nversion: 1\nchannel: biawgn\nlink:\n  source_rate: 8000\n  symbol_rate: 16000\n"
	for _, c := range []struct {
		parameter string
		want      float64
	}{
		{"  sigma: 0.94\n", 0.94},
		{"  es_n0_db: -2.4729\n", 0.94000},
	} {
		b, err := Decode("brief.yaml", []byte(head+c.parameter), Channels{}).Finish()
		if err != nil || b.Rate != 0.5 || math.Abs(b.Link.Parameter-c.want) > 1e-5 {
			t.Errorf("%s: rate %v, link %+v, %v", c.parameter, b.Rate, b.Link, err)
		}
	}
}

func TestProblemsNameTheirPlace(t *testing.T) {
	const head = "kind: brief\nversion: 1\n"
	for name, c := range map[string]struct{ text, want string }{
		"channel missing": {head + "rate: 0.5\n",
			"b.yaml:1:1: channel: missing; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name; or the option --channel"},
		"rate missing": {head + "channel: bec\n",
			"b.yaml:1:1: rate: missing; allowed: a number above 0 and below 1; or the option --rate"},
		"rate NaN": {head + "channel: bec\nrate: .nan\n",
			"b.yaml:4:7: rate: found .nan; allowed: a number above 0 and below 1"},
		"rate and link": {head + "channel: bec\nrate: 0.5\nlink: {source_rate: 1, symbol_rate: 3, epsilon: 0.1}\n",
			"b.yaml:5:7: link: found a link beside a rate; allowed: one of the two"},
		"link too fast": {head + "channel: bec\nlink: {source_rate: 2, symbol_rate: 3, epsilon: 0.5}\n",
			"b.yaml:4:7: link: found a source of 0.666667 bits of entropy per channel symbol; allowed: less than the channel's capacity, 0.5 bits per symbol at ε = 0.5"},
		"link with another channel's parameter": {head + "channel: bec\nlink: {source_rate: 1, symbol_rate: 3, es_n0_db: 0.5}\n",
			"b.yaml:4:50: link.es_n0_db: found es_n0_db; allowed: epsilon for the channel bec"},
		"rate the degrees forbid": {head + "channel: bec\nrate: 0.5\nvariable_degrees: {allowed: [3, 4]}\ncheck_degrees: {allowed: [5, 6]}\n",
			"b.yaml:4:7: rate: found 0.5; allowed: a rate below 0.5, which is 1 - 3/6 with the least variable degree 3 and the largest check degree 6"},
		"rate too low for the degrees": {head + "channel: bec\nrate: 0.1\nvariable_degrees: {max: 4}\ncheck_degrees: {allowed: [6]}\n",
			"b.yaml:4:7: rate: found 0.1; allowed: a rate above 0.333333, which is 1 - 4/6 with the largest variable degree 4 and the least check degree 6"},
		"edges per bit": {head + "channel: bec\nrate: 0.4\nvariable_degrees: {allowed: [3, 4]}\nlimits: {edges_per_bit: 2.5}\n",
			"b.yaml:6:25: limits.edges_per_bit: found 2.5; allowed: at least 3, the least variable degree"},
		"degree 1": {head + "channel: bec\nrate: 0.5\nvariable_degrees: {allowed: [1, 3]}\n",
			"b.yaml:5:30: variable_degrees.allowed[0]: found 1; allowed: a whole number from 2 to 1000000"},
		"degree as a fraction": {head + "channel: bec\nrate: 0.5\nvariable_degrees: {max: 15.5}\n",
			"b.yaml:5:25: variable_degrees.max: found 15.5; allowed: a whole number from 2 to 1000000"},
		"no degrees": {head + "channel: bec\nrate: 0.5\nvariable_degrees: {}\n",
			"b.yaml:5:19: variable_degrees: found neither max nor allowed; allowed: one of the two, as in {max: 15} or {allowed: [2, 3, 8]}"},
		"two at once": {head + "channel: abc\nrate: 2\n",
			"b.yaml:3:10: channel: found \"abc\"; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name\nb.yaml:4:7: rate: found 2; allowed: a number above 0 and below 1"},
		"target error alone": {head + "channel: biawgn\nrate: 0.4\nlimits: {target_error: 1e-4}\n",
			"b.yaml:5:24: limits.target_error: found 0.0001; allowed: it beside a number of iterations"},
		"a channel twice": {head + "channel: [bsc, bsc]\nrate: 0.4\n",
			"b.yaml:3:16: channel[1]: found bsc a second time; allowed: each channel once"},
		"degradation of nothing": {head + "channel: bsc\nrate: 0.4\ndegradation: flip\n",
			"b.yaml:5:14: degradation: found flip; allowed: nothing, because no channel is a file"},
		"a profile": {"kind: profile\nversion: 1\n",
			"b.yaml:1:7: kind: found \"profile\"; allowed: brief"},
	} {
		_, err := Decode("b.yaml", []byte(c.text), Channels{}).Finish()
		if err == nil || err.Error() != c.want {
			t.Errorf("%s:\n got %v\nwant %s", name, err, c.want)
		}
	}
}

func TestProblemsNameTheOptionThatWon(t *testing.T) {
	d := Decode("b.yaml", []byte("kind: brief\nversion: 1\nchannel: bec\nrate: 0.4\nvariable_degrees: {allowed: [3, 4]}\n"), Channels{})
	d.CheckDegrees.Allowed = []int{5}
	d.Overridden("check_degrees", "--check-degrees")
	d.Rate = 0.9
	d.Overridden("rate", "--rate")
	const want = "--rate: found 0.9; allowed: a rate below 0.4, which is 1 - 3/5 with the least variable degree 3 and the largest check degree 5"
	if _, err := d.Finish(); err == nil || err.Error() != want {
		t.Errorf("got %v\nwant %s", err, want)
	}
}

func TestOptionsAlone(t *testing.T) {
	d := New(Channels{})
	if _, err := d.Finish(); err == nil || err.Error() != "--channel: missing; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name\n--rate: missing; allowed: a number above 0 and below 1" {
		t.Errorf("nothing given: %v", err)
	}
}

// briefs are those of the repository, which all commands and the README use.
func briefs(t testing.TB) map[string][]byte {
	files, err := filepath.Glob("../../../../testdata/briefs/*.yaml")
	if err != nil || len(files) == 0 {
		t.Fatalf("no briefs: %v", err)
	}
	all := map[string][]byte{}
	for _, file := range files {
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		all[file] = data
	}
	return all
}

func TestBriefsOfTheRepository(t *testing.T) {
	for file, data := range briefs(t) {
		if _, err := Decode(file, data, Channels{}).Finish(); err != nil {
			t.Error(err)
		}
	}
}

func FuzzDecode(f *testing.F) {
	for _, data := range briefs(f) {
		f.Add(data)
	}
	f.Add([]byte("kind: brief\nversion: 1\nchannel: bec\nlink: {source_rate: 1e300, symbol_rate: 1e-300, epsilon: 0}\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		b, err := Decode("b.yaml", data, Channels{}).Finish()
		if err == nil && !(b.Rate > 0 && b.Rate < 1 && b.Channel != "") {
			t.Errorf("accepted %+v", b)
		}
	})
}

// The first of several channels has the parameter of a link, and options win
// over all that the file names.
func TestSeveralChannels(t *testing.T) {
	const text = "kind: brief\nversion: 1\nchannel: [bsc, biawgn]\nlink: {source_rate: 1, symbol_rate: 3, p: 0.02}\n"
	b, err := Decode("b.yaml", []byte(text), Channels{}).Finish()
	if err != nil || b.Channel != "bsc" || len(b.Also) != 1 || len(b.Families) != 2 || b.Link.Parameter != 0.02 {
		t.Errorf("%+v, %v", b, err)
	}
	b, err = Decode("b.yaml", []byte("kind: brief\nversion: 1\nchannel: [bsc, biawgn]\nrate: 0.5\n"), Channels{Names: []string{"laplace"}}).Finish()
	if err != nil || b.Channel != "laplace" || b.Also != nil || len(b.Families) != 1 {
		t.Errorf("%+v, %v", b, err)
	}
}

package channel

import (
	"errors"
	"math"
	"strings"
	"testing"
	"testing/iotest"
)

func TestReadDMC(t *testing.T) {
	for name, c := range map[string]struct {
		file, text      string
		inputs, outputs int
		labels          string
		warning         string // part of the only one
	}{
		"csv":              {"berth.csv", "0.9,0.1\n0.2,0.8\n", 2, 2, "", ""},
		"csv with header":  {"berth.csv", "# sensor\nship, none\n\n 0.9 , 0.1\n0.2,0.8\n0.5,0.5", 3, 2, "ship none", ""},
		"csv from a pipe":  {"-", "\ufeff1e0,0\r\n5e-1,.5\r\n", 2, 2, "", ""},
		"csv one by one":   {"-", "1", 1, 1, "", ""},
		"csv normalised":   {"berth.csv", "0.333333,0.666666\n0.5,0.5", 2, 2, "", "berth.csv:1:1: row 1: a sum of 0.999999"},
		"yaml":             {"-", "kind: channel\nversion: 1\ntitle: berth\ntransitions: [[0.9, 0.1], [0.2, 0.8]]\noutputs: [ship, none]\n", 2, 2, "ship none", ""},
		"yaml normalised":  {"berth.yaml", "kind: channel\nversion: 1\ntransitions:\n  - [0.333333, 0.666666]\n", 1, 2, "", "berth.yaml:4:5: transitions[0]: a sum of 0.999999"},
		"json":             {"-", `{"kind": "channel", "version": 1, "transitions": [[1, 0], [0, 1]]}`, 2, 2, "", ""},
		"yaml after dash":  {"-", "# berth\n---\nkind: channel\nversion: 1\ntransitions: [[1]]\n", 1, 1, "", ""},
		"yaml, inputs too": {"-", "kind: channel\nversion: 1\ntransitions: [[1, 0]]\ninputs: [a]\noutputs: [b, c]\n", 1, 2, "b c", ""},
	} {
		channel, warnings, err := ReadDMC(c.file, strings.NewReader(c.text))
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if len(channel.Transitions) != c.inputs || len(channel.Transitions[0]) != c.outputs || strings.Join(channel.Outputs, " ") != c.labels {
			t.Errorf("%s: %v", name, channel)
		}
		if all := strings.Join(warnings, "\n"); (all == "") != (c.warning == "") || !strings.Contains(all, c.warning) {
			t.Errorf("%s: warnings %q; want %q", name, warnings, c.warning)
		}
	}
}

func TestReadDMCRefusals(t *testing.T) {
	yaml := "kind: channel\nversion: 1\ntransitions: "
	for name, c := range map[string]struct{ file, text, want string }{
		"empty":         {"a.csv", "", "a.csv:1:1: found an empty table"},
		"comments only": {"a.csv", "# nothing\n", "a.csv:1:1: found an empty table"},
		"header only":   {"a.csv", "up,down\n", "a.csv:1:1: found a row of labels"},
		"word":          {"a.csv", "0.5,0.5\n0.5,x\n", `a.csv:2:5: found "x"`},
		"typo in first": {"a.csv", "0.5,O.5\n", `a.csv:1:5: found "O.5"`},
		"two problems":  {"a.csv", "0.5,-0.5\n1,2\n", "a.csv:2:3: found \"2\""},
		"hexadecimal":   {"a.csv", "1,0x1p-2\n", `a.csv:1:3: found "0x1p-2"`},
		"not finite":    {"a.csv", "1,nan\n", `a.csv:1:3: found "nan"`},
		"overflow":      {"a.csv", "1,1e999\n", `a.csv:1:3: found "1e999"`},
		"ragged":        {"a.csv", "0.5,0.5\n1\n", "a.csv:2:1: found 1 columns; allowed: 2"},
		"header width":  {"a.csv", "a,b,c\n0.5,0.5\n", "a.csv:2:1: found 2 columns; allowed: 3"},
		"sum":           {"a.csv", "0.5,0.5\n0.5,0.4\n", "a.csv:2:1: found a sum of 0.9; allowed: a sum of 1 within 1e-06"},
		"quote":         {"a.csv", "\"0.5,0.5\n", "a.csv:1:"},
		"wide":          {"a.csv", strings.Repeat("0,", MaxSymbols) + "1\n", "found 1025 columns; allowed: at most 1024"},
		"long":          {"a.csv", strings.Repeat("1\n", MaxSymbols+1), "a.csv:1025:1: found 1025 rows; allowed: at most 1024"},
		"huge":          {"a.csv", strings.Repeat("#\n", maxTableSize/2+1), "a.csv: found more than 32 MiB"},

		"yaml empty rows":  {"a.yaml", yaml + "[]\n", "a.yaml:3:14: transitions: found 0 rows"},
		"yaml empty row":   {"a.yaml", yaml + "[[]]\n", "transitions[0]: found 0 columns"},
		"yaml not a list":  {"a.yaml", yaml + "3\n", "a.yaml:3:14: transitions: found 3"},
		"yaml flat":        {"a.yaml", yaml + "[1, 0]\n", "transitions[0]: found 1"},
		"yaml negative":    {"a.yaml", yaml + "[[1, -1]]\n", "a.yaml:3:19: transitions[0][1]: found -1"},
		"yaml sum":         {"a.yaml", yaml + "[[0.5, 0.5], [0.5, 0.4]]\n", "a.yaml:3:27: transitions[1]: found a sum of 0.9"},
		"yaml ragged":      {"a.yaml", yaml + "[[0.5, 0.5], [1]]\n", "transitions[1]: found 1 columns; allowed: 2"},
		"yaml missing":     {"a.yaml", "kind: channel\nversion: 1\n", "transitions: missing"},
		"yaml labels":      {"a.yaml", yaml + "[[1]]\ninputs: [a, b]\n", "inputs: found 2 labels; allowed: 1"},
		"yaml unknown key": {"a.yaml", yaml + "[[1]]\ninput: [a]\n", "a.yaml:4:1: input: found an unknown key; allowed: inputs (nearest"},
		"yaml other kind":  {"a.yaml", "kind: brief\nversion: 1\n", "kind: found"},
		"yaml second":      {"a.yaml", yaml + "[[1]]\n---\na: 1\n", "a second document"},
		"yaml syntax":      {"a.yaml", yaml + "[[1\n", "a.yaml:"},
	} {
		channel, _, err := ReadDMC(c.file, strings.NewReader(c.text))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, %v; want an error with %q", name, channel, err, c.want)
		}
	}
	if _, _, err := ReadDMC("a.csv", iotest.ErrReader(errors.New("wet cable"))); err == nil || !strings.Contains(err.Error(), "wet cable") {
		t.Errorf("a reader's error: %v", err)
	}
}

func TestReadMeasured(t *testing.T) {
	bsc := (BSC{}).Capacity(0.1)
	for name, c := range map[string]struct {
		file, text, title string
		capacity          float64
		warning           string
	}{
		"masses":        {"quay/receiver.csv", "# zeros\nllr,mass\n2.1972245773362196,0.9\n-2.1972245773362196,0.1\n", "receiver", bsc, ""},
		"counts":        {"receiver.csv", "LLR, Counts\n2.1972245773362196,900\n-2.1972245773362196,100\n", "receiver", bsc, ""},
		"samples":       {"-", "llr\ninf\n+Inf\n0\n0\n", "-", 0.5, ""},
		"normalised":    {"a.csv", "llr,mass\n0,0.333333\ninf,0.666666\n", "a", 2. / 3, "a.csv: masses: a sum of 0.999999"},
		"yaml":          {"-", "kind: density\nversion: 1\ntitle: soft output\nllr: [-2.1972245773362196, 2.1972245773362196]\nmass: [0.1, 0.9]\n", "soft output", bsc, ""},
		"yaml counts":   {"a.yaml", "kind: density\nversion: 1\nllr: [inf, .inf, 0]\ncounts: [1, 2, 1]\n", "a", 0.75, ""},
		"yaml samples":  {"a.yml", "kind: density\nversion: 1\nllr: [inf, 0]\n", "a", 0.5, ""},
		"noisy, warned": {"a.csv", "llr,counts\n2.1972245773362196,880\n-2.1972245773362196,120\n", "a", bsc, "a.csv: the density was symmetrised: its distance from symmetry was 0.02"},
	} {
		m, warnings, err := ReadMeasured(c.file, strings.NewReader(c.text))
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		if m.Title != c.title || math.Abs(m.Capacity()-c.capacity) > 1e-6 {
			t.Errorf("%s: %q, capacity %v; want %q, %v", name, m.Title, m.Capacity(), c.title, c.capacity)
		}
		if all := strings.Join(warnings, "\n"); (all == "") != (c.warning == "") || !strings.Contains(all, c.warning) {
			t.Errorf("%s: warnings %q; want %q", name, warnings, c.warning)
		}
	}
}

func TestReadMeasuredRefusals(t *testing.T) {
	yaml := "kind: density\nversion: 1\n"
	for name, c := range map[string]struct{ file, text, want string }{
		"empty":             {"a.csv", "", "a.csv:1:1: found an empty table"},
		"no header":         {"a.csv", "0,1\n", `a.csv:1:1: found "0,1"; allowed: a first row that names the columns`},
		"header only":       {"a.csv", "llr,mass\n", "a.csv:1:1: found no values"},
		"NaN":               {"a.csv", "llr,mass\nnan,1\n", `a.csv:2:1: found "nan"`},
		"mass above 1":      {"a.csv", "llr,mass\n0,1.5\n", `a.csv:2:3: found "1.5"`},
		"fraction of count": {"a.csv", "llr,counts\n0,1.5\n", `a.csv:2:3: found "1.5"; allowed: a whole number`},
		"empty count":       {"a.csv", "llr,counts\n0,\n", `a.csv:2:3: found ""`},
		"columns":           {"a.csv", "llr,counts\n0\n", "a.csv:2:1: found 1 columns; allowed: 2"},
		"sum":               {"a.csv", "llr,mass\n0,0.5\n", "a.csv: masses: a sum of 0.5"},
		"no samples":        {"a.csv", "llr,counts\n0,0\n", "a.csv: counts: a sum of 0"},
		"asymmetric":        {"a.csv", "llr,mass\n1,1\n", "a.csv: the density is not symmetric"},

		"yaml both":       {"a.yaml", yaml + "llr: [0]\nmass: [1]\ncounts: [1]\n", "counts: found counts beside mass"},
		"yaml length":     {"a.yaml", yaml + "llr: [0]\nmass: [0.5, 0.5]\n", "mass: found 2 items; allowed: 1"},
		"yaml counts":     {"a.yaml", yaml + "llr: [0]\ncounts: [1.0]\n", "a.yaml:4:10: counts[0]: found 1.0"},
		"yaml llr":        {"a.yaml", yaml + "llr: [0, big]\n", `a.yaml:3:10: llr[1]: found "big"`},
		"yaml no llr":     {"a.yaml", yaml, "llr: missing"},
		"yaml empty llr":  {"a.yaml", yaml + "llr: []\n", "empty list"},
		"yaml asymmetric": {"a.yaml", yaml + "llr: [1]\nmass: [1]\n", "not symmetric"},
	} {
		m, _, err := ReadMeasured(c.file, strings.NewReader(c.text))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, %v; want an error with %q", name, m, err, c.want)
		}
	}
}

func FuzzReadDMC(f *testing.F) {
	f.Add("a.csv", "a,b\n0.5,0.5\n1,0\n")
	f.Add("-", "kind: channel\nversion: 1\ntransitions: [[0.9, 0.1], [0.2, 0.8]]\ninputs: [a, b]\n")
	f.Add("-", "# c\n0.333333,\"0.666666\"\n")
	f.Fuzz(func(t *testing.T, name, text string) {
		c, _, err := ReadDMC(name, strings.NewReader(text))
		if err != nil {
			return
		}
		again, warnings, err := NewDMC(c.Transitions)
		if err != nil || len(warnings) > 0 || len(again.Transitions) != len(c.Transitions) {
			t.Errorf("what was read is refused: %q, %v", warnings, err)
		}
	})
}

func FuzzReadMeasured(f *testing.F) {
	f.Add("a.csv", "llr,mass\n2,0.88\n-2,0.12\n")
	f.Add("a.csv", "llr\n2\n-2\ninf\n")
	f.Add("-", "kind: density\nversion: 1\nllr: [inf, 0]\ncounts: [1, 2]\n")
	f.Fuzz(func(t *testing.T, name, text string) {
		m, _, err := ReadMeasured(name, strings.NewReader(text))
		if err != nil {
			return
		}
		mass := 0.0
		for _, a := range m.Density().Atoms {
			mass += a.Mass
		}
		if c := m.Capacity(); math.Abs(mass-1) > 1e-9 || !(c >= 0 && c <= 1+1e-9) {
			t.Errorf("mass %v, capacity %v", mass, c)
		}
	})
}

package document

import (
	"encoding/json"
	"math"
	"strconv"
	"strings"
	"testing"

	"gopkg.in/yaml.v3"
)

func TestTreeIsKept(t *testing.T) {
	text := "title: \"01\" # a comment\nrate: 1e-3\nblock: |\n  a\n  b\nlist: [1, {a: ~}]\ndeep:\n  - x: 1\n    y: 2\n"
	tree, err := ParseTree("f", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	yaml, err := tree.YAML()
	want := "title: \"01\"\nrate: 1e-3\nblock: \"a\\nb\\n\"\nlist: [1, {a: ~}]\ndeep:\n  - x: 1\n    y: 2\n"
	if err != nil || string(yaml) != want {
		t.Errorf("YAML: got %s, %v; want %s", yaml, err, want)
	}
	text = `{"title":"01","rate":1e-3,"block":"a\nb\n","list":[1,{"a":null}],"deep":[{"x":1,"y":2}]}`
	if got, err := json.Marshal(tree); err != nil || string(got) != text {
		t.Errorf("JSON: got %s, %v; want %s", got, err, text)
	}
	if again, err := ParseTree("f", yaml); err != nil || !again.Equal(tree) || again.IsZero() {
		t.Errorf("came back as %v, %v", again, err)
	}
}

func TestZeroTree(t *testing.T) {
	var tree Tree
	if text, err := json.Marshal(tree); string(text) != "null" || err != nil || !tree.IsZero() {
		t.Errorf("the zero Tree is %s, %v", text, err)
	}
	if _, err := ParseTree("f", []byte("a: *b")); err == nil {
		t.Error("an alias was kept")
	}
	tree, err := TreeOf(map[string]any{"seed": 7, "title": "7", "nan": math.NaN()})
	if err != nil {
		t.Fatal(err)
	}
	want := `{"nan":".nan","seed":7,"title":"7"}`
	if text, err := json.Marshal(tree); string(text) != want || err != nil {
		t.Errorf("got %s, %v; want %s", text, err, want)
	}
}

func TestFormatFloat(t *testing.T) {
	for x, want := range map[float64]string{
		0: "0", 1: "1", -0.5: "-0.5", 0.00001: "0.00001", 1e-7: "0.0000001", 1e-9: "1.0e-09", 1.5e-300: "1.5e-300",
		64800: "64800", 1e15: "1.0e+15", math.MaxFloat64: "1.7976931348623157e+308", 0.1: "0.1",
	} {
		got := FormatFloat(x)
		if got != want {
			t.Errorf("%g: got %q, want %q", x, got, want)
		}
		if back, err := strconv.ParseFloat(got, 64); err != nil || back != x {
			t.Errorf("%q reads back as %v, %v", got, back, err)
		}
		if !json.Valid([]byte(got)) {
			t.Errorf("%q is no number of JSON", got)
		}
		var read any
		if err := yaml.Unmarshal([]byte(got), &read); err != nil {
			t.Error(err)
		} else if _, isText := read.(string); isText {
			t.Errorf("%q is read as text", got)
		}
	}
}

// Any text that YAML can hold is written so that it comes back, but for control
// characters, which are refused.
func FuzzText(f *testing.F) {
	for _, text := range []string{"", "a", " a", "a ", "a\nb", "\n", "~", "true", "1e3", "a: b", "- x", "# c", "é\u0085", "'\"", "\ufeff", "a\r\nb", "\t", "<<", "2026-12-01", "=", "0x1", "!t", "&a", "*a", "%", "\U0001f600"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		var b Build
		data, err := Marshal(b.Text("key", text).Node())
		if err != nil {
			return // not UTF-8
		}
		d := Parse("f", data)
		got := d.Root().Required("key").String()
		if strings.ContainsFunc(text, steers) {
			if err := d.Err(); err == nil || !strings.Contains(err.Error(), "allowed: text without control characters") {
				t.Errorf("%q: %v", text, err)
			}
			return
		}
		if err := d.Err(); err != nil || got != text {
			t.Errorf("%q was written as %q and came back as %q, %v", text, data, got, err)
		}
	})
}

// What was kept once stays the same.
func FuzzTree(f *testing.F) {
	for _, text := range []string{"a: [1, 'b', \"c\", ~, 1e3]\n", "- >\n  a\n\n   b\n- |+\n  c\n\n", "{a: , b: }", "\"\": {}\n", "a: - b\n", "x: 2026-12-01\n", "- ? a\n", "a: 0x1f\nb: .5\nc: .inf\n", "a:\n# c\n - b # d\n", "!", "0\n\n0\n0"} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		tree, err := ParseTree("f", data)
		if err != nil {
			return
		}
		yaml, err := tree.YAML()
		if err != nil {
			t.Fatal(err)
		}
		again, err := ParseTree("f", yaml)
		if err != nil || !again.Equal(tree) {
			t.Errorf("%q was written as %q: %v", data, yaml, err)
		}
		text, err := json.Marshal(tree)
		if err != nil || !json.Valid(text) {
			t.Errorf("%q as JSON: %q, %v", data, text, err)
		}
	})
}

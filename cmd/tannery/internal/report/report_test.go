package report

import (
	"math"
	"strings"
	"testing"
)

func TestWithUncertainty(t *testing.T) {
	for _, c := range []struct {
		v, u float64
		want string
	}{
		{0.96312345, 0.00001, "0.96312 ± 0.00001"},
		{0.96312345, 0.000014, "0.96312 ± 0.00002"},
		{0.96312345, 0.000096, "0.9631 ± 0.0001"},
		{0.96312345, 2e-7, "0.9631234 ± 2e-7"},
		{0.96312345, 1e-14, "0.963123450 ± 1e-9"},
		{0.96312345, 0, "0.963123450"},
		{12.3, 0.5, "12.3 ± 0.5"},
		{123.4, 20, "123 ± 20"},
	} {
		if got := WithUncertainty(c.v, c.u); got != c.want {
			t.Errorf("%v ± %v: %s, want %s", c.v, c.u, got, c.want)
		}
	}
}

func TestRoundings(t *testing.T) {
	for _, c := range []struct{ got, want string }{
		{Fixed(-0.0001, 2), "0.00"},
		{Fixed(-0.01, 2), "-0.01"},
		{Significant(0.000123456, 3), "0.000123"},
		{Significant(123456, 3), "123456"},
		{Significant(1e-7, 3), "1e-07"},
		{Significant(0, 3), "0"},
		{Significant(math.Inf(1), 3), "+Inf"},
		{Plain(9600), "9600"},
		{Plain(1e-6), "1e-6"},
		{Plain(0.11), "0.11"},
		{Trimmed(0.5, 6), "0.5"},
		{Trimmed(3, 4), "3"},
		{Trimmed(100, 0), "100"},
	} {
		if c.got != c.want {
			t.Errorf("%s, want %s", c.got, c.want)
		}
	}
}

func TestTextKeepsItsWidth(t *testing.T) {
	var text Text
	text.Heading("σ and λ")
	text.Row("a label", "%s", strings.Repeat("word ", 50))
	text.Row("a label that is longer than its column", "value")
	text.Table([]string{"λ", "value"}, [][]string{{"1", "2"}, {"100", "30000"}})
	var b strings.Builder
	if _, err := text.WriteTo(&b); err != nil {
		t.Fatal(err)
	}
	for line := range strings.Lines(b.String()) {
		if n := len([]rune(strings.TrimSuffix(line, "\n"))); n > Width {
			t.Errorf("%d columns: %s", n, line)
		}
	}
	if !strings.Contains(b.String(), "    λ  value\n    1      2\n  100  30000\n") {
		t.Errorf("table not aligned:\n%s", b.String())
	}
}

func TestWrapLosesNothing(t *testing.T) {
	const text = "a rather long sentence with averyveryverylongwordinit and an end"
	for width := 1; width < 80; width++ {
		lines := Wrap(text, width)
		if got := strings.Join(lines, " "); got != text {
			t.Errorf("width %d: %q", width, got)
		}
	}
	if lines := Wrap("", 10); len(lines) != 1 || lines[0] != "" {
		t.Errorf("empty text: %q", lines)
	}
}

func TestThinKeepsEndsAndTheNarrowest(t *testing.T) {
	for _, n := range []int{1, 10, 40, 41, 100, 1000, 12345} {
		keep := n * 2 / 3
		shown := thin(n, &keep, maxRows)
		seen := map[int]bool{}
		for i, index := range shown {
			if i > 0 && index <= shown[i-1] {
				t.Errorf("n = %d: not in order", n)
			}
			seen[index] = true
		}
		if !seen[0] || !seen[n-1] || !seen[keep] || len(shown) > maxRows+2 {
			t.Errorf("n = %d: %d shown", n, len(shown))
		}
	}
}

// Limits that bind are named once, with their relaxation where it is known.
func TestBindingRows(t *testing.T) {
	r := Search{
		Threshold:   &Threshold{Symbol: "σ"},
		Binding:     []string{"variable degrees", "iterations", "edges per bit"},
		Relaxations: []Relaxation{{"variable degrees", "also degree 9", 0.00123}, {"edges per bit", "3.5", 4e-5}},
	}
	var text Text
	r.bindingRows(&text)
	const want = "  kept down by            iterations\n" +
		"                          variable degrees: also degree 9 would gain about\n" +
		"                          0.0012 in σ\n" +
		"                          edges per bit: 3.5 would gain about 4e-05 in σ\n"
	var b strings.Builder
	if _, err := text.WriteTo(&b); err != nil || b.String() != want {
		t.Errorf("%v\n%s", err, b.String())
	}
}

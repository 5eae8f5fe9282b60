package main

import (
	"slices"
	"testing"

	"tannery/ensembles/document"
)

func TestRangeOption(t *testing.T) {
	for _, c := range []struct {
		text string
		want []float64
	}{
		{"0.4", []float64{.4}},
		{"0.4, 0.42,0.41", []float64{.4, .42, .41}},
		{"0.36:0.46:0.02", []float64{.36, .38, .4, .42, .44, .46}},
		{"0.5:0.2:-0.1", []float64{.5, .4, .3, .2}},
		{"0.1:0.19:0.05", []float64{.1, .15}},
		{"0.3:0.3:1", []float64{.3}},
		{"", nil}, {"0.4,", nil}, {"0.4,0.4", nil}, {"1.5", nil}, {"-1", nil}, {"NaN", nil}, {"Inf", nil},
		{"0:1", nil}, {"0:1:0", nil}, {"0:1:-0.1", nil}, {"0:1:1e-9", nil}, {"0:2:0.5", nil}, {"0:Inf:1", nil}, {"0:1:NaN", nil}, {"0:1:0.1:0.1", nil},
	} {
		o := rangeOption{allow: document.FromTo(0, 1)}
		if err := o.Set(c.text); (err == nil) != (c.want != nil) || err == nil && !slices.Equal(o.values, c.want) {
			t.Errorf("%q: %v, %v; want %v", c.text, o.values, err, c.want)
		}
	}
}

func FuzzRangeOption(f *testing.F) {
	for _, text := range []string{"0.4", "1,2,3", "0.36:0.46:0.02", "1:0:-0.001", "1e308:-1e308:1", ":::"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		o := rangeOption{allow: document.AtLeast(0)}
		if o.Set(text) != nil {
			return
		}
		if len(o.values) == 0 || len(o.values) > maxRange || slices.Max(o.values) > 1e308 && !o.allow.Contains(o.values[0]) {
			t.Errorf("%q: %v", text, o.values)
		}
	})
}

package main

import (
	"context"
	"math"
	"strings"
	"testing"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/catalog"
)

// Published thresholds come out of our own engines, within one unit of the last
// digit printed (tables cut digits off as well as round), or within what is
// allowed below.
func TestPublishedThresholds(t *testing.T) {
	for _, e := range catalog.All() {
		for _, p := range e.Thresholds {
			if p.Decoder != catalog.BeliefPropagation {
				continue
			}
			f, err := channel.ByName(p.Channel)
			if err != nil {
				t.Fatal(err)
			}
			method := de.Method(p.Method)
			if method == "" {
				method = de.DefaultMethod(f)
			}
			engine, err := de.EngineFor(method)
			if err != nil {
				t.Fatal(err)
			}
			if method == de.Quantized {
				if testing.Short() {
					continue
				}
				engine = de.QuantizedEngine{Tolerance: 1e-5}
			}
			got, err := engine.Threshold(context.Background(), e.Ensemble, f)
			if err != nil || math.Abs(got.Value-p.Value) > max(2*p.Resolution, misprint(e.Name)) {
				t.Errorf("%s on %s by %s: %v (%v), published %v", e.Name, p.Channel, method, got.Value, err, p.Value)
			}
		}
	}
}

// misprint is how far tables may be from thresholds though they print more
// digits: rsu01 and elab09 were found by coarser evolutions, always a little
// below ours, the rows d5 and d6 by more (0.9200 and 0.9310 by an evolution
// apart from this project); cfru01-d8000 prints seven digits, but of fractions
// with six.
func misprint(name string) float64 {
	switch {
	case name == "rsu01-r50-d5" || name == "rsu01-r50-d6":
		return 7e-4
	case strings.HasPrefix(name, "rsu01") || strings.HasPrefix(name, "elab09"):
		return 3e-4
	case name == "cfru01-r50-d8000":
		return 1e-5
	}
	return 0
}

// Each name stands for a profile that can be written and read again.
func TestCatalogNamesAreProfiles(t *testing.T) {
	for _, name := range catalog.Names() {
		yaml := succeed(t, "", "catalog", name)
		p, warnings, err := ensembles.DecodeProfile(name, []byte(yaml))
		if err != nil || len(warnings) > 0 {
			t.Errorf("%s: %v %v", name, warnings, err)
		}
		if !strings.HasPrefix(p.Title, name) {
			t.Errorf("%s: title %q", name, p.Title)
		}
	}
}

func TestCatalogNamesAreCompleted(t *testing.T) {
	for args, want := range map[string]string{
		"__complete threshold rsu01-r50-d1":        "rsu01-r50-d15",
		"__complete compare ru01-r50-d3 80211":     "80211n-r50-d11",
		"__complete trace cfru":                    "cfru01-r50-d8000",
		"__complete export s99":                    "s99-r50-d13",
		"__complete catalog ":                      "80216e-r50-d6",
		"__complete compare ru01-r50-d3 --sort ":   "iterations",
		"__complete compare ru01-r50-d3 --chan":    "--channel",
		"__complete trace ru01-r50-d3 --picture ":  "errors",
		"__complete compare ru01-r50-d3 --method ": "gaussian",
	} {
		if out := succeed(t, "", strings.Split(args, " ")...); !strings.Contains("\n"+out, "\n"+want) {
			t.Errorf("%s: %q lacks %s", args, out, want)
		}
	}
}

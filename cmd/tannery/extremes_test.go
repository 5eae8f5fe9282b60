package main

import (
	"encoding/json"
	"math"
	"strings"
	"testing"
)

// Commands at the ends of what they take: a right answer, told by a closed form
// beside it, or a clear refusal. Numbers are read from the JSON answer.
func TestExtremes(t *testing.T) {
	threshold := func(o map[string]any) float64 { return o["threshold"].(float64) }
	value := func(o map[string]any) float64 { return o["value"].(float64) }
	fails := func(o map[string]any) float64 { // 1 where decoding comes to a halt
		if o["outcome"] == "stalled" {
			return 1
		}
		return 0
	}
	for _, c := range []struct {
		name, args string
		read       func(map[string]any) float64
		low, high  float64 // where the number must lie
		refusal    string  // or how the message begins
	}{
		// Cycle codes: λ = x, ρ = x^(d-1) decode up to ε = 1/(d-1).
		{"variable nodes of degree 2 alone", "threshold --lambda 2:1 --rho 4:1 --channel bec", threshold, 1. / 3, 1. / 3, ""},
		{"the same by quantised densities", "threshold --lambda 2:1 --rho 4:1 --channel bec --method quantized", threshold, 1./3 - 1e-9, 1./3 + 1e-9, ""},
		// On the BSC stability demands 2√(p(1-p)) < 1/3, so that p < .028595.
		{"the same with flips", "threshold --lambda 2:1 --rho 4:1 --channel bsc", threshold, .02859, .0286, ""},
		{"variable nodes of degree 1", "threshold --lambda 1:0.1,3:0.9 --rho 6:1 --channel biawgn", threshold, 0, 0, ""},
		{"degree 10000 on the BEC", "threshold --lambda 10000:1 --rho 20000:1 --channel bec", threshold, 1e-6, 1e-2, ""},
		{"degree 10000 with noise", "threshold --lambda 3:0.5,10000:0.5 --rho 12:1 --channel biawgn", threshold, .3, 1.6, ""},
		{"rate 0.99", "threshold --lambda 3:1 --rho 300:1 --channel biawgn", threshold, .25, .3911, ""},
		{"rate 0.01", "threshold --lambda 99:1 --rho 100:1 --channel bec", threshold, .01, .99, ""},
		{"rate 0", "threshold --lambda 3:1 --rho 3:1 --channel bec", threshold, 0, 1, ""},
		{"a rate below 0", "threshold --lambda 4:1 --rho 3:1 --channel bsc", threshold, 0, .5, ""},
		{"the limit at rate 0.01", "limit --channel bec --rate 0.01", value, .99, .99, ""},
		{"the limit at rate 0.99", "limit --channel bec --rate 0.99", value, .01, .01000001, ""},
		// C ≈ 1/(2 ln 2 σ²) as σ → ∞, and Eb/N0 → ln 2, -1.59 dB.
		{"the limit at rate 1e-6", "limit --channel biawgn --rate 1e-6", func(o map[string]any) float64 { return o["eb_n0_db"].(float64) }, -1.5918, -1.5916, ""},
		{"the limit at rate 0.999999", "limit --channel bsc --rate 0.999999", value, 1e-9, 1e-6, ""},
		{"no erasures", "limit --channel bec --parameter 0", func(o map[string]any) float64 { return o["rate"].(float64) }, 1, 1, ""},
		{"all erased", "limit --channel bec --parameter 1", func(o map[string]any) float64 { return o["rate"].(float64) }, 0, 0, ""},
		{"hardly any noise", "limit --channel biawgn --parameter 1e-3", func(o map[string]any) float64 { return o["rate"].(float64) }, 1, 1, ""},
		{"nothing but noise", "limit --channel biawgn --parameter 1e6", func(o map[string]any) float64 { return o["rate"].(float64) }, .7e-12, .73e-12, ""},
		{"noise beyond decibels", "limit --channel biawgn --parameter 1e200 --rate 0.5", value, 1e200, 1e200, ""},
		{"silence beyond decibels", "limit --channel rayleigh --parameter 1e-200", value, 1e-200, 1e-200, ""},
		{"trials in noise beyond decibels", "simulate " + buoysMatrix + " --channel biawgn --parameter 1e200 --frames 3", nil, 0, 0, ""},
		{"a link beyond numbers", "limit --channel bec --parameter 0.4 --source-rate 1e308 --symbol-rate 1e-308", nil, 0, 0, "--source-rate and --symbol-rate: found 1e+308 and 1e-308"},
		{"rate 0 asked for", "limit --channel bec --rate 0", nil, 0, 0, `--rate: found "0"`},
		{"rate 1 asked for", "limit --channel bec --rate 1", nil, 0, 0, `--rate: found "1"`},
		{"a trace without noise", "trace ru01-r50-d3 --channel biawgn --parameter 1e-3", fails, 0, 0, ""},
		{"a trace in much noise", "trace ru01-r50-d3 --channel biawgn --parameter 1e5", fails, 1, 1, ""},
		{"a trace in nothing but noise", "trace ru01-r50-d3 --channel biawgn --parameter 1e300", fails, 1, 1, ""},
		{"the same by the Gaussian approximation", "trace ru01-r50-d3 --channel biawgn --parameter 1e6 --method gaussian", fails, 1, 1, ""},
		{"a trace in fading and noise", "trace ru01-r50-d3 --channel rayleigh --parameter 1e7", fails, 1, 1, ""},
		{"a trace in Laplacian noise", "trace ru01-r50-d3 --channel laplace --parameter 1e7", fails, 1, 1, ""},
		{"a trace of coin tosses", "trace ru01-r50-d3 --channel bsc --parameter 0.5", fails, 1, 1, ""},
		{"a trace with all erased", "trace ru01-r50-d3 --channel bec --parameter 1", fails, 1, 1, ""},
		{"a trace with none erased", "trace ru01-r50-d3 --channel bec --parameter 0", fails, 0, 0, ""},
		{"a trace of single checks", "trace --lambda 1:1 --rho 4:1 --channel bec --parameter 0.1", fails, 1, 1, ""},
		{"a trace of degree 10000", "trace --lambda 10000:1 --rho 20000:1 --channel laplace --parameter 0.1", fails, 0, 0, ""},
		// λ'(0)ρ'(1)ε < 1 where one of the tunnels closes at the end only.
		{"degrees 2 and 10000", "threshold --lambda 2:0.5,10000:0.5 --rho 8:1 --channel bec", threshold, 2. / 7, 2. / 7, ""},
		// The same with B = e^(-1/(2σ²)) = 2/7, and 1/(1+1/(2σ²)) = 2/7 in fading.
		{"the same with noise", "threshold --lambda 2:0.5,10000:0.5 --rho 8:1 --channel biawgn", threshold, .631757706, .631757708, ""},
		{"the same with fading", "threshold --lambda 2:0.5,10000:0.5 --rho 8:1 --channel rayleigh", threshold, .4472135954, .4472135956, ""},
		{"a single iteration that need not help", "threshold ru01-r50-d3 --channel bec --iterations 1 --target-error 0.4999", threshold, .99979, .99981, ""},
		{"check nodes that only pass on", "threshold --lambda 3:1 --rho 2:1 --channel bsc", threshold, .5, .5, ""},
		{"the same, where noise has no end", "threshold --lambda 3:1 --rho 2:1 --channel biawgn", nil, 0, 0, "there is no threshold"},
		{"the same by the Gaussian approximation", "threshold --lambda 3:1 --rho 2:1 --channel biawgn --method gaussian", nil, 0, 0, "there is no threshold"},
		{"rates 0.99 by the Gaussian approximation", "threshold --lambda 3:1 --rho 300:1 --channel biawgn --method gaussian", threshold, .34, .3555, ""},
		{"a rate that rounding hides", "search --channel bec --rate 1e-300", nil, 0, 0, "--rate: found 1e-300; allowed: a rate of at least 1e-06"},
		{"a rate that degrees do not reach", "search --channel bec --rate 0.9999999", nil, 0, 0, "--rate: found 0.9999999; allowed: a rate below 0.999998"},
		{"a search at rate 1e-6", "search --channel bec --rate 1e-6 --max-variable-degree 6", nil, 0, 0, ""},
		{"a search at rate 0.99 with noise", "search --channel biawgn --rate 0.99 --max-variable-degree 6 --evaluations 20", nil, 0, 0, ""},
		{"a search of one ensemble", "search --channel biawgn --rate 0.5 --variable-degrees 3 --check-degrees 6 --evaluations 20", nil, 0, 0, ""},
		{"a search with a largest degree of 10000", "search --channel bec --rate 0.5 --max-variable-degree 10000", nil, 0, 0, ""},
		{"a comparison at no distance", "compare ru01-r50-d3 --channel bec --distance 1e-9", nil, 0, 0, ""},
		{"a comparison at all distance", "compare ru01-r50-d3 --channel biawgn --distance 0.999999", nil, 0, 0, ""},
		{"ten million code bits", "export ru01-r50-d3 --length 10000000 --channel bec", nil, 0, 0, ""},
		{"a billion code bits", "export rsu01-r50-d50 --length 1000000000 --channel biawgn --method gaussian", nil, 0, 0, ""},
		{"two code bits", "export ru01-r50-d3 --length 2", nil, 0, 0, "--length: length 2: "},
		{"a search at rate 0.01", "search --channel bec --rate 0.01 --max-variable-degree 8", nil, 0, 0, ""},
		{"a search at rate 0.99", "search --channel bec --rate 0.99 --max-variable-degree 8", nil, 0, 0, ""},
		{"a search with degree 2 alone", "search --channel bec --rate 0.5 --variable-degrees 2 --check-degrees 4", nil, 0, 0, ""},
		{"a search without a profile", "search --channel bec --rate 0.9 --variable-degrees 3 --check-degrees 4", nil, 0, 0, ""},
		{"trials with all erased", "simulate " + buoysMatrix + " --channel bec --parameter 0,1 --frames 3", nil, 0, 0, ""},
	} {
		code, stdout, stderr := command(t, "", append(strings.Fields(c.args), "--json")...)
		switch {
		case c.name == "a search without a profile":
			if code == exitDone || stderr == "" {
				t.Errorf("%s: exit code %d, %s", c.name, code, stderr)
			}
			continue
		case c.refusal != "":
			if (code != exitUsage && code != exitFailed) || stdout != "" || !strings.HasPrefix(stderr, "tannery: "+c.refusal) {
				t.Errorf("%s: exit code %d, stderr %s", c.name, code, stderr)
			}
			continue
		case code != exitDone:
			t.Errorf("%s: exit code %d, stderr %s", c.name, code, stderr)
			continue
		}
		var object map[string]any
		if err := json.Unmarshal([]byte(stdout), &object); err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if c.read == nil {
			continue
		}
		if got := c.read(object); !(got >= c.low*(1-1e-9)-1e-300 && got <= c.high*(1+1e-9)) && !(c.low < 0 && got >= c.low && got <= c.high) || math.IsNaN(got) {
			t.Errorf("%s: %v, want %v to %v", c.name, got, c.low, c.high)
		}
	}
}

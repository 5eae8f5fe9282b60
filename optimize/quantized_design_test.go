package optimize

import (
	"bytes"
	"context"
	"errors"
	"math"
	"slices"
	"testing"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// quick is a problem whose search takes a second or two.
func quick(f channel.Family) Problem {
	return Problem{Channel: f, Rate: 0.5, VariableDegrees: []int{2, 3, 5}}
}

func searchQuantized(t *testing.T, p Problem, s Settings) Result {
	t.Helper()
	s.Method = QuantizedDesign{}
	r := mustSearch(t, p, s)
	if got := r.Ensemble.DesignRate(); math.Abs(got-p.Rate) > 1e-12 {
		t.Errorf("design rate %.15f: want %v", got, p.Rate)
	}
	for _, term := range r.Ensemble.Lambda {
		if !slices.Contains(p.VariableDegrees, term.Degree) {
			t.Errorf("variable degree %d is not allowed", term.Degree)
		}
	}
	for i, f := range p.channels() {
		limit, err := f.Inverse(p.Rate)
		if err != nil {
			t.Fatal(err)
		}
		if v := r.Thresholds[i].Value; !(v > 0 && v < limit) {
			t.Errorf("threshold %v on %s: must lie below the Shannon limit %v", v, f.Name(), limit)
		}
	}
	return r
}

// The thresholds of Richardson, Shokrollahi & Urbanke, IEEE Trans. Inf. Theory
// 47(2), 2001, Tables I and II (recalled), at rate 1/2 on the BI-AWGN channel.
var publishedThresholds = map[int]float64{4: .9114, 7: .9424}

func TestQuantizedBeatsPublished(t *testing.T) {
	for largest, published := range publishedThresholds {
		p := Problem{Channel: channel.BIAWGN{}, Rate: 0.5, VariableDegrees: DegreesUpTo(largest)}
		r := searchQuantized(t, p, Settings{Workers: 2})
		if r.Threshold.Value < published {
			t.Errorf("largest degree %d: threshold %.5f is below the published %.4f", largest, r.Threshold.Value, published)
		}
		if m := de.StabilityOf(r.Ensemble, p.Channel, r.Threshold.Value).Margin; m < -1e-9 {
			t.Errorf("largest degree %d: stability margin %v at the threshold", largest, m)
		}
	}
}

// On the BEC the refinement must come close to the exact design, whose λ is
// proven best for its ρ.
func TestQuantizedNearExactOnBEC(t *testing.T) {
	p := quick(channel.BEC{})
	p.CheckDegrees = []int{6, 7}
	exact := mustSearch(t, p, Settings{Method: BECDesign{}})
	r := searchQuantized(t, p, Settings{Workers: 2})
	if r.Threshold.Value < exact.Threshold.Value-2e-4 {
		t.Errorf("threshold %.6f: the exact design reaches %.6f", r.Threshold.Value, exact.Threshold.Value)
	}
}

func TestQuantizedOtherChannelsAndRates(t *testing.T) {
	for _, c := range []struct {
		f    channel.Family
		rate float64
		max  int
		gap  float64 // of an unremarkable design: in rate
	}{
		{channel.BSC{}, 0.75, 5, 0.06},
		{channel.Laplace{}, 0.9, 4, 0.06},
		{channel.Rayleigh{}, 0.3, 5, 0.06},
	} {
		p := Problem{Channel: c.f, Rate: c.rate, VariableDegrees: DegreesUpTo(c.max)}
		r := searchQuantized(t, p, Settings{Workers: 2})
		if gap := c.f.Capacity(r.Threshold.Value) - c.rate; gap > c.gap {
			t.Errorf("%s at rate %v: gap %.4f in rate", c.f.Name(), c.rate, gap)
		}
	}
}

func TestQuantizedLimits(t *testing.T) {
	free := searchQuantized(t, quick(channel.BIAWGN{}), Settings{Workers: 2})
	for name, c := range map[string]struct {
		set  func(*Limits)
		hold func(ensembles.Ensemble) bool
	}{
		limitEdges: {
			func(l *Limits) { l.EdgesPerBit = 3 },
			func(e ensembles.Ensemble) bool { return e.EdgesPerBit() < 3*(1+1e-9) },
		},
		limitParity: {
			func(l *Limits) { l.DegreeTwoParity = true },
			func(e ensembles.Ensemble) bool { return e.Lambda.Nodes().Fraction(2) < 0.5*(1+1e-9) },
		},
		limitDistinct: {
			func(l *Limits) { l.DistinctDegrees = 2 },
			func(e ensembles.Ensemble) bool { return len(e.Lambda) <= 2 },
		},
		limitIterations: {
			func(l *Limits) { l.Iterations, l.TargetError = 15, 1e-4 },
			func(e ensembles.Ensemble) bool { return true },
		},
	} {
		p := quick(channel.BIAWGN{})
		c.set(&p.Limits)
		r := searchQuantized(t, p, Settings{Workers: 2})
		if !c.hold(r.Ensemble) {
			t.Errorf("%s: the limit does not hold: λ %v, ρ %v", name, r.Ensemble.Lambda, r.Ensemble.Rho)
		}
		if r.Threshold.Value > free.Threshold.Value+1e-5 {
			t.Errorf("%s: threshold %.6f: without the limit the search reaches only %.6f", name, r.Threshold.Value, free.Threshold.Value)
		}
		if r.Threshold.Value < free.Threshold.Value-1e-3 && !slices.Contains(r.Binding, name) {
			t.Errorf("%s costs %.4f and is not named among the binding limits %v", name, free.Threshold.Value-r.Threshold.Value, r.Binding)
		}
		for _, x := range r.Relaxations {
			if !(x.Gain > 0) || x.To == "" {
				t.Errorf("%s: relaxation %+v", name, x)
			}
		}
	}
}

// A code for two channels is no better on either than one for that channel
// alone, and its worst gap is no worse than that of either of these.
func TestQuantizedSeveralChannels(t *testing.T) {
	both := quick(channel.BIAWGN{})
	both.Also = []channel.Family{channel.BSC{}}
	r := searchQuantized(t, both, Settings{Workers: 2})
	for i, f := range both.channels() {
		alone := searchQuantized(t, quick(f), Settings{Workers: 2})
		if r.Thresholds[i].Value > alone.Threshold.Value*(1+1e-5) {
			t.Errorf("%s: threshold %.6f: designed for it alone %.6f", f.Name(), r.Thresholds[i].Value, alone.Threshold.Value)
		}
		if got, worst := worstGap(t, both, r.Ensemble), worstGap(t, both, alone.Ensemble); got > worst+1e-5 {
			t.Errorf("worst gap %.6f: the design for %s alone has %.6f", got, f.Name(), worst)
		}
	}
}

func worstGap(t *testing.T, p Problem, e ensembles.Ensemble) float64 {
	t.Helper()
	gap := 0.0
	for _, f := range p.channels() {
		threshold, err := (de.QuantizedEngine{}).Threshold(context.Background(), e, f)
		if err != nil {
			t.Fatal(err)
		}
		gap = max(gap, f.Capacity(threshold.Value)-p.Rate)
	}
	return gap
}

// The result is the same to the bit for any number of workers, and from
// whatever state it is resumed.
func TestQuantizedReproducible(t *testing.T) {
	p := quick(channel.BIAWGN{})
	p.Limits.DistinctDegrees = 2
	var states [][]byte
	whole := searchQuantized(t, p, Settings{Workers: 2, Checkpoint: func(s []byte) { states = append(states, s) }})
	same := func(what string, r Result) {
		t.Helper()
		if r.Ensemble.Lambda.String() != whole.Ensemble.Lambda.String() || r.Ensemble.Rho.String() != whole.Ensemble.Rho.String() || r.Threshold.Value != whole.Threshold.Value {
			t.Errorf("%s: λ %v, ρ %v: want λ %v, ρ %v", what, r.Ensemble.Lambda, r.Ensemble.Rho, whole.Ensemble.Lambda, whole.Ensemble.Rho)
		}
		if r.Stats.Evaluations != whole.Stats.Evaluations {
			t.Errorf("%s: %d evaluations: want %d", what, r.Stats.Evaluations, whole.Stats.Evaluations)
		}
	}
	same("one worker", searchQuantized(t, p, Settings{Workers: 1}))
	for k := 0; k < len(states); k += 1 + len(states)/3 {
		same("resumed", searchQuantized(t, p, Settings{Workers: 2, Resume: states[k]}))
	}

	limited := Settings{Method: QuantizedDesign{}, Workers: 1, Evaluations: whole.Stats.Evaluations / 2}
	one := mustSearch(t, quick(channel.BIAWGN{}), limited)
	limited.Workers = 3
	three := mustSearch(t, quick(channel.BIAWGN{}), limited)
	if one.Ensemble.Lambda.String() != three.Ensemble.Lambda.String() || one.Ensemble.Rho.String() != three.Ensemble.Rho.String() {
		t.Errorf("stopped by evaluations: one worker λ %v, three λ %v", one.Ensemble.Lambda, three.Ensemble.Lambda)
	}
}

func TestForeignStatesRefused(t *testing.T) {
	p := quick(channel.BIAWGN{})
	var state []byte
	ctx, cancel := context.WithCancel(context.Background())
	_, err := Search(ctx, p, Settings{Method: QuantizedDesign{}, Checkpoint: func(s []byte) {
		if state = s; len(s) > 1000 {
			cancel()
		}
	}})
	if err != nil && !errors.Is(err, context.Canceled) {
		t.Fatal(err)
	}
	other := p
	other.Rate = 0.4
	for name, c := range map[string]struct {
		p    Problem
		s    []byte
		seed uint64
	}{
		"another problem": {other, state, 0},
		"another seed":    {p, state, 1},
		"truncated":       {p, state[:len(state)/2], 0},
		"not a state":     {p, []byte("kind: profile\n"), 0},
		"a point missing": {p, bytes.Replace(state, []byte(`"Radius"`), []byte(`"Radios"`), -1), 0},
	} {
		_, err := Search(context.Background(), c.p, Settings{Method: QuantizedDesign{}, Resume: c.s, Seed: c.seed})
		if !errors.Is(err, ErrCheckpoint) {
			t.Errorf("%s: error %v: want ErrCheckpoint", name, err)
		}
	}
}

func BenchmarkQuantizedSearch8(b *testing.B) {
	p := Problem{Channel: channel.BIAWGN{}, Rate: 0.5, VariableDegrees: DegreesUpTo(8)}
	for b.Loop() {
		r := mustSearch(b, p, Settings{Method: QuantizedDesign{}, Workers: 2})
		b.ReportMetric(r.Threshold.Value, "sigma")
	}
}

package channel

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// checkDMC finds the capacity and checks the bounds it reports from the
// distribution it returns, apart from the code of the search.
func checkDMC(t *testing.T, name string, transitions [][]float64) DMCCapacity {
	t.Helper()
	c, _, err := NewDMC(transitions)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	r := c.Capacity(context.Background())
	if r.Status != BoundsClosed || !(r.Lower <= r.Upper) || !(r.Upper-r.Lower <= CapacityTolerance) || !(r.Lower >= 0) {
		t.Errorf("%s: bounds %v, %v, %s", name, r.Lower, r.Upper, r.Status)
	}
	total := 0.0
	output := make([]float64, len(c.Transitions[0]))
	for x, p := range r.Distribution {
		if !(p >= 0) {
			t.Errorf("%s: p(%d) = %v", name, x, p)
		}
		total += p
		for y, w := range c.Transitions[x] {
			output[y] += p * w
		}
	}
	var information, most float64
	for x, p := range r.Distribution {
		d := 0.0
		for y, w := range c.Transitions[x] {
			if w > 0 {
				d += w * math.Log2(w/output[y])
			}
		}
		information += p * d
		most = math.Max(most, d)
	}
	if math.Abs(total-1) > 1e-12 || math.Abs(information-r.Lower) > 1e-12 || most > r.Upper+1e-12 {
		t.Errorf("%s: the distribution sums to %v and gives the bounds %v, %v; reported were %v, %v", name, total, information, most, r.Lower, r.Upper)
	}
	return r
}

func symmetric(p float64) [][]float64 { return [][]float64{{1 - p, p}, {p, 1 - p}} }

// zChannel has the input 0 always received and 1 lost with probability p.
func zChannel(p float64) [][]float64 { return [][]float64{{1, 0}, {p, 1 - p}} }

// typewriter: each of n letters is received as itself or the next one.
func typewriter(n int) [][]float64 {
	m := make([][]float64, n)
	for x := range m {
		m[x] = make([]float64, n)
		m[x][x], m[x][(x+1)%n] = 0.5, 0.5
	}
	return m
}

// TestDMCClosedForms: capacities that are common practice.
func TestDMCClosedForms(t *testing.T) {
	z := func(p float64) float64 { return math.Log2(1 + (1-p)*math.Pow(p, p/(1-p))) }
	type example struct {
		name        string
		transitions [][]float64
		want        float64
	}
	examples := []example{
		{"noisy typewriter of 26 letters", typewriter(26), math.Log2(13)},
		{"one input", [][]float64{{.2, .3, .5}}, 0},
		{"one output", [][]float64{{1}, {1}}, 0},
		{"three equal rows", [][]float64{{.2, .8}, {.2, .8}, {.2, .8}}, 0},
		{"bsc of an input given twice", [][]float64{{.9, .1}, {.9, .1}, {.1, .9}}, BSC{}.Capacity(.1)},
		{"bsc with an input of no use", [][]float64{{.9, .1}, {.1, .9}, {.5, .5}}, BSC{}.Capacity(.1)},
		{"bsc with an output that never occurs", [][]float64{{.9, 0, .1}, {.1, 0, .9}}, BSC{}.Capacity(.1)},
		{"z-channel of an input given three times", append(append(zChannel(.9), zChannel(.9)...), zChannel(.9)[0]), z(.9)},
	}
	for _, p := range []float64{0, 1e-9, 0.1, 0.4999, 0.499999, 0.5} {
		examples = append(examples, example{fmt.Sprintf("bsc %v", p), symmetric(p), BSC{}.Capacity(p)})
		examples = append(examples, example{fmt.Sprintf("bec %v", p), [][]float64{{1 - p, p, 0}, {0, p, 1 - p}}, 1 - p})
	}
	for _, p := range []float64{0, 1e-6, 0.5, 0.9, 0.999, 1 - 1e-6} {
		examples = append(examples, example{fmt.Sprintf("z-channel %v", p), zChannel(p), z(p)})
	}
	for _, e := range examples {
		if r := checkDMC(t, e.name, e.transitions); math.Abs(r.Lower-e.want) > 1e-11 {
			t.Errorf("%s: capacity %v; want %v", e.name, r.Lower, e.want)
		}
	}
	// common practice: the input that may be lost is sent with probability
	// 2/5 over the Z-channel of p = 1/2, whose capacity is log₂(5/4)
	if r := checkDMC(t, "z", zChannel(.5)); math.Abs(r.Distribution[1]-.4) > 1e-6 || math.Abs(r.Lower-math.Log2(1.25)) > 1e-12 {
		t.Errorf("z-channel of 1/2: %+v", r)
	}
	if r := checkDMC(t, "useless input", [][]float64{{.9, .1}, {.1, .9}, {.5, .5}}); r.Distribution[2] != 0 {
		t.Errorf("an input of no use is sent with probability %v", r.Distribution[2])
	}
}

// TestDMCSlowCases: channels on which the plain iteration needs millions of
// steps, because an input is useless, or useful, by a margin of δ.
func TestDMCSlowCases(t *testing.T) {
	for _, delta := range []float64{1e-2, 1e-4, 1e-6, 1e-8, 1e-10, 0} {
		for _, sign := range []float64{-1, 1} {
			// A third input on a BSC: it is useless, or the second one is,
			// as it errs more or less often than that.
			p := .1 + sign*delta
			checkDMC(t, fmt.Sprintf("input at the edge, %g", sign*delta), [][]float64{{.9, .1}, {.1, .9}, {1 - p, p}})
			checkDMC(t, fmt.Sprintf("three outputs, %g", sign*delta), [][]float64{
				{.8, .1, .1}, {.1, .8, .1}, {.1, .1, .8}, {.1 + sign*delta, .1 - sign*delta, .8}, {.45, .45, .1}})
		}
		checkDMC(t, fmt.Sprintf("almost equal rows, %g", delta), [][]float64{
			{.5, .5}, {.5 + delta, .5 - delta}, {.5 + delta/2, .5 - delta/2}, {.3, .7}})
		checkDMC(t, fmt.Sprintf("rare outputs, %g", delta), [][]float64{
			{1 - delta, delta, 0}, {1 - delta*delta, 0, delta * delta}, {1, 0, 0}})
	}
}

// TestDMCRandom: random channels, dense, peaked and sparse, have closed
// bounds that hold for the distribution.
func TestDMCRandom(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1972))
	for range 150 {
		inputs, outputs := 1+rng.IntN(12), 1+rng.IntN(12)
		checkDMC(t, fmt.Sprintf("random %d by %d", inputs, outputs), randomChannel(rng, inputs, outputs))
	}
	for kind := range 3 {
		checkDMC(t, fmt.Sprintf("random, kind %d, 256 by 256", kind), randomChannelOfKind(rng, 256, 256, kind))
	}
}

func randomChannel(rng *rand.Rand, inputs, outputs int) [][]float64 {
	return randomChannelOfKind(rng, inputs, outputs, rng.IntN(3))
}

func randomChannelOfKind(rng *rand.Rand, inputs, outputs, kind int) [][]float64 {
	m := make([][]float64, inputs)
	for x := range m {
		row, sum := make([]float64, outputs), 0.0
		for y := range row {
			switch {
			case kind == 0:
				row[y] = rng.Float64()
			case kind == 1:
				row[y] = math.Pow(rng.Float64(), 20)
			case y == x%outputs || rng.Float64() < 0.1:
				row[y] = rng.ExpFloat64()
			}
			sum += row[y]
		}
		for y := range row {
			row[y] /= sum
		}
		m[x] = row
	}
	return m
}

func TestDMCInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	c, _, _ := NewDMC(zChannel(.5))
	if r := c.Capacity(ctx); r.Status != Interrupted {
		t.Errorf("%+v", r)
	}
}

func TestNewDMCRefusals(t *testing.T) {
	for name, transitions := range map[string][][]float64{
		"no rows":     {},
		"no columns":  {{}},
		"ragged":      {{1, 0}, {1}},
		"negative":    {{1.5, -.5}},
		"NaN":         {{math.NaN(), 1}},
		"infinite":    {{math.Inf(1), 0}},
		"sum":         {{.5, .4}},
		"too many":    make([][]float64, MaxSymbols+1),
		"columns":     {make([]float64, MaxSymbols+1)},
		"sum by 2e-6": {{.5, .500002}},
	} {
		if c, _, err := NewDMC(transitions); err == nil {
			t.Errorf("%s: %v; want an error", name, c)
		}
	}
	c, warnings, err := NewDMC([][]float64{{.3333333, .6666666}})
	if err != nil || len(warnings) != 1 || math.Abs(c.Transitions[0][0]+c.Transitions[0][1]-1) > 1e-15 {
		t.Errorf("%v, %q, %v; want one warning", c, warnings, err)
	}
}

func ExampleDMC_Capacity() {
	// A berth sensor that never reports a ship where there is none, but
	// misses one in two.
	sensor, _, err := NewDMC([][]float64{{1, 0}, {0.5, 0.5}})
	if err != nil {
		fmt.Println(err)
		return
	}
	c := sensor.Capacity(context.Background())
	fmt.Printf("%.6f bits, ship in %.4f of the messages, bounds %s\n", c.Lower, c.Distribution[1], c.Status)
	// Output: 0.321928 bits, ship in 0.4000 of the messages, bounds closed
}

func BenchmarkDMC(b *testing.B) {
	rng := rand.New(rand.NewPCG(3, 1972))
	for _, n := range []int{2, 16, 256} {
		c, _, _ := NewDMC(randomChannelOfKind(rng, n, n, 0))
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			for b.Loop() {
				c.Capacity(context.Background())
			}
		})
	}
}

package channel

import (
	"fmt"
	"math"
	"testing"
)

// A harbour gauge sends 600 bits per second, of which one in ten is a 1, at
// 1000 symbols per second over a BSC with 11 % of the symbols flipped.
func ExampleLink_Budget() {
	link := Link{BitRate: 600, BitProbability: 0.1, SymbolRate: 1000, Capacity: BSC{}.Capacity(0.11)}
	budget, err := link.Budget()
	fmt.Println(err)
	fmt.Printf("source %.1f bit/s, channel %.1f bit/s, fits: %v\n", budget.EntropyRate, budget.CapacityRate, budget.Fits)
	fmt.Printf("code rate %.4f of at most %.4f\n", budget.CodeRate, budget.LargestCodeRate)
	// Output:
	// <nil>
	// source 281.4 bit/s, channel 500.1 bit/s, fits: true
	// code rate 0.2814 of at most 0.5001
}

func TestLink(t *testing.T) {
	for _, c := range []struct {
		link Link
		fits bool
		loss float64 // lowest bit error rate
	}{
		// fair bits: as LowestBitErrorRate at 1.25 bits per symbol
		{Link{1250, 0.5, 1000, 1}, false, LowestBitErrorRate(1.25, 1)},
		{Link{1000, 0.5, 1000, 1}, true, 0},
		// a source of h(p) bits needs no channel once errors of min(p, 1-p) do
		{Link{1000, 0.2, 1000, 0}, false, 0.2},
		{Link{1000, 0.8, 1000, 0}, false, 0.2},
		{Link{1000, 0, 1, 0}, true, 0},
		// channel symbols of more than a bit
		{Link{2000, 0.5, 1000, math.Log2(13)}, true, 0},
		// just short of fitting
		{Link{1000, 0.5, 1000, 1 - 1e-9}, false, InverseBinaryEntropy(1e-9)},
	} {
		b, err := c.link.Budget()
		if err != nil || b.Fits != c.fits || math.Abs(b.LowestBitErrorRate-c.loss) > 1e-7*c.loss {
			t.Errorf("%+v: %+v, %v", c.link, b, err)
		}
		if (b.Margin >= 0) != b.Fits || math.Abs(b.MarginRate-c.link.SymbolRate*b.Margin) > 1e-9 {
			t.Errorf("%+v: margins of %+v", c.link, b)
		}
	}
}

func TestLinkRefusals(t *testing.T) {
	good := Link{1, 0.5, 1, 1}
	for _, spoil := range []func(*Link){
		func(l *Link) { l.BitRate = 0 }, func(l *Link) { l.BitRate = math.NaN() },
		func(l *Link) { l.SymbolRate = -1 }, func(l *Link) { l.SymbolRate = math.Inf(1) },
		func(l *Link) { l.BitProbability = 1.1 }, func(l *Link) { l.BitProbability = math.NaN() },
		func(l *Link) { l.Capacity = -1e-9 }, func(l *Link) { l.Capacity = math.Inf(1) },
	} {
		link := good
		spoil(&link)
		if b, err := link.Budget(); err == nil {
			t.Errorf("%+v: %+v; want an error", link, b)
		}
	}
}

package channel

import (
	"math"
	"math/big"
	"testing"
)

func TestBinaryEntropy(t *testing.T) {
	for _, c := range []struct{ p, want float64 }{
		{0, 0}, {1, 0}, {0.5, 1}, // common practice
		{0.25, 2 - 0.75*math.Log2(3)},       // by hand
		{0.75, 2 - 0.75*math.Log2(3)},       // by hand
		{0.11, 0.49991595816452783},         // computed, 50 digits
		{1e-20, 1e-20 * 67.881256938636211}, // p(log₂(1/p) + log₂e), computed
	} {
		if got := BinaryEntropy(c.p); math.Abs(got-c.want) > 4e-16*c.want {
			t.Errorf("h(%v) = %v; want %v", c.p, got, c.want)
		}
	}
}

func TestInverseBinaryEntropy(t *testing.T) {
	for p := 0.5; p > 1e-300; p *= 0.83 {
		if got := InverseBinaryEntropy(BinaryEntropy(p)); math.Abs(got-p) > 1e-13*p && math.Abs(got-p) > 1e-8*(0.5-p) {
			t.Errorf("h⁻¹(h(%v)) = %v", p, got)
		}
	}
	for _, c := range []struct{ h, want float64 }{{0, 0}, {1, 0.5}} {
		if got := InverseBinaryEntropy(c.h); got != c.want {
			t.Errorf("h⁻¹(%v) = %v; want %v", c.h, got, c.want)
		}
	}
}

// TestBiasCapacity compares with the power series summed in rationals.
func TestBiasCapacity(t *testing.T) {
	for _, tilt := range []float64{1e-150, 1e-9, 0.01, 0.125, 0.1999, 0.2, 0.2001, 0.3, 0.5} {
		square := new(big.Float).SetPrec(200).SetFloat64(tilt)
		square.Mul(square, square)
		sum, power := new(big.Float).SetPrec(200), new(big.Float).SetPrec(200).SetInt64(1)
		for k := int64(1); k < 200; k++ {
			power.Mul(power, square)
			term := new(big.Float).SetPrec(200).SetInt64(2 * k * (2*k - 1))
			sum.Add(sum, term.Quo(power, term))
		}
		want, _ := sum.Float64()
		want /= math.Ln2
		if got := biasCapacity(tilt); math.Abs(got/want-1) > 2e-15 || biasCapacity(-tilt) != got {
			t.Errorf("capacity at bias %v: %v; want %v", tilt, got, want)
		}
	}
}

func TestLowestBitErrorRate(t *testing.T) {
	if got := LowestBitErrorRate(0.5, 0.5); got != 0 {
		t.Errorf("at capacity: %v", got)
	}
	for _, rate := range []float64{0.5000000001, 0.51, 0.6, 1, 2, 100} {
		const capacity = 0.5
		p := LowestBitErrorRate(rate, capacity)
		if back := rate * (1 - BinaryEntropy(p)); math.Abs(back-capacity) > 1e-14*rate {
			t.Errorf("R = %v: p = %v, where R(1-h(p)) = %v; want %v", rate, p, back, capacity)
		}
	}
	if got := LowestBitErrorRate(0.3, 0); got != 0.5 {
		t.Errorf("useless channel: %v", got)
	}
	// uncoded bits over a BSC: at rate 1 nobody does better than p itself
	if got := LowestBitErrorRate(1, BSC{}.Capacity(0.03)); math.Abs(got-0.03) > 1e-15 {
		t.Errorf("rate 1 over a BSC of crossover 0.03: %v", got)
	}
}

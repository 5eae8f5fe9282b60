package montecarlo

import "math"

// maxLLR is where messages are clipped. A bit of that LLR is wrong once in
// e^300 ≈ 10^130 times, so nothing observable depends on it; it keeps
// e^(-LLR) within the range of a float64, and stands for certainty.
const maxLLR = 300

// maxOctaves is maxLLR in the unit of the decoder.
const maxOctaves = maxLLR / math.Ln2

const signBit = 1 << 31

// rescale is the size at which the products of a long row are scaled down;
// their quotients are all that counts. The product of two of that size, from
// either side, is still far from overflow.
const rescale = 1e120

// checkRule evaluates the sum-product rule of a check node,
// tanh(y/2) = Π tanh(xᵢ/2) over the other edges, exactly and without
// cancellation. LLRs are in octaves: logarithms to base 2, which saves the
// conversions around exponential and logarithm. With p = 2^(-|x|) two
// messages combine to
//
//	2^(-y) = (p₁ + p₂) / (1 + p₁p₂),
//
// so as quotients n/d the combination of (n₁,d₁) and (n₂,d₂) is
// (n₁d₂ + n₂d₁, d₁d₂ + n₁n₂): sums of positive terms only, in which a large
// LLR is as exact as a small one. One exponential per edge, products from the
// left and from the right, and one logarithm y = log₂(d/n) give the messages
// to all edges. An erased message, p = 1, gives n = d to the last bit, hence
// y = 0 exactly.
type checkRule struct {
	edges []ruleEdge
}

// ruleEdge is what the pass from the left leaves for the one from the right.
type ruleEdge struct {
	p    float64
	n, d float64 // the product of the edges to the left
}

func newCheckRule(widest int) checkRule { return checkRule{make([]ruleEdge, widest)} }

// apply replaces the messages to a check node by those from it.
func (r checkRule) apply(x []float32) {
	edges := r.edges[:len(x)]
	n, d := 0.0, 1.0
	parity := uint32(0)
	for i, m := range x {
		bits := math.Float32bits(m)
		parity ^= bits
		magnitude := float64(math.Float32frombits(bits &^ signBit))
		if magnitude > maxOctaves {
			magnitude = maxOctaves
		}
		p := halvings(magnitude)
		edges[i] = ruleEdge{p, n, d}
		// The conversions keep the products from being fused with the sums,
		// which would break the symmetry that p = 1 relies on.
		n, d = n+float64(d*p), d+float64(n*p)
		if d > rescale {
			n, d = n/rescale, d/rescale
		}
	}
	n, d = 0, 1
	for i := len(edges) - 1; i >= 0; i-- {
		e := &edges[i]
		y := octaves(float64(e.d*d)+float64(e.n*n), float64(e.n*d)+float64(e.d*n))
		// Rounding may leave y just below 0 or, at a check of degree 1, large.
		if y > maxOctaves {
			y = maxOctaves
		}
		magnitude := math.Float32bits(float32(y)) &^ signBit
		x[i] = math.Float32frombits(magnitude | (parity^math.Float32bits(x[i]))&signBit)
		n, d = n+float64(d*e.p), d+float64(n*e.p)
		if d > rescale {
			n, d = n/rescale, d/rescale
		}
	}
}

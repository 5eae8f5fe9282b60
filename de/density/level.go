package density

import "math"

// level is the check-side convolution on [0, top): a uniform grid of u, the
// maps from and to the variable side, and the transform.
type level struct {
	fft      *fft
	unravel  []complex128 // e^(-2πik/size), k ≤ size/4
	fromNode int          // the first variable-side node with u < top
	in       []stencil    // for nodes fromNode…: from g to damped mass
	fromCell int          // the first cell this level answers for
	out      []stencil    // for cells fromCell…: from the inverse transform to g
	keep     []float64    // weights of the mass known to the coarsest level
}

// The shares of a level's range.
const (
	// A level hands over to the next coarser one gradually between these
	// fractions of its range: late enough for cells to be fine there, and
	// early enough for rounding, which grows with u, to be small, and for
	// the end, which is spoilt, to be far. The centred stencil of a mass in
	// the first cell reaches to nodes -1 and -2, and sums of such nodes wrap
	// around to the last cells.
	handoverFrom = 0.2
	handoverTo   = 0.7
	// cutOff is the fraction of the coarsest level's range from which on
	// messages count as erased.
	cutOff = 0.92
	// spoiltFrom is where cells count as wrapped around from below zero.
	spoiltFrom = 0.96
	// rootCells is below how many cells of the finest level √u is the
	// coordinate. Linear interpolation is enough there, since these are the
	// messages of magnitude 14 and more.
	rootCells = 4
)

func newLevel(g *Grid, index int, top float64) *level {
	size := g.points * g.cells
	step := top / float64(size)
	finest := index == g.count-1
	v := &level{fft: newFFT(size / 2), unravel: make([]complex128, size/4+1)}
	for k := range v.unravel {
		v.unravel[k] = unitRoot(k, size)
	}
	damp := func(j int) float64 { return math.Exp(-g.damping * float64(j) / float64(size)) }
	undamp := func(j int) float64 { return 1 / damp(j) / float64(size/2) }

	v.fromNode = g.points + 1
	for v.fromNode > 1 && toU(float64(v.fromNode-1)*g.step) < top-order*step {
		v.fromNode--
	}
	for k := v.fromNode; k <= g.points; k++ {
		s := placeU(toU(float64(k)*g.step)/step, finest)
		for i := range s.weight {
			s.weight[i] *= g.bulge[k] * damp(int(s.first)+i)
		}
		v.in = append(v.in, s)
	}

	for j := 1; j < size; j++ {
		u := float64(j) * step
		share := handover(u / top)
		if index == 0 {
			share = 1
			if u > cutOff*top {
				share = 0
			}
		}
		if !finest {
			share -= handover(u * g.ratio / top)
		}
		if share == 0 && v.out == nil {
			continue
		}
		if v.out == nil {
			v.fromCell = j
		}
		s := g.place(toU(u))
		for i := range s.weight {
			s.weight[i] *= share * undamp(j) / g.bulge[int(s.first)+i]
		}
		v.out = append(v.out, s)
	}

	if index == 0 {
		v.keep = make([]float64, size)
		for j := range v.keep {
			switch t := float64(j) / float64(size); {
			case t <= cutOff:
				v.keep[j] = undamp(j)
			case t >= spoiltFrom:
				v.keep[j] = undamp(j - size)
			}
		}
	}
	return v
}

// placeU returns the stencil of a mass at t ≥ 0 cells on a level.
func placeU(t float64, finest bool) stencil {
	k := math.Floor(t)
	if finest && k < rootCells {
		low, high := math.Sqrt(k), math.Sqrt(k+1)
		share := (math.Sqrt(t) - low) / (high - low)
		return stencil{int32(k), [order]float64{1 - share, share}}
	}
	return stencil{int32(k) - order/2 + 1, lagrange(t-k, centred)}
}

// handover is the share of a result at the fraction t of a level's range that
// this level takes rather than the next coarser one: from 1 to 0 without a
// kink, so that interpolation does not see it.
func handover(t float64) float64 {
	t = (t - handoverFrom) / (handoverTo - handoverFrom)
	switch {
	case t <= 0:
		return 1
	case t >= 1:
		return 0
	}
	rising, falling := math.Exp(-1/t), math.Exp(-1/(1-t))
	return falling / (rising + falling)
}

// spread puts the even function g, and the mass at infinity, on the level's
// cells, damped. Node -1 is the last cell.
func (v *level) spread(cells []float64, g []float64, infinite float64) {
	clear(cells)
	cells[0] = infinite
	nodes := g[v.fromNode:]
	nodes = nodes[:len(v.in)]
	for k := range v.in {
		s := &v.in[k]
		m := nodes[k]
		if s.first < 0 {
			for i, w := range s.weight {
				cells[(int(s.first)+i+len(cells))%len(cells)] += m * w
			}
			continue
		}
		c := cells[s.first:][:order]
		c[0] += m * s.weight[0]
		c[1] += m * s.weight[1]
		c[2] += m * s.weight[2]
		c[3] += m * s.weight[3]
		c[4] += m * s.weight[4]
		c[5] += m * s.weight[5]
	}
}

// collect adds the cells that this level answers for to the even function g.
func (v *level) collect(g []float64, cells []float64) {
	cells = cells[v.fromCell:]
	cells = cells[:len(v.out)]
	for j := range v.out {
		s := &v.out[j]
		c := g[s.first:][:order]
		m := cells[j]
		c[0] += m * s.weight[0]
		c[1] += m * s.weight[1]
		c[2] += m * s.weight[2]
		c[3] += m * s.weight[3]
		c[4] += m * s.weight[4]
		c[5] += m * s.weight[5]
	}
}

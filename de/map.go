package de

import (
	"math"

	"tannery/ensembles"
)

// The BP EXIT curve of an ensemble on the BEC is the entropy L(y) of a bit
// given its check nodes, at the largest fixed point x(ε) of ε = f(x) (see
// exact_point.go), L in node perspective. Along the fixed points,
//
//	∫ L dε from x to 1 = T(x) = 1 - f(x)·L(y) - L'(1)·(x(1-y) + ∫₀^(1-x) ρ),
//
// which follows from L' = L'(1)·λ and f·λ(y) = x by parts, twice. It tends to
// the design rate as x → 0 (Méasson, Montanari & Urbanke, Maxwell
// construction: the hidden bridge between iterative and maximum a posteriori
// decoding, IEEE Trans. Inf. Theory 54(12), 2008).
//
// As ε falls from 1, x(ε) falls along the parts of f that set a new minimum
// and jumps over the others, which the area leaves out.

// MAPUpperBound returns an upper bound of the threshold on the BEC under
// maximum a posteriori decoding, the best there can be: the ε at which the
// area under the BP EXIT curve from ε to 1 equals the design rate, by the area
// theorem (Méasson, Montanari & Urbanke, 2008). It is never below the BP
// threshold, and equal to it where the curve has no jump. It is tight if what
// peeling leaves of the graph at that ε has almost surely the rank that its
// degrees promise, for which the paper gives a sufficient condition on the
// degrees; that holds for the regular ensembles. With several jumps the bound
// may be loose.
// The result is 1 if the design rate is not positive; it is accurate to 1e-12
// or so.
func MAPUpperBound(e ensembles.Ensemble) float64 {
	rate := e.DesignRate()
	if rate <= 0 {
		return 1
	}
	c := exitCurve{e: &e, nodes: e.Lambda.Nodes(), edges: e.MeanVariableDegree()}
	lowest := 1.0          // least f so far, from x = 1 down
	start := 1.0           // where the current part begins
	falling := true        // whether x is on a part that counts
	var area float64       // of the parts done
	older, old := 1.0, 1.0 // the last two x
	for i := 0; i <= exitPoints; i++ {
		x := 1 / (1 + math.Exp(exitEnd*(2*float64(i)/exitPoints-1)))
		if x >= 1 {
			continue
		}
		p := erasureAt(&e, x)
		if falling {
			if p.f > lowest { // passed a minimum
				tip := bisect(x, math.Min(older, start), func(x float64) bool { return erasureAt(&e, x).slope < 0 })
				if total := area + c.area(tip) - c.area(start); total >= rate {
					return c.solve(tip, start, rate-area)
				} else {
					area = total
				}
				lowest, falling = erasureAt(&e, tip).f, false
			} else if area+c.area(x)-c.area(start) >= rate {
				return c.solve(x, start, rate-area)
			}
		}
		if !falling && p.f < lowest { // landed after a jump
			start = bisect(x, old, func(x float64) bool { return erasureAt(&e, x).f < lowest })
			falling = true
		}
		if falling {
			lowest = math.Min(lowest, p.f)
		}
		older, old = old, x
	}
	// The curve reached x = 0 with no area left over: no jump counted.
	return lowest
}

const (
	// exitPoints is the number of x at which the EXIT curve is sampled, evenly
	// in ln(x/(1-x)) from exitEnd down to -exitEnd.
	exitPoints = 2000
	exitEnd    = 28
)

// exitCurve evaluates areas under the EXIT curve.
type exitCurve struct {
	e     *ensembles.Ensemble
	nodes ensembles.Distribution
	edges float64 // L'(1)
}

// area is T(x).
func (c *exitCurve) area(x float64) float64 {
	y, r, _, _ := check(c.e.Rho, x)
	var below float64 // ∫₀^(1-x) ρ
	for _, t := range c.e.Rho {
		below += t.Fraction * math.Pow(1-x, float64(t.Degree)) / float64(t.Degree)
	}
	return 1 - erasureAt(c.e, x).f*y*c.nodes.At(y) - c.edges*(x*r+below)
}

// solve returns f at the x between low and high at which the area from high
// down to x is the one given.
func (c *exitCurve) solve(low, high, area float64) float64 {
	area += c.area(high)
	x := bisect(low, high, func(x float64) bool { return c.area(x) >= area })
	return erasureAt(c.e, x).f
}

// bisect returns the x between low and high up to which the property holds,
// given that it holds at low and not at high.
func bisect(low, high float64, holds func(x float64) bool) float64 {
	for {
		middle := low + (high-low)/2
		if middle <= low || middle >= high {
			return low
		}
		if holds(middle) {
			low = middle
		} else {
			high = middle
		}
	}
}

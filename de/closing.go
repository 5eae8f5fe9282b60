package de

import (
	"cmp"
	"math"
	"slices"
)

// The threshold on one grid is found without long runs near it. In an
// evolution that succeeds, B falls at some rate at each depth -ln B, slowest
// in the tunnels. As the channel gets worse the rate at a fixed depth falls
// smoothly, to zero at the parameter where the tunnel closes there. So for
// each depth that parameter is extrapolated from a few runs below the
// threshold, and the least of them over all depths is the threshold. It does
// not matter which of several tunnels is the tightest, or whether they change
// places, since every depth is followed. (That the number of iterations grows
// like the inverse square root of the distance from the threshold, so that
// bisection is slow, is the usual behaviour at a saddle-node bifurcation.)

// closing is where the tunnel is predicted to close.
type closing struct {
	parameter float64
	entropy   float64 // of the messages there
	depth     float64
}

// minSkip is how many iterations at the beginning are left out: the density
// has then forgotten its first shape.
const minSkip = 3

// closings returns the local minima over depth of the parameter at which the
// tunnel closes there, predicted from two or three successful courses in
// increasing order of parameter; the least first.
func closings(runs []course) []closing {
	last := runs[len(runs)-1]
	// In terms of nearness 1/(parameter-last), where a tunnel that does not
	// close has 0, closings are local maxima.
	near := make([]float64, len(last.depth))
	for i := minSkip; i < len(near); i++ {
		near[i] = 1 / (closesAt(runs, last.depth[i], last.rate[i]) - last.parameter)
	}
	var found []closing
	for i := minSkip; i < len(near)-1; i++ {
		if near[i] == 0 || near[i] < near[i-1] || near[i] <= near[i+1] {
			continue
		}
		most := parabolaMaximum(near[i-1], near[i], near[i+1])
		found = append(found, closing{parameter: last.parameter + 1/most, entropy: last.entropy[i], depth: last.depth[i]})
	}
	slices.SortStableFunc(found, func(a, b closing) int { return cmp.Compare(a.parameter, b.parameter) })
	// Where the tunnel is flat, rounding makes many of one.
	var apart []closing
	for _, c := range found {
		if !slices.ContainsFunc(apart, func(k closing) bool { return math.Abs(k.depth-c.depth) < sameDepth }) {
			apart = append(apart, c)
		}
	}
	return apart
}

// closesAt extrapolates to rate 0 at one depth: through the last two courses
// linearly, through three by the parabola, +Inf where the rate does not fall.
func closesAt(runs []course, depth, rate float64) float64 {
	n := len(runs)
	x0, y0 := runs[n-1].parameter, rate
	y1, ok := runs[n-2].rateAt(depth)
	if !ok {
		return math.Inf(1)
	}
	x1 := runs[n-2].parameter
	slope := (y0 - y1) / (x0 - x1)
	if !(slope < 0) {
		return math.Inf(1)
	}
	if n > 2 {
		if y2, ok := runs[n-3].rateAt(depth); ok {
			x2 := runs[n-3].parameter
			// Newton's form y0 + (x-x0)(slope + (x-x1)·bend), solved for
			// d = x-x0: y0 + d·(slope + (x0-x1)·bend) + d²·bend = 0.
			bend := (slope - (y1-y2)/(x1-x2)) / (x0 - x2)
			here := slope + (x0-x1)*bend
			if disc := here*here - 4*bend*y0; here < 0 && disc >= 0 {
				return x0 + 2*y0/(-here+math.Sqrt(disc))
			}
		}
	}
	return x0 - y0/slope
}

// parabolaMaximum returns the maximum of the parabola through three equally
// spaced values of which the middle one is highest. It is at most 1/8 above
// it if none is negative.
func parabolaMaximum(left, middle, right float64) float64 {
	bend := 2*middle - left - right
	if bend == 0 {
		return middle
	}
	return middle + (right-left)*(right-left)/(8*bend)
}

package de

import "math"

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
	depth     float64
	entropy   float64 // of the messages there
}

// minSkip is how many iterations at the beginning are left out: the density
// has then forgotten its first shape.
const minSkip = 3

// closings returns the local minima over depth of the parameter at which the
// tunnel closes there, predicted from two or three successful courses in
// increasing order of parameter; the least first.
func closings(runs []course) []closing {
	last := runs[len(runs)-1]
	at := make([]float64, len(last.depth))
	for i := range at {
		at[i] = math.Inf(1)
		if i >= minSkip {
			at[i] = closesAt(runs, last.depth[i], last.rate[i])
		}
	}
	var found []closing
	for i := minSkip; i < len(at); i++ {
		if math.IsInf(at[i], 1) || at[i] > at[i-1] || i+1 < len(at) && at[i] > at[i+1] {
			continue
		}
		c := closing{at[i], last.depth[i], last.entropy[i]}
		if i+1 < len(at) && !math.IsInf(at[i-1], 1) && !math.IsInf(at[i+1], 1) {
			c.depth, c.parameter = parabolaMinimum(last.depth[i-1:i+2], at[i-1:i+2])
		}
		found = append(found, c)
		for j := len(found) - 1; j > 0 && found[j].parameter < found[j-1].parameter; j-- {
			found[j], found[j-1] = found[j-1], found[j]
		}
	}
	return found
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

// parabolaMinimum returns the place and value of the minimum of the parabola
// through three points of which the middle one is lowest.
func parabolaMinimum(x, y []float64) (at, least float64) {
	left, right := (y[1]-y[0])/(x[1]-x[0]), (y[2]-y[1])/(x[2]-x[1])
	bend := (right - left) / (x[2] - x[0])
	if !(bend > 0) {
		return x[1], y[1]
	}
	at = (x[0]+x[1])/2 - left/(2*bend)
	return at, y[1] + (at-x[1])*(left+bend*(at-x[0]))
}

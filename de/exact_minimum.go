package de

import (
	"math"

	"tannery/ensembles"
)

// The threshold is the global minimum of f (see exact_point.go), found by
// branch and bound in t = ln x. Everything needed to bound f on an interval
// [a,b] is known at its ends, because f is made of monotone parts:
//
//   - A and the second moment of i-1 increase with y (they are means of
//     increasing functions under weights with increasing likelihood ratio), and
//     y increases with x;
//   - y', ρ″(1-x) and y/x decrease with x, since y is concave and y(0) = 0.
//
// Hence B lies between (a/y_a)·y'_b and (b/y_b)·y'_a, the curvature of g is
// bounded below (curvatureBound), and
//
//	f = (x/y)·(y/λ(y)) ≥ (a/y_a)·(y_b/λ(y_b))          (if λ₁ = 0)
//
// with a/y_a → 1/ρ'(1) as a → 0. Given a lower bound c on the curvature, g
// lies above the parabolas of curvature c that touch it at both ends. If
// c ≥ 0, g is convex and has at most one minimum inside, which is polished by
// Newton's method; otherwise the parabolas are concave and the lower bound is
// at the ends or where they cross.

const (
	// boundTolerance is the relative error up to which an interval is
	// discarded: a few hundred roundings of f, and an order below the 1e-12
	// that is asked of thresholds.
	boundTolerance = 1e-13
	// maxPoints is how many points are spent before the tolerance is relaxed
	// by relaxation. Only functions that are flat to many digits over a wide
	// range need so many, as those of capacity-achieving sequences are. The
	// bound is of third order in the width of the intervals, so eight times
	// the tolerance halves the points.
	maxPoints  = 1 << 14
	relaxation = 8
	// coarseIntervals is the number of intervals at the start. They find a
	// good minimum early, which lets most of the others be discarded.
	coarseIntervals = 12
	// maxPending bounds the intervals waiting at once: the coarse ones and
	// one for each halving down to neighbouring floats.
	maxPending = 128
	// criticalSlack is the relative distance up to which a local minimum of f
	// is listed as critical.
	criticalSlack = 0.01
	// maxMinima is how many local minima are kept for that list.
	maxMinima = 16
)

// localMinimum is a place where f has a local minimum; x = 0 stands for the
// limit at 0, the stability condition.
type localMinimum struct{ x, f float64 }

// erasureSearch holds the state of the branch and bound.
type erasureSearch struct {
	e         *ensembles.Ensemble
	tolerance float64
	best      float64 // least f found
	bestLog   float64 // its logarithm
	lower     float64 // f is proved not to go below this
	points    int     // evaluations of f

	minima [maxMinima]localMinimum
	found  int
}

// point evaluates f at x = e^t and notes it if it is the least so far.
func (s *erasureSearch) point(t float64) erasurePoint {
	s.points++
	p := erasureAtLog(s.e, t)
	if p.f < s.best {
		s.best, s.bestLog = p.f, p.g
	}
	return p
}

// note records a local minimum.
func (s *erasureSearch) note(x, f float64) {
	if s.found < maxMinima {
		s.minima[s.found] = localMinimum{x, f}
		s.found++
	}
}

// run finds the minimum of f over (0,1]; λ₁ must be 0.
func (s *erasureSearch) run() {
	slope0 := s.e.Rho.Derivative(1)
	stability := math.Inf(1) // the limit of f at 0
	if l2 := s.e.Lambda.Fraction(2); l2 > 0 {
		stability = 1 / (l2 * slope0)
	}
	s.best = math.Min(1, stability)
	s.bestLog = math.Log(s.best)
	s.tolerance = boundTolerance
	for limit := maxPoints; !s.branch(slope0, stability, limit); limit += maxPoints {
		s.tolerance *= relaxation
	}
}

// branch covers (0,1] with intervals that are bounded to the tolerance; it
// returns false if the points reach the limit before.
func (s *erasureSearch) branch(slope0, stability float64, limit int) bool {
	// Right ends of the intervals still to do, the leftmost on top.
	var pending [maxPending]erasurePoint
	n := 0
	step := math.Log(0.02/slope0) / coarseIntervals
	for i := 0; i <= coarseIntervals; i++ {
		p := s.point(float64(i) * step)
		if n > 0 && p.slope < 0 && pending[n-1].slope > 0 && !s.known(p.x, pending[n-1].x) {
			s.polish(&p, &pending[n-1])
		}
		pending[n] = p
		n++
	}

	// The interval from 0: it is split off at ever smaller x until one of the
	// bounds at 0 decides.
	for n < maxPending-1 && !s.decidedAtZero(&pending[n-1], slope0, stability) {
		pending[n] = s.point(pending[n-1].t - 2*math.Ln2)
		n++
	}

	s.lower = math.Inf(1)
	a := pending[n-1]
	for n--; n > 0; {
		b := &pending[n-1]
		if bound, enough := s.bound(&a, b); !enough {
			if s.points >= limit {
				return false
			}
			if middle := 0.5 * (a.t + b.t); n < maxPending && a.t < middle && middle < b.t {
				pending[n] = s.point(middle)
				n++
				continue
			}
			s.lower = math.Min(s.lower, bound)
		}
		a = *b
		n--
	}
	s.lower = math.Min(s.lower, s.best*(1-s.tolerance))
	return true
}

// decidedAtZero tells whether f on (0,b] is known to be no less than the
// best found, or to be monotone there. In x, not ln x,
//
//	d ln f/dx = S'(1-x)/S(1-x) - y'·W'(y)/W(y),  S = y/x, W = λ(y)/y.
//
// S(z) and W(y) have non-negative coefficients, so they and their derivatives
// increase, and ρ″(z)/2 ≤ S'(z) ≤ ρ″(1)/2.
func (s *erasureSearch) decidedAtZero(b *erasurePoint, slope0, stability float64) bool {
	overY := b.f / b.x * b.y // y/λ(y) = 1/W
	if overY/slope0 >= s.best*(1-s.tolerance) {
		if stability <= s.best*(1+criticalSlack) && (s.found == 0 || s.minima[s.found-1].x > 0) {
			s.note(0, stability)
		}
		return true
	}
	if math.IsInf(stability, 1) {
		return false
	}
	l2 := s.e.Lambda.Fraction(2)
	// W'(y)/W(y) = (A-1)/y.
	slopeW := (b.mean - 1) / b.y / overY
	if b.d2y/(2*slope0) >= slope0*slopeW/l2 { // increasing
		if stability <= s.best*(1+criticalSlack) && (s.found == 0 || s.minima[s.found-1].x > 0) {
			s.note(0, stability)
		}
		return true
	}
	var curvature0 float64 // ρ″(1)
	for _, t := range s.e.Rho {
		curvature0 += t.Fraction * float64(t.Degree-1) * float64(t.Degree-2)
	}
	return curvature0/2*b.x/b.y <= s.e.Lambda.Fraction(3)*overY*b.dy // decreasing
}

// bound tells whether f on [a,b] is known to be no less than the best found,
// up to the tolerance; where it is not, the bound says how low f may be.
func (s *erasureSearch) bound(a, b *erasurePoint) (bound float64, enough bool) {
	bound = a.x / a.y * (b.f / b.x * b.y)
	if bound >= s.best*(1-s.tolerance) {
		return bound, true
	}
	c := curvatureBound(a, b)
	if c >= 0 {
		if a.slope < 0 && b.slope > 0 && !s.known(a.x, b.x) {
			s.polish(a, b)
		}
		return s.best, true
	}
	// Parabolas g_a + s_a·u + c·u²/2 and g_b - s_b·v + c·v²/2, with u+v = h:
	// their difference is linear in u.
	h := b.t - a.t
	atA := b.g - h*(b.slope-0.5*c*h) - a.g // second minus first at u = 0
	u := -atA / (b.slope - c*h - a.slope)
	low := math.Min(a.g, b.g)
	if u > 0 && u < h {
		low = math.Min(low, a.g+u*(a.slope+0.5*c*u))
	} else if !(u <= 0 || u >= h) {
		return bound, false // g overflowed
	}
	if low >= s.bestLog-s.tolerance {
		return bound, true
	}
	return math.Max(bound, math.Exp(low)), false
}

// curvatureBound returns a lower bound of g″ on [a,b].
func curvatureBound(a, b *erasurePoint) float64 {
	low := a.x / a.y * b.dy
	high := math.Min(1, b.x/b.y*a.dy)
	var product float64 // the largest B(1-B)
	switch {
	case low > 0.5:
		product = low * (1 - low)
	case high < 0.5:
		product = high * (1 - high)
	default:
		product = 0.25
	}
	variance := b.sq - a.mean*a.mean
	return a.mean*(a.x/a.y)*a.x*b.d2y - b.mean*product - variance*high*high
}

// known tells whether a local minimum in (a,b) has been recorded.
func (s *erasureSearch) known(a, b float64) bool {
	for _, m := range s.minima[:s.found] {
		if a < m.x && m.x < b {
			return true
		}
	}
	return false
}

// polishTolerance is the step in t at which Newton's method stops: f is
// stationary there, so its error is of the order of the square.
const polishTolerance = 1e-8

// polish finds a local minimum between a and b, where g falls at a and rises
// at b, by Newton's method on its slope, halving the bracket where that fails.
func (s *erasureSearch) polish(a, b *erasurePoint) {
	low, high := a.t, b.t
	t := (a.t*b.slope - b.t*a.slope) / (b.slope - a.slope)
	for {
		p := s.point(t)
		if p.slope < 0 {
			low = t
		} else {
			high = t
		}
		next := t - p.slope/p.curvature
		if !(p.curvature > 0 && next > low && next < high) {
			next = 0.5 * (low + high)
		}
		if math.Abs(next-t) < polishTolerance {
			s.note(p.x, p.f)
			return
		}
		t = next
	}
}

package optimize

import (
	"context"
	"math"
	"slices"
)

// means searches over the mean check degree. Between two neighbouring check
// degrees the best threshold is a smooth function of it, with the derivative
// known; at the degrees themselves, the knots, it has kinks. Seen from afar it
// rises to one top and falls.
type means struct {
	p       Problem
	r       *run
	d       designer
	degrees []int
	at      []float64          // the knots: ends of the range and degrees between
	found   map[int]*candidate // by knot; nil where there is no λ
	top     int                // best knot so far
}

const (
	// coarseKnots is the number of knots tried at once.
	coarseKnots = 9
	// window is how many knots on either side of the best are tried, and half
	// as many intervals searched: the curve of the knots is not smooth where
	// the mean degree is small.
	window = 4
	// betweenRounds bounds the rounds in the intervals; the secant method on
	// the derivative needs half as many.
	betweenRounds = 12
	// gainTolerance is the relative gain below which an interval is done.
	gainTolerance = 1e-11
)

// knots lists the means at which ρ is a single degree, and the ends.
func (m *means) knots() {
	low, high := m.p.meanRange()
	m.at = append(m.at, low)
	if c := m.p.CheckDegrees; len(c) > 0 {
		for _, j := range c {
			if v := float64(j); v > low && v < high {
				m.at = append(m.at, v)
			}
		}
	} else {
		for v := math.Floor(low) + 1; v < high; v++ {
			m.at = append(m.at, v)
		}
	}
	if high > low {
		m.at = append(m.at, high)
	}
}

// task returns the evaluation of a mean.
func (m *means) task(ctx context.Context, mean float64, near *candidate) func() (*candidate, error) {
	return func() (*candidate, error) { return m.d.best(ctx, m.p.rhoAt(mean), m.degrees, near) }
}

// try evaluates knots not evaluated yet.
func (m *means) try(ctx context.Context, knots []int, fraction float64) (stop bool, err error) {
	near := m.found[m.top]
	var tasks []func() (*candidate, error)
	var which []int
	for _, k := range knots {
		if _, done := m.found[k]; !done {
			tasks = append(tasks, m.task(ctx, m.at[k], near))
			which = append(which, k)
		}
	}
	found, stop, err := m.r.batch(ctx, tasks)
	for i, c := range found {
		m.found[which[i]] = c
		if c != nil && (m.found[m.top] == nil || c.value > m.found[m.top].value) {
			m.top = which[i]
		}
	}
	m.r.report(fraction)
	return stop, err
}

// coarse finds the best knot: ever finer sections around the best of those
// tried, then all within the window.
func (m *means) coarse(ctx context.Context) (stop bool, err error) {
	low, high := 0, len(m.at)-1
	for round := 1; ; round++ {
		var knots []int
		ratio := m.at[high] / m.at[low]
		for k := range coarseKnots {
			mean := m.at[low] * math.Pow(ratio, float64(k)/(coarseKnots-1))
			i, _ := slices.BinarySearch(m.at, mean*(1-1e-9))
			knots = append(knots, min(max(i, low), high))
		}
		knots = slices.Compact(knots)
		fraction := doneMean * (1 - math.Pow(0.5, float64(round)))
		if stop, err := m.try(ctx, knots, fraction); stop || err != nil {
			return stop, err
		}
		if m.found[m.top] == nil {
			// No mean on this grid allows the rate: try all in reach.
			knots = nil
			for k := low; k <= high && k-low < 4*coarseKnots; k++ {
				knots = append(knots, k)
			}
			return m.try(ctx, knots, doneMean)
		}
		i, _ := slices.BinarySearch(knots, m.top)
		newLow, newHigh := knots[max(i-1, 0)], knots[min(i+1, len(knots)-1)]
		if newHigh-newLow <= coarseKnots || newLow == low && newHigh == high {
			break
		}
		low, high = newLow, newHigh
	}
	// The window moves with the best until it stays.
	for last := -1; last != m.top; {
		last = m.top
		var knots []int
		for k := max(m.top-window, 0); k <= min(m.top+window, len(m.at)-1); k++ {
			knots = append(knots, k)
		}
		if stop, err := m.try(ctx, knots, doneMean); stop || err != nil {
			return stop, err
		}
	}
	return false, nil
}

// bracket is an interval between knots in which a maximum may lie: the
// derivative of t by the mean is known at its ends.
type bracket struct {
	low, high             int // the check degrees
	a, b                  float64
	slopeA, slopeB        float64
	near                  *candidate
	weightA, weightB      float64 // of the Illinois variant of the secant method
	next                  float64
	probed, closed        bool
	knownLeft, knownRight bool
}

// between searches the intervals next to the best knot and returns the best
// candidate of all. All intervals advance together, one evaluation of each in
// a batch.
func (m *means) between(ctx context.Context, from, to float64) (best *candidate, stop bool, err error) {
	best = m.found[m.top]
	var open []*bracket
	for k := max(m.top-window/2, 0); k < min(m.top+window/2, len(m.at)-1); k++ {
		left, right := m.found[k], m.found[k+1]
		if left == nil && right == nil {
			continue
		}
		b := &bracket{a: m.at[k], b: m.at[k+1], weightA: 1, weightB: 1, near: best}
		if b.low, b.high = m.p.around((b.a + b.b) / 2); b.low == b.high {
			continue
		}
		if left != nil {
			b.slopeA, b.knownLeft = m.slope(b, left, b.a), true
		}
		if right != nil {
			b.slopeB, b.knownRight = m.slope(b, right, b.b), true
		}
		open = append(open, b)
	}
	for round := range betweenRounds {
		var tasks []func() (*candidate, error)
		var active []*bracket
		for _, b := range open {
			if b.propose(best) {
				active = append(active, b)
				tasks = append(tasks, m.task(ctx, b.next, b.near))
			}
		}
		if len(tasks) == 0 {
			break
		}
		found, halt, err := m.r.batch(ctx, tasks)
		for i, c := range found {
			if c != nil && (best == nil || c.value > best.value) {
				best = c
			}
			active[i].take(m, c)
		}
		m.r.report(from + (to-from)*float64(round+1)/betweenRounds)
		if halt || err != nil {
			return best, halt, err
		}
	}
	return best, false, nil
}

// slope returns dt/dmean at a candidate inside the bracket or at its end.
func (m *means) slope(b *bracket, c *candidate, mean float64) float64 {
	g := checkGradient(m.d.at(c), c, m.p.Rate, []int{b.low, b.high})
	return mixtureSlope(b.low, b.high, mean, g[0], g[1])
}

// propose sets the next mean to try; false if the bracket is done: no more
// than a trifle can be gained in it.
func (b *bracket) propose(best *candidate) bool {
	if b.closed {
		return false
	}
	inside := b.knownLeft && b.knownRight && b.slopeA < 0 && b.slopeB > 0
	if !inside {
		// Falling or rising throughout: look once in the middle, where the
		// slope decides which half, if any, to go on with.
		b.next = (b.a + b.b) / 2
		ok := !b.probed
		b.probed = true
		return ok
	}
	gain := min(-b.slopeA, b.slopeB) * (b.b - b.a)
	if best != nil && gain < gainTolerance*best.t {
		return false
	}
	wa, wb := b.weightA*-b.slopeA, b.weightB*b.slopeB
	b.next = (b.a*wb + b.b*wa) / (wa + wb)
	margin := 1e-3 * (b.b - b.a)
	b.next = min(max(b.next, b.a+margin), b.b-margin)
	return b.b-b.a > 1e-9*b.b
}

// take narrows the bracket by what was found at b.next.
func (b *bracket) take(m *means, c *candidate) {
	if c == nil {
		b.closed = true
		return
	}
	b.near = c
	slope := m.slope(b, c, b.next)
	switch {
	case slope < 0:
		b.a, b.slopeA, b.knownLeft = b.next, slope, true
		b.weightA, b.weightB = 1, b.weightB/2
	case slope > 0:
		b.b, b.slopeB, b.knownRight = b.next, slope, true
		b.weightA, b.weightB = b.weightA/2, 1
	default:
		b.closed = true
	}
}

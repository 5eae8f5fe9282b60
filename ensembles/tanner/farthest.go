package tanner

import "math/rand/v2"

// Bounds of the search before an edge is placed, in neighbours visited. The
// neighbourhood of the variable node is searched up to reach. If check nodes
// are left then, growthCandidates of them are searched from the other side,
// each up to reach/growthShare: two searches that do not meet vouch for the
// sum of their depths, which one search alone would pay for with about the
// product of their sizes. The reach is chosen so that all searches together
// visit about growthWork neighbours, but not less than leastReach, which
// makes the whole take time in proportion to the length beyond 20000 or so.
const (
	growthWork       = 300_000_000
	leastReach       = 4000
	growthShare      = 4
	growthCandidates = 12
	// drawTries is how often a socket is drawn before all are looked through.
	drawTries = 64
)

// farsight finds the check node to which a variable node should be joined.
type farsight struct {
	sockets         *sockets
	shelf           *shelf
	variable, check *probe // the searches from either side
	random          *rand.Rand
	reach           int
	// What the variable nodes of degree 2, which come first, have connected.
	trees trees
}

func newFarsight(s *sockets, h *shelf, random *rand.Rand) *farsight {
	return &farsight{s, h, newProbe(s), newProbe(s), random, max(leastReach, growthWork/max(1, len(s.mate))), newTrees(len(s.checkEnd))}
}

// farthest returns the check node with free sockets that is farthest from v,
// by a random free socket if there are several; -1 if v is joined to all. Where
// the reach ends the search, it is the best of a random sample.
func (f *farsight) farthest(v int32) int32 {
	h, p := f.shelf, f.variable
	search := p.begin()
	unseen := h.count
	p.varMark[v].search = search
	p.frontier = p.frontier[:0]
	for _, c := range f.sockets.checksOf(v) {
		p.checkMark[c].search = search
		p.frontier = append(p.frontier, c)
		if h.row[c] > 0 {
			unseen--
		}
	}
	best := int32(-1)
	for work, step := 0, 0; unseen > 0 && len(p.frontier) > 0; work += step {
		// A depth is searched wholly or not at all; the next one is expected
		// to cost as much per node as the last.
		if work > 0 && work+step/len(p.next)*len(p.frontier) > f.reach {
			break
		}
		sockets := int32(0)
		step = p.leap(search, func(c int32) bool {
			if h.row[c] > 0 {
				unseen--
				// Each socket met so far stays chosen with equal chances.
				free := h.row[c]
				if sockets += free; f.random.Int32N(sockets) < free {
					best = c
				}
			}
			return unseen > 0
		})
	}
	if unseen == 0 {
		return best
	}
	if c := f.apart(v); c >= 0 {
		return c
	}
	return f.sample(search)
}

// joined is told of every edge that is placed.
func (f *farsight) joined(v int32) {
	if ends := f.sockets.checksOf(v); f.pairs(v) && len(ends) == 2 {
		f.trees.unite(ends[0], ends[1])
	}
}

// pairs tells whether v is to have two edges.
func (f *farsight) pairs(v int32) bool {
	return f.sockets.varStart[v+1]-f.sockets.varStart[v] == 2
}

// apart returns a check node with free sockets that no path leads to from v,
// by a random free socket where possible, for the second edge of a node of
// degree 2; -1 if there is none. While these nodes are placed the graph is a
// forest of them, in which no reach is needed to tell.
func (f *farsight) apart(v int32) int32 {
	if !f.pairs(v) || len(f.sockets.checksOf(v)) != 1 {
		return -1
	}
	from := f.trees.root(f.sockets.checksOf(v)[0])
	return f.draw(func(c int32) bool { return f.trees.root(c) != from })
}

// sample returns the farthest of growthCandidates check nodes that the search
// from the variable node has not met, drawn by their free sockets; there must
// be one. The first that keeps clear of that search within its own reach is
// good enough.
func (f *farsight) sample(search int32) int32 {
	best, most := int32(-1), -1
	for range growthCandidates {
		c := f.draw(func(c int32) bool { return f.variable.checkMark[c].search != search })
		distance, clear := f.distance(c, search)
		if clear {
			return c
		}
		if distance > most {
			best, most = c, distance
		}
	}
	return best
}

// draw returns a random check node that will do, by a random free socket or,
// where most will not, the next one on the shelf; -1 if none does.
func (f *farsight) draw(do func(c int32) bool) int32 {
	h := f.shelf
	for range drawTries {
		if c := h.draw(f.random); do(c) {
			return c
		}
	}
	start := f.random.IntN(h.count)
	for _, part := range [2]bool{false, true} {
		i := 0
		for _, row := range h.rows {
			for _, c := range row {
				if (i >= start) != part && do(c) {
					return c
				}
				i++
			}
		}
	}
	return -1
}

// distance returns how many steps from check node to check node lead from c
// to the nodes met by the search from the variable node, and clear if none
// does within reach. That search has covered whole depths, so the steps
// order the candidates by their distance from the variable node.
func (f *farsight) distance(c, search int32) (steps int, clear bool) {
	p := f.check
	own := p.begin()
	p.checkMark[c].search = own
	p.frontier = append(p.frontier[:0], c)
	met := false
	for work, step := 0, 0; len(p.frontier) > 0; work += step {
		if work > 0 && work+step/len(p.next)*len(p.frontier) > f.reach/growthShare {
			break
		}
		steps++
		step = p.leap(own, func(c int32) bool {
			met = f.variable.checkMark[c].search == search
			return !met
		})
		if met {
			return steps, false
		}
	}
	return steps, true
}

// leap advances the frontier from check nodes over variable nodes to new
// check nodes, each of which is shown to meet, until that returns false. It
// returns the number of neighbours visited, and leaves the old frontier in
// next.
func (p *probe) leap(search int32, meet func(c int32) bool) (work int) {
	s := p.s
	p.next = p.next[:0]
	defer func() { p.frontier, p.next = p.next, p.frontier }()
	for _, c := range p.frontier {
		row := s.variablesOf(c)
		work += len(row)
		for _, u := range row {
			if p.varMark[u].search == search {
				continue
			}
			p.varMark[u].search = search
			row := s.checksOf(u)
			work += len(row)
			for _, d := range row {
				if p.checkMark[d].search == search {
					continue
				}
				p.checkMark[d].search = search
				p.next = append(p.next, d)
				if !meet(d) {
					return work
				}
			}
		}
	}
	return work
}

package tanner

import (
	"context"
	"math/rand/v2"
)

// Limits of the effort in removeCycles. Where an edge can be moved at all,
// nearly every partner will do, so few tries are enough. The work for each
// length, counted in neighbours visited, is bounded, per edge and in all,
// because in an ensemble with large degrees the expected number of cycles of
// length 2k, (λ'(1)ρ'(1))^k/2k, and the search behind each grow fast with k.
// However long the graph is, cycles of lengths 4 and 6 can be sought from all
// of its nodes where degrees are small, as with (3,6).
const (
	cycleTries       = 16
	cycleWorkPerEdge = 1000
	leastWorkPerEdge = 30
	cycleWork        = 100_000_000
)

// removeCycles exchanges the check nodes of pairs of edges so that cycles
// shorter than girth disappear, the shortest first. An exchange is kept only
// if neither of its two new edges lies on a cycle of the length in hand or
// shorter, so the number of such cycles falls with every exchange.
func (s *sockets) removeCycles(ctx context.Context, girth int, random *rand.Rand) error {
	if s.movable() < 2 {
		return nil
	}
	p := newProbe(s)
	survey := newSurvey(s)
	bound := min(max(cycleWork, leastWorkPerEdge*len(s.mate)), cycleWorkPerEdge*len(s.mate))
	for length := int32(4); length < int32(girth); length += 2 {
		p.work = 0
		for v := int32(0); v < s.frozen && p.work < bound; v++ {
			if v%surveyed == 0 {
				if err := ctx.Err(); err != nil {
					return err
				}
				survey.take(v, length)
			}
			if work := survey.clear(v); work > 0 {
				p.work += work
				continue
			}
			for {
				a, b, found := p.cycleAt(v, length)
				if !found {
					break
				}
				if random.Uint32()&1 == 0 {
					a, b = b, a
				}
				if !p.reroute(a, length, random, survey) && !p.reroute(b, length, random, survey) {
					break
				}
			}
		}
	}
	return nil
}

// reroute exchanges the check nodes of the edge and a random other one so
// that both new edges lie on no cycle of the given length or less.
func (p *probe) reroute(edge, length int32, random *rand.Rand, y *survey) bool {
	for range cycleTries {
		other := random.Int32N(p.s.movable())
		if !p.s.swappable(edge, other) {
			continue
		}
		p.s.swap(edge, other)
		if !p.onCycle(edge, length) && !p.onCycle(other, length) {
			p.outdate(y, edge, other)
			return true
		}
		p.s.swap(edge, other)
	}
	return false
}

// probe searches the neighbourhoods of nodes. Marks carry the number of the
// search, so that starting a search costs nothing.
type probe struct {
	s                  *sockets
	varMark, checkMark []mark
	search             int32
	frontier, next     []int32
	work               int // neighbours visited
}

// mark is the last search that reached a node and the edge by which that
// search left its origin.
type mark struct{ search, root int32 }

func newProbe(s *sockets) *probe {
	n, m := len(s.varEnd), len(s.checkEnd)
	return &probe{s: s, varMark: make([]mark, n), checkMark: make([]mark, m)}
}

// begin opens a new search.
func (p *probe) begin() int32 {
	if p.search == 1<<31-1 {
		clear(p.varMark)
		clear(p.checkMark)
		p.search = 0
	}
	p.search++
	return p.search
}

// cycleAt looks for a shortest cycle through variable node v and, if it is
// no longer than length, returns the two edges at v that lie on it. Breadth
// first, each node remembers the edge at v by which it was reached; an edge
// between two nodes with different memories closes a cycle.
func (p *probe) cycleAt(v, length int32) (a, b int32, found bool) {
	s, search := p.s, p.begin()
	p.varMark[v].search = search
	p.frontier = p.frontier[:0]
	for edge := s.varStart[v]; edge < s.varEnd[v]; edge++ {
		c := s.varCheck[edge]
		p.checkMark[c] = mark{search, edge}
		p.frontier = append(p.frontier, c)
	}
	for depth := int32(1); depth < length/2; depth++ {
		p.next = p.next[:0]
		marks := p.varMark
		if depth%2 == 0 {
			marks = p.checkMark
		}
		for _, x := range p.frontier {
			var root int32
			var row []int32
			if depth%2 == 1 {
				root, row = p.checkMark[x].root, s.variablesOf(x)
			} else {
				root, row = p.varMark[x].root, s.checksOf(x)
			}
			p.work += len(row)
			for _, y := range row {
				if m := &marks[y]; m.search != search {
					*m = mark{search, root}
					p.next = append(p.next, y)
				} else if m.root != root && (depth%2 == 0 || y != v) {
					return m.root, root, true
				}
			}
		}
		p.frontier, p.next = p.next, p.frontier
	}
	return 0, 0, false
}

// onCycle tells whether an edge (v,c) lies on a cycle of the given length or
// less: whether length-1 other edges lead from v to c. The neighbourhood of c
// to depth length/2-1 is marked, then v is searched to depth length/2 for a
// marked node.
func (p *probe) onCycle(edge, length int32) bool {
	s := p.s
	v, c := s.owner(edge), s.varCheck[edge]
	search, target := p.begin(), p.begin()
	p.checkMark[c].search = target
	p.frontier = append(p.frontier[:0], c)
	for depth := int32(0); depth < length/2-1; depth++ {
		p.expand(depth%2 == 0, depth == 0, v, target, target)
	}
	p.varMark[v].search = search
	p.frontier = append(p.frontier[:0], v)
	for depth := int32(0); depth < length/2; depth++ {
		if p.expand(depth%2 == 1, depth == 0, c, search, target) {
			return true
		}
	}
	return false
}

// expand moves the frontier one step, from check nodes or from variable
// nodes. In the first step the neighbour skip is left out: it is the other
// end of the edge in question. It reports whether a node marked target by an
// earlier search was met.
func (p *probe) expand(fromChecks, first bool, skip, search, target int32) bool {
	marks := p.checkMark
	if fromChecks {
		marks = p.varMark
	}
	p.next = p.next[:0]
	for _, x := range p.frontier {
		var row []int32
		if fromChecks {
			row = p.s.variablesOf(x)
		} else {
			row = p.s.checksOf(x)
		}
		p.work += len(row)
		for _, y := range row {
			switch m := &marks[y].search; {
			case *m == search || first && y == skip:
			case *m == target:
				return true
			default:
				*m = search
				p.next = append(p.next, y)
			}
		}
	}
	p.frontier, p.next = p.next, p.frontier
	return false
}

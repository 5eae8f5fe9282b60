package tanner

import (
	"context"
	"fmt"
	"math/rand/v2"
)

// swapTries is how many random partners are tried for an edge that must
// move. In a sparse graph nearly every partner will do; where most will not,
// more tries seldom help.
const swapTries = 64

// scatter joins the free sockets by a random permutation, the configuration
// model of Luby, Mitzenmacher, Shokrollahi & Spielman (IEEE Trans. Inf.
// Theory 47(2), 2001), and removes repeated edges by exchanging the check
// nodes of one of them and a random other edge.
func (s *sockets) scatter(ctx context.Context, random *rand.Rand) error {
	var open []int32
	for c := range s.checkEnd {
		for socket := s.checkEnd[c]; socket < s.checkStart[c+1]; socket++ {
			s.checkVar[socket] = int32(c) // until joined, the socket's own node
			open = append(open, socket)
		}
	}
	random.Shuffle(len(open), func(i, j int) { open[i], open[j] = open[j], open[i] })
	for v := range s.frozen {
		for edge := s.varEnd[v]; edge < s.varStart[v+1]; edge++ {
			socket := open[edge]
			s.varCheck[edge] = s.checkVar[socket]
			s.joinAt(v, socket)
		}
	}
	for c := range s.checkEnd {
		s.checkEnd[c] = s.checkStart[c+1]
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	if !s.separate(random) {
		return s.realize(ctx, random)
	}
	return nil
}

// separate removes repeated edges; it reports whether it succeeded.
func (s *sockets) separate(random *rand.Rand) bool {
	seen := make([]int32, len(s.checkEnd))
	for v := range s.frozen {
		for edge := s.varStart[v]; edge < s.varStart[v+1]; edge++ {
			if seen[s.varCheck[edge]] == v+1 && !s.relocate(edge, random) {
				return false
			}
			seen[s.varCheck[edge]] = v + 1
		}
	}
	return true
}

// relocate swaps an edge with a random other one that allows it, and tries
// all of them if chance does not find any.
func (s *sockets) relocate(edge int32, random *rand.Rand) bool {
	for range swapTries {
		if other := random.Int32N(s.movable()); s.swappable(edge, other) {
			s.swap(edge, other)
			return true
		}
	}
	offset := random.Int32N(s.movable())
	for i := range s.movable() {
		if other := (offset + i) % s.movable(); s.swappable(edge, other) {
			s.swap(edge, other)
			return true
		}
	}
	return false
}

// realize joins the nodes that are not frozen anew in the way that cannot
// fail where a graph exists: each variable node in turn takes the check nodes
// that have most sockets left (Gale, Pacific J. Math. 7, 1957; Ryser,
// Canad. J. Math. 9, 1957). Random swaps then remove the regularity, as
// every graph with the same degrees can be reached by swaps. It serves small
// dense graphs, where repairing a random one may be impossible step by step.
func (s *sockets) realize(ctx context.Context, random *rand.Rand) error {
	s.clear()
	for v := range s.frozen {
		order := s.byFree()
		for _, c := range order[:s.varStart[v+1]-s.varStart[v]] {
			if s.free(c) == 0 {
				return fmt.Errorf("the nodes beside the chain cannot be joined without repeated edges: choose a greater length or no chain")
			}
			s.join(v, c)
		}
		if err := ctx.Err(); err != nil {
			return err
		}
	}
	const mixing = 10 // swaps tried per edge
	for range mixing {
		for edge := range s.movable() {
			if other := random.Int32N(s.movable()); s.swappable(edge, other) {
				s.swap(edge, other)
			}
		}
	}
	return nil
}

// clear removes all edges except the frozen ones, which are joined first and
// so use the first sockets of their check nodes.
func (s *sockets) clear() {
	for c := range s.checkEnd {
		end := s.checkStart[c]
		for end < s.checkEnd[c] && s.checkVar[end] >= s.frozen {
			end++
		}
		s.checkEnd[c] = end
	}
	for v := range s.frozen {
		s.varEnd[v] = s.varStart[v]
	}
}

// byFree lists the check nodes in decreasing order of free sockets, by
// counting.
func (s *sockets) byFree() []int32 {
	most := int32(0)
	for c := range s.checkEnd {
		most = max(most, s.free(int32(c)))
	}
	at := make([]int, most+2)
	for c := range s.checkEnd {
		at[most-s.free(int32(c))+1]++
	}
	for i := range most + 1 {
		at[i+1] += at[i]
	}
	order := make([]int32, len(s.checkEnd))
	for c := range s.checkEnd {
		key := most - s.free(int32(c))
		order[at[key]] = int32(c)
		at[key]++
	}
	return order
}

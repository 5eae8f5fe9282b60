package tanner

import (
	"context"
	"math"
	"math/bits"
	"runtime"
	"sync"
	"sync/atomic"
)

// Cycles describes the shortest cycles of a graph.
type Cycles struct {
	// Girth is the length of the shortest cycles in edges, even and at least
	// 4; 0 if the graph has no cycle.
	Girth int
	// Total is the number of cycles of that length.
	Total int64
	// PerVariable is the number of them through each variable node. It sums
	// to Total·Girth/2.
	PerVariable []int64
}

// ShortestCycles finds the girth and counts the shortest cycles exactly, by a
// breadth-first search from every variable node v that goes no deeper than
// half the shortest length found so far. As long as no node is met twice
// there is one path from v to each node met. If g is the girth, two paths
// from v to a node at depth g/2 share no other node, since together they
// would hold a shorter cycle; so k paths to one node make k(k-1)/2 cycles,
// and each cycle through v has exactly one node opposite. What was counted of
// a longer length is forgotten in the end. The time is that of visiting the
// tree of depth g/2 below every variable node, on all processors. It returns
// ctx.Err() when ctx ends.
func (g *Graph) ShortestCycles(ctx context.Context) (Cycles, error) {
	core := g.core()
	n := g.Variables()
	result := Cycles{PerVariable: make([]int64, n)}
	lengths := make([]int32, n) // of the cycles counted, 0 for none
	var (
		shortest atomic.Int32 // so far, 0 for none
		next     atomic.Int64
		workers  sync.WaitGroup
	)
	const share = 256 // variable nodes
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			f := cycleFinder{g: core}
			for ctx.Err() == nil {
				first := int(next.Add(share)) - share
				if first >= n {
					return
				}
				for v := first; v < min(first+share, n); v++ {
					if len(core.ChecksOf(v)) == 0 {
						continue
					}
					length, count := f.through(int32(v), int(shortest.Load()))
					if count == 0 {
						continue
					}
					lengths[v], result.PerVariable[v] = int32(length), count
					for now := shortest.Load(); now == 0 || int32(length) < now; now = shortest.Load() {
						if shortest.CompareAndSwap(now, int32(length)) {
							break
						}
					}
				}
			}
		})
	}
	workers.Wait()
	if err := ctx.Err(); err != nil {
		return Cycles{}, err
	}
	result.Girth = int(shortest.Load())
	for v, length := range lengths {
		if int(length) != result.Girth {
			result.PerVariable[v] = 0
		}
		result.Total += result.PerVariable[v]
	}
	if result.Girth > 0 {
		result.Total /= int64(result.Girth / 2)
	}
	return result, nil
}

// cycleFinder searches a graph.
type cycleFinder struct {
	g              *Graph
	frontier, next []step
	// The nodes met at one depth, a table of open addressing with a power of
	// two of entries. It is small enough for the nearest cache, where marks
	// on all nodes of a long graph would not be; earlier depths need no
	// memory, since a way back there would be a shorter cycle.
	met   []meeting
	epoch int32
}

// step is a node of the frontier and the one it was reached from.
type step struct{ node, parent int32 }

// meeting counts the paths to a node; it is void unless of this epoch.
type meeting struct{ node, epoch, paths int32 }

// through returns the length of the shortest cycle through v, provided that
// it is at most bound (0: no bound), and the number of these cycles; 0 if
// there is none. Unless there is a still shorter cycle elsewhere both are
// exact.
func (f *cycleFinder) through(v int32, bound int) (length int, count int64) {
	f.frontier = append(f.frontier[:0], step{v, -1})
	for length = 2; len(f.frontier) > 0 && (bound == 0 || length <= bound); length += 2 {
		if length%4 == 2 {
			f.deepen(f.g.varStart, f.g.varCheck)
		} else {
			f.deepen(f.g.checkStart, f.g.checkVar)
		}
		if count = f.meetings(); count > 0 {
			return length, count
		}
	}
	return 0, 0
}

// deepen moves the frontier one edge onwards.
func (f *cycleFinder) deepen(start, to []int32) {
	next := f.next[:0]
	for _, x := range f.frontier {
		for _, y := range to[start[x.node]:start[x.node+1]] {
			if y != x.parent {
				next = append(next, step{y, x.node})
			}
		}
	}
	f.frontier, f.next = next, f.frontier
}

// meetings returns the number of pairs in the frontier with the same node.
func (f *cycleFinder) meetings() (pairs int64) {
	if need := 2 * len(f.frontier); len(f.met) < need || f.epoch == math.MaxInt32 {
		f.met = make([]meeting, 1<<bits.Len(uint(max(need, 512))))
		f.epoch = 0
	}
	f.epoch++
	// No more of the table is used than the frontier needs.
	size := uint32(1) << bits.Len(uint(2*len(f.frontier)))
	for _, x := range f.frontier {
		at := uint32(x.node) * 2654435769 >> 7 & (size - 1) // Knuth's multiplicative hashing
		for f.met[at].epoch == f.epoch && f.met[at].node != x.node {
			at = (at + 1) & (size - 1)
		}
		if m := &f.met[at]; m.epoch == f.epoch {
			pairs += int64(m.paths)
			m.paths++
		} else {
			*m = meeting{x.node, f.epoch, 1}
		}
	}
	return pairs
}

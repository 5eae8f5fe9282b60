package tanner

import (
	"context"
	"math"
	"math/bits"
	"runtime"
	"slices"
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
// half the shortest length found so far, and only over variable nodes with
// greater numbers: so each cycle is met once, from the first of its variable
// nodes. As long as no node is met twice there is one path from v to each node
// met. If g is the girth, two paths from v to a node at depth g/2 share no
// other node, since together they would hold a shorter cycle; so k paths to
// one node make k(k-1)/2 cycles, and each path is part of k-1 of them. What
// was counted of a longer length is forgotten. The time is that of visiting
// the tree of depth g/2 below every variable node, on all processors; it is
// least with the columns in decreasing order of degree, as Build has them. It
// returns ctx.Err() when ctx ends.
func (g *Graph) ShortestCycles(ctx context.Context) (Cycles, error) {
	core := g.core()
	n := g.Variables()
	result := Cycles{PerVariable: make([]int64, n)}
	var (
		shortest atomic.Int32 // so far, 0 for none
		next     atomic.Int64
		workers  sync.WaitGroup
		lock     sync.Mutex // of result
	)
	add := func(f *cycleFinder) {
		lock.Lock()
		defer lock.Unlock()
		if result.Girth == 0 || f.length < result.Girth {
			clear(result.PerVariable)
			result.Girth, result.Total = f.length, 0
			shortest.Store(int32(f.length))
		}
		if f.length == result.Girth {
			result.Total += f.twice
			for _, c := range f.credits {
				result.PerVariable[c.variable] += c.twice
			}
		}
	}
	const share = 256 // variable nodes
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			f := cycleFinder{g: core, levels: make([][]step, 1)}
			for ctx.Err() == nil {
				first := int(next.Add(share)) - share
				if first >= n {
					return
				}
				for v := first; v < min(first+share, n); v++ {
					if len(core.ChecksOf(v)) > 0 && f.from(int32(v), int(shortest.Load())) {
						add(&f)
					}
				}
			}
		})
	}
	workers.Wait()
	if err := ctx.Err(); err != nil {
		return Cycles{}, err
	}
	result.Total /= 2
	for v := range result.PerVariable {
		result.PerVariable[v] /= 2
	}
	return result, nil
}

// cycleFinder searches a graph.
type cycleFinder struct {
	g      *Graph
	levels [][]step // of the search, by depth
	// The nodes met at one depth, a table of open addressing with a power of
	// two of entries. It is small enough for the nearest cache, where marks
	// on all nodes of a long graph would not be; earlier depths need no
	// memory, since a way back there would be a shorter cycle.
	met   []meeting
	epoch int32
	// What the last search found: cycles of one length, twice their number in
	// all and, in parts, through each variable node.
	length  int
	twice   int64
	credits []credit
}

// step is a node that was met and the place of the one before it in the level
// above.
type step struct{ node, from int32 }

// meeting counts the paths to a node; it is void unless of this epoch.
type meeting struct{ node, epoch, paths int32 }

type credit struct {
	variable int32
	twice    int64
}

// from finds the shortest cycles whose first variable node is v, provided that
// they are no longer than bound (0: no bound), and tells whether there are
// any. Unless there is a still shorter cycle elsewhere the counts are exact.
func (f *cycleFinder) from(v int32, bound int) bool {
	f.levels[0] = append(f.levels[0][:0], step{v, -1})
	for depth := 1; len(f.levels[depth-1]) > 0 && (bound == 0 || 2*depth <= bound); depth++ {
		if depth == len(f.levels) {
			f.levels = append(f.levels, nil)
		}
		if depth%2 == 1 {
			f.deepen(depth, f.g.varStart, f.g.varCheck, -1)
		} else {
			f.deepen(depth, f.g.checkStart, f.g.checkVar, v)
		}
		if f.meet(f.levels[depth]) {
			f.length = 2 * depth
			f.count(v, depth)
			return true
		}
	}
	return false
}

// deepen follows the edges from one level to the next, to nodes with greater
// numbers than low. Nearly all of its time goes into waiting for rows from
// memory. Several are waited for at once only if no branch hangs on what they
// hold, so every node is written and those not wanted are written over.
func (f *cycleFinder) deepen(depth int, start, to []int32, low int32) {
	level := f.levels[depth][:0]
	for i, x := range f.levels[depth-1] {
		before := int32(-1)
		if depth > 1 {
			before = f.levels[depth-2][x.from].node
		}
		row := to[start[x.node]:start[x.node+1]]
		k := len(level)
		level = slices.Grow(level, len(row))[:k+len(row)]
		for _, y := range row {
			level[k] = step{y, int32(i)}
			wanted := 1
			if y <= low {
				wanted = 0
			}
			if y == before {
				wanted = 0
			}
			k += wanted
		}
		level = level[:k]
	}
	f.levels[depth] = level
}

// meet tabulates the nodes of a level and tells whether any occurs twice.
func (f *cycleFinder) meet(level []step) (twice bool) {
	if size := tableSize(len(level)); len(f.met) < size || f.epoch == math.MaxInt32 {
		f.met = make([]meeting, max(size, 1024))
		f.epoch = 0
	}
	f.epoch++
	for _, x := range level {
		if m := f.meetingAt(x.node, len(level)); m.epoch == f.epoch {
			m.paths++
			twice = true
		} else {
			*m = meeting{x.node, f.epoch, 1}
		}
	}
	return twice
}

// meetingAt returns the entry of a node among as many as are tabulated, or the
// one to use for it. No more of the table is used than these need.
func (f *cycleFinder) meetingAt(node int32, among int) *meeting {
	size := tableSize(among)
	at := int(uint32(node)*2654435769>>7) & (size - 1) // Knuth's multiplicative hashing
	for f.met[at].epoch == f.epoch && f.met[at].node != node {
		at = (at + 1) & (size - 1)
	}
	return &f.met[at]
}

// tableSize returns the power of two above twice the number of nodes.
func tableSize(nodes int) int { return 1 << bits.Len(uint(2*nodes)) }

// count counts the cycles that the paths from v to the level of this depth
// make, twice: once for each of the two paths.
func (f *cycleFinder) count(v int32, depth int) {
	f.twice, f.credits = 0, f.credits[:0]
	level := f.levels[depth]
	for _, x := range level {
		others := int64(f.meetingAt(x.node, len(level)).paths - 1)
		if others == 0 {
			continue
		}
		f.twice += others
		if depth%2 == 0 {
			f.credits = append(f.credits, credit{x.node, others}) // again from the other path
		}
		for d, at := depth-1, x.from; d > 0; d-- {
			above := f.levels[d][at]
			if d%2 == 0 {
				f.credits = append(f.credits, credit{above.node, 2 * others})
			}
			at = above.from
		}
	}
	f.credits = append(f.credits, credit{v, f.twice})
}

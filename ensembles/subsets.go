package ensembles

import (
	"cmp"
	"container/heap"
	"slices"
)

// cheapestSubsets returns the subsets of the given size of {0, …, n-1}, n
// the number of costs, in order of the sum of their costs: the cheapest ones
// up to the limit, equal ones in a fixed order. Each subset is a sorted list
// of indices. It takes O(limit·(size + log limit)) time after sorting.
//
// The indices are sorted by cost, and a subset is seen as tokens on the
// places 0, …, n-1 of that order. The cheapest has its tokens on the first
// places. From there every subset is reached in one way only, by moving the
// last token up to its place first, then the one before it up to its place,
// and so on; no move lowers the cost, so a heap of the subsets reached whose
// successors are open delivers them in order (the scheme of Lawler,
// Management Science 18(7), 1972, for the best solutions of a discrete
// problem).
func cheapestSubsets(costs []float64, size, limit int) [][]int {
	order := make([]int, len(costs))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(costs[a], costs[b]) })
	if size < 0 || size > len(costs) || limit < 1 {
		return nil
	}
	if size == 0 {
		return [][]int{{}}
	}
	open := &subsetHeap{{moving: size - 1, place: size - 1, bound: len(costs)}}
	reached := 1
	push := func(s subset) {
		s.number = reached
		reached++
		heap.Push(open, s)
	}
	var found [][]int
	for open.Len() > 0 && len(found) < limit {
		s := heap.Pop(open).(subset)
		found = append(found, s.indices(order))
		cost := func(place int) float64 { return costs[order[place]] }
		if s.place+1 < s.bound {
			next := s
			next.place++
			next.excess += cost(s.place+1) - cost(s.place)
			push(next)
		}
		if s.moving > 0 && s.place > s.moving {
			push(subset{
				excess: s.excess + cost(s.moving) - cost(s.moving-1),
				moving: s.moving - 1, place: s.moving, bound: s.place,
				settled: &settled{s.place, s.settled},
			})
		}
	}
	return found
}

// subset has tokens 0, …, moving-1 on the places of the same number, token
// moving on place, below bound, and the others where they have settled.
type subset struct {
	excess               float64 // over the cost of the cheapest subset
	moving, place, bound int
	settled              *settled
	number               int // breaks ties
}

type settled struct {
	place int
	above *settled
}

func (s subset) indices(order []int) []int {
	var indices []int
	for token := range s.moving {
		indices = append(indices, order[token])
	}
	indices = append(indices, order[s.place])
	for t := s.settled; t != nil; t = t.above {
		indices = append(indices, order[t.place])
	}
	slices.Sort(indices)
	return indices
}

type subsetHeap []subset

func (h subsetHeap) Len() int { return len(h) }
func (h subsetHeap) Less(i, j int) bool {
	return cmp.Or(cmp.Compare(h[i].excess, h[j].excess), cmp.Compare(h[i].number, h[j].number)) < 0
}
func (h subsetHeap) Swap(i, j int) { h[i], h[j] = h[j], h[i] }
func (h *subsetHeap) Push(x any)   { *h = append(*h, x.(subset)) }
func (h *subsetHeap) Pop() any {
	last := len(*h) - 1
	s := (*h)[last]
	*h = (*h)[:last]
	return s
}

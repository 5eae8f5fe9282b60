package tanner

import (
	"runtime"
	"sync"
	"sync/atomic"
)

const (
	// surveyed is the number of variable nodes that are surveyed at a time.
	surveyed = 1 << 14
	// surveyReach is the number of nodes at one depth at which a survey leaves
	// a variable node to the search itself, which ends where the first cycle
	// closes and not with a whole depth.
	surveyReach = 2048
)

// survey tells ahead of the search for cycles, by all processors, from which
// variable nodes there is nothing to find: from nearly all of them in a long
// graph. It also tells what the search would have visited, so that the bound
// of the effort, and with it the result, is the same as without a survey.
type survey struct {
	s       *sockets
	first   int32
	length  int32
	work    [surveyed]int // from first on; 0 if a cycle may be near
	finders []cycleFinder
}

func newSurvey(s *sockets) *survey {
	g := &Graph{s.varStart, s.varCheck, s.checkStart, s.checkVar} // all sockets are in use
	y := &survey{s: s, finders: make([]cycleFinder, runtime.GOMAXPROCS(0))}
	for i := range y.finders {
		y.finders[i] = cycleFinder{g: g, levels: make([][]step, 1)}
	}
	return y
}

// take surveys the nodes from first on for cycles of a length or less.
func (y *survey) take(first, length int32) {
	y.first, y.length = first, length
	last := min(first+surveyed, y.s.frozen)
	const share = 64
	var next atomic.Int32
	var workers sync.WaitGroup
	for i := range y.finders {
		workers.Go(func() {
			f := &y.finders[i]
			for {
				from := first + next.Add(share) - share
				if from >= last {
					return
				}
				for v := from; v < min(from+share, last); v++ {
					y.work[v-first] = f.clear(v, int(length)/2)
				}
			}
		})
	}
	workers.Wait()
}

// clear returns how many neighbours the search for a cycle from v visits in
// vain; 0 if it is not known to be in vain.
func (y *survey) clear(v int32) int { return y.work[v-y.first] }

// clear returns how many neighbours there are of the nodes at depths from 1 up
// to below the one given, if none is met twice down to that depth, and 0
// otherwise.
func (f *cycleFinder) clear(v int32, depth int) (work int) {
	f.levels[0] = append(f.levels[0][:0], step{v, -1})
	for d := 1; d <= depth; d++ {
		if d == len(f.levels) {
			f.levels = append(f.levels, nil)
		}
		if d%2 == 1 {
			f.deepen(d, f.g.varStart, f.g.varCheck, -1)
		} else {
			f.deepen(d, f.g.checkStart, f.g.checkVar, -1)
		}
		if len(f.levels[d]) > surveyReach || f.meet(f.levels[d]) {
			return 0
		}
		if d > 1 {
			work += len(f.levels[d-1]) + len(f.levels[d]) // each but one neighbour is new
		}
	}
	return work
}

// outdate forgets what was surveyed of nodes that may see the two edges, which
// have just been exchanged. Any search that saw them before met one of their
// variable or check nodes first, and that by edges that are still there.
func (p *probe) outdate(y *survey, a, b int32) {
	search, work := p.begin(), p.work
	p.frontier = append(p.frontier[:0], p.s.owner(a), p.s.owner(b))
	for depth := int32(0); ; depth++ {
		if depth%2 == 0 {
			for _, v := range p.frontier {
				if v >= y.first && v < y.first+surveyed {
					y.work[v-y.first] = 0
				}
			}
		}
		if depth == y.length/2 { // one more than from the check nodes themselves
			break
		}
		p.expand(depth%2 == 1, false, -1, search, -1)
	}
	p.work = work
}

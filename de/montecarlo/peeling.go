package montecarlo

import (
	"math/rand/v2"

	"tannery/ensembles/tanner"
)

// peeling decodes on the BEC: a check with a single erased bit restores it
// (Luby, Mitzenmacher, Shokrollahi & Spielman, Efficient erasure correcting
// codes, IEEE Trans. Inf. Theory 47(2), 2001). Each check keeps the number of
// its erased bits and the exclusive or of their numbers, which is the number
// of the last one when one is left; so the time is linear in the edges of
// erased bits. Checks that come down to one erased bit during an iteration
// wait for the next, so that iterations are those of message passing with the
// flooding schedule.
type peeling struct {
	g            *tanner.Graph
	draw         source
	erased, name []int32 // of the erased bits of each check: number, exclusive or
	ready, next  []int32 // checks with one erased bit
}

func newPeeling(g *tanner.Graph, draw source) *peeling {
	return &peeling{g: g, draw: draw, erased: make([]int32, g.Checks()), name: make([]int32, g.Checks())}
}

// trial implements decoder; it takes no notice of stop, being fast.
func (p *peeling) trial(random *rand.Rand, limit int, _ func() bool) (outcome, bool) {
	clear(p.erased)
	clear(p.name)
	var o outcome
	for v := range p.g.Variables() {
		if p.draw(random) == 0 {
			o.bitErrors++
			for _, c := range p.g.ChecksOf(v) {
				p.erased[c]++
				p.name[c] ^= int32(v)
			}
		}
	}
	p.next = p.next[:0]
	for c, n := range p.erased {
		if n == 1 {
			p.next = append(p.next, int32(c))
		}
	}
	for ; len(p.next) > 0 && (limit == 0 || o.iterations < int64(limit)); o.iterations++ {
		p.ready, p.next = p.next, p.ready[:0]
		for _, c := range p.ready {
			if p.erased[c] != 1 {
				continue // another check has restored the bit
			}
			v := p.name[c]
			o.bitErrors--
			for _, d := range p.g.ChecksOf(int(v)) {
				p.erased[d]--
				p.name[d] ^= v
				if p.erased[d] == 1 {
					p.next = append(p.next, d)
				}
			}
		}
		// What waits may have been restored meanwhile by other checks.
		waiting := p.next[:0]
		for _, c := range p.next {
			if p.erased[c] == 1 {
				waiting = append(waiting, c)
			}
		}
		p.next = waiting
	}
	return o, true
}

package tanner

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"tannery/ensembles"
)

// distances are those from variable node v to all check nodes, by a search
// from edge to edge over a plain list of them; math.MaxInt if there is no path.
func distances(edges []Edge, v int32, checks int) []int {
	toVariable, toCheck := map[int32]int{v: 0}, make([]int, checks)
	for c := range toCheck {
		toCheck[c] = math.MaxInt
	}
	for changed := true; changed; {
		changed = false
		for _, e := range edges {
			from, met := toVariable[e.Variable]
			if met && from+1 < toCheck[e.Check] {
				toCheck[e.Check] = from + 1
				changed = true
			}
			if back := toCheck[e.Check]; back < math.MaxInt {
				if at, met := toVariable[e.Variable]; !met || back+1 < at {
					toVariable[e.Variable] = back + 1
					changed = true
				}
			}
		}
	}
	return toCheck
}

// Each edge goes to a check node with a free socket that is as far from the
// variable node as any (Hu, Eleftheriou & Arnold, 2005), by another search.
func TestGrowthGoesFarthest(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 10))
	depths := map[int]int{}
	for i := range 40 {
		r := arbitrary(random)
		switch i % 4 {
		case 0:
			r = regular(3, 6, 12+2*random.IntN(40))
		case 1:
			r = satellite(20 * (1 + random.IntN(6)))
		}
		s, err := layOut(r, false, random)
		if err != nil {
			t.Fatal(err)
		}
		shelf := newShelf(s)
		f := newFarsight(s, shelf, random)
		var edges []Edge
	grow:
		for v := s.frozen - 1; v >= 0; v-- {
			for s.varEnd[v] < s.varStart[v+1] {
				away := distances(edges, v, r.Checks)
				most := 1 // joined already
				for c, d := range away {
					if s.free(int32(c)) > 0 {
						most = max(most, d)
					}
				}
				c := f.farthest(v)
				if c < 0 {
					if most > 1 {
						t.Fatalf("%+v: node %d: nothing found, want a check node at distance %d", r, v, most)
					}
					break grow // room would have to be made
				}
				if s.free(c) == 0 || most == 1 || away[c] != most {
					t.Fatalf("%+v: node %d: check node %d at distance %d with %d free sockets; want one at distance %d", r, v, c, away[c], s.free(c), most)
				}
				depths[most]++
				shelf.take(c)
				s.join(v, c)
				f.joined(v)
				edges = append(edges, Edge{v, c})
			}
		}
	}
	if depths[math.MaxInt] == 0 || depths[3] == 0 || depths[5] == 0 || depths[7] == 0 {
		t.Errorf("edges placed by distance: %v; the sweep should have them near and far", depths)
	}
}

func BenchmarkGrowth(b *testing.B) {
	const name = "../../testdata/profiles/biawgn-r50-d15.yaml"
	content, err := os.ReadFile(name)
	if err != nil {
		b.Fatal(err)
	}
	p, _, err := ensembles.DecodeProfile(name, content)
	if err != nil {
		b.Fatal(err)
	}
	for _, length := range []int{10000, 64800} {
		irregular, err := ensembles.Realize(p.Ensemble, length, nil)
		if err != nil {
			b.Fatal(err)
		}
		for _, c := range []struct {
			name string
			r    ensembles.Realization
		}{{"biawgn-r50-d15", irregular}, {"regular", regular(3, 6, length)}} {
			b.Run(fmt.Sprintf("%s-%d", c.name, length), func(b *testing.B) {
				benchmarkBuild(b, c.r, Settings{Method: Growth})
			})
		}
	}
}

package tanner

import (
	"context"
	"math/rand/v2"
	"slices"
	"testing"
)

// cyclesByPaths counts the cycles of a given length through each variable
// node by walking all simple paths: each cycle is met twice from each of its
// variable nodes, once in each direction.
func cyclesByPaths(g *Graph, length int) []int64 {
	count := make([]int64, g.Variables())
	used := make([]bool, g.Variables()+g.Checks())
	var walk func(origin, v, left int) int64
	walk = func(origin, v, left int) (n int64) {
		for _, c := range g.ChecksOf(v) {
			if used[g.Variables()+int(c)] {
				continue
			}
			used[g.Variables()+int(c)] = true
			for _, u := range g.VariablesOf(int(c)) {
				switch {
				case int(u) == origin && left == 2:
					n++
				case left > 2 && !used[u]:
					used[u] = true
					n += walk(origin, int(u), left-2)
					used[u] = false
				}
			}
			used[g.Variables()+int(c)] = false
		}
		return n
	}
	for v := range count {
		used[v] = true
		count[v] = walk(v, v, length) / 2
		used[v] = false
	}
	return count
}

func TestShortestCyclesAgainstAllPaths(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 3))
	forests := 0
	for range 200 {
		n, m := 1+random.IntN(14), 1+random.IntN(9)
		var edges []Edge
		density := random.Float64() * 0.5
		for v := range n {
			for c := range m {
				if random.Float64() < density {
					edges = append(edges, Edge{int32(v), int32(c)})
				}
			}
		}
		g, err := NewGraph(n, m, edges)
		if err != nil {
			t.Fatal(err)
		}
		have, err := g.ShortestCycles(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		girth := 0
		want := make([]int64, n)
		for length := 4; length <= 2*min(n, m); length += 2 {
			// Without repeated nodes a path of length 2 back is one edge
			// twice, which walk cannot close because the check is used.
			if count := cyclesByPaths(g, length); slices.Max(count) > 0 {
				girth, want = length, count
				break
			}
		}
		if girth == 0 {
			forests++
		}
		total := int64(0)
		for _, k := range want {
			total += k
		}
		if have.Girth != girth || !slices.Equal(have.PerVariable, want) || girth > 0 && have.Total != total/int64(girth/2) {
			t.Errorf("%v: girth %d, cycles %v (%d); want %d, %v", edges, have.Girth, have.PerVariable, have.Total, girth, want)
		}
	}
	if forests == 0 || forests == 200 {
		t.Errorf("%d of 200 graphs without cycles: the sweep should have both kinds", forests)
	}
}

// The incidence graph of points and lines of the projective plane of order 2
// (Fano plane) has girth 6 and 28 triangles, 12 through each point.
func TestShortestCyclesOfProjectivePlane(t *testing.T) {
	var edges []Edge
	for c := range int32(7) {
		for _, offset := range []int32{0, 1, 3} { // a perfect difference set modulo 7
			edges = append(edges, Edge{(c + offset) % 7, c})
		}
	}
	g, err := NewGraph(7, 7, edges)
	if err != nil {
		t.Fatal(err)
	}
	cycles, _ := g.ShortestCycles(context.Background())
	if cycles.Girth != 6 || cycles.Total != 28 || cycles.PerVariable[0] != 12 {
		t.Errorf("girth %d, %d cycles, %d through a point; want 6, 28, 12", cycles.Girth, cycles.Total, cycles.PerVariable[0])
	}
}

// A long ring with long branches: the girth is the whole ring, and the
// branches must cost no time.
func TestShortestCyclesOfRing(t *testing.T) {
	const n = 500
	var edges []Edge
	for k := range int32(n) {
		edges = append(edges, Edge{k, k}, Edge{k, (k + 1) % n})         // the ring
		edges = append(edges, Edge{n + k, k}, Edge{n + k, n + (k+1)%n}) // branches
	}
	g, err := NewGraph(2*n, 2*n, edges)
	if err != nil {
		t.Fatal(err)
	}
	cycles, _ := g.ShortestCycles(context.Background())
	if cycles.Girth != 2*n || cycles.Total != 1 || cycles.PerVariable[0] != 1 || cycles.PerVariable[n] != 0 {
		t.Errorf("girth %d, %d cycles; want %d, 1", cycles.Girth, cycles.Total, 2*n)
	}
	if c := g.core(); c.Edges() != 2*n {
		t.Errorf("the core has %d edges, want %d", c.Edges(), 2*n)
	}
}

func BenchmarkShortestCycles64800(b *testing.B) {
	g, err := Build(context.Background(), regular(3, 6, 64800), Settings{Method: Randomized})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if _, err := g.ShortestCycles(context.Background()); err != nil {
			b.Fatal(err)
		}
	}
}

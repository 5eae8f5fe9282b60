package tanner

import (
	"context"
	"fmt"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"tannery/ensembles"
)

// regular returns the node counts of a (dv,dc)-regular code.
func regular(dv, dc, length int) ensembles.Realization {
	return ensembles.Realization{
		Length: length, Checks: length * dv / dc, Edges: length * dv,
		VariableNodes: ensembles.Counts{{Degree: dv, Nodes: length}},
		CheckNodes:    ensembles.Counts{{Degree: dc, Nodes: length * dv / dc}},
	}
}

// satellite returns the half-rate node counts of ETSI EN 302 307, Annex B
// (recalled; the edge counts balance exactly), for a length that is a
// multiple of 10; the standard has 64800.
func satellite(length int) ensembles.Realization {
	m := length / 2
	return ensembles.Realization{
		Length: length, Checks: m, Edges: 7*m - 1,
		VariableNodes: ensembles.Counts{{Degree: 1, Nodes: 1}, {Degree: 2, Nodes: m - 1}, {Degree: 3, Nodes: 3 * length / 10}, {Degree: 8, Nodes: length / 5}},
		CheckNodes:    ensembles.Counts{{Degree: 6, Nodes: 1}, {Degree: 7, Nodes: m - 1}},
	}
}

// arbitrary draws node counts of a small graph, dense ones among them, that
// a graph without repeated edges exists for: those of a random such graph.
func arbitrary(random *rand.Rand) ensembles.Realization {
	for {
		n := 2 + random.IntN(60)
		m := 1 + random.IntN(n)
		density := random.Float64()
		var edges []Edge
		for v := range n {
			for c := range m {
				if random.Float64() < density {
					edges = append(edges, Edge{int32(v), int32(c)})
				}
			}
		}
		g, err := NewGraph(n, m, edges)
		if err != nil {
			panic(err)
		}
		if r, err := g.Realization(); err == nil {
			return r
		}
	}
}

// repeatedEdges counts them from the rows alone.
func repeatedEdges(g *Graph) int {
	n := 0
	for c := range g.Checks() {
		row := slices.Clone(g.VariablesOf(c))
		slices.Sort(row)
		n += len(row) - len(slices.Compact(row))
	}
	return n
}

func TestBuildKeepsCountsOfArbitraryGraphs(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 1))
	for i := range 300 {
		r := arbitrary(random)
		for _, method := range []Method{Growth, Randomized} {
			g, err := Build(context.Background(), r, Settings{Method: method, Seed: uint64(i)})
			if err != nil {
				t.Fatalf("%v %+v: %v", method, r, err)
			}
			if err := g.Verify(r); err != nil {
				t.Errorf("%v %+v: %v", method, r, err)
			}
			if n := repeatedEdges(g); n > 0 {
				t.Errorf("%v %+v: %d repeated edges", method, r, n)
			}
		}
	}
}

// Sparse profiles of moderate length leave ample room for a girth of 6: the
// expected number of cycles of length 4 is a constant, whatever the length.
func TestBuildAvoidsShortCycles(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 2))
	for i := range 6 {
		var lambda []ensembles.Term
		for _, degree := range []int{2, 3, 4 + random.IntN(4), 9 + random.IntN(3)} {
			lambda = append(lambda, ensembles.Term{Degree: degree, Fraction: 0.1 + random.Float64()})
		}
		e, err := ensembles.New(ensembles.Normalize(lambda), ensembles.Concentrated(6+2*random.Float64()))
		if err != nil {
			t.Fatal(err)
		}
		r, err := ensembles.Realize(e, 2000+random.IntN(2000), nil)
		if err != nil {
			t.Fatal(err)
		}
		for _, method := range []Method{Growth, Randomized} {
			g, err := Build(context.Background(), r, Settings{Method: method, Seed: uint64(i)})
			if err != nil {
				t.Fatal(err)
			}
			if err := g.Verify(r); err != nil {
				t.Error(err)
			}
			cycles, err := g.ShortestCycles(context.Background())
			if err != nil || cycles.Girth < 6 {
				t.Errorf("%v, %v: girth %d (%d cycles), %v; want at least 6", method, e, cycles.Girth, cycles.Total, err)
			}
		}
	}
}

// Progressive edge growth reaches a girth of 8 for the (3,6)-regular graph of
// length 1008 (Hu, Eleftheriou & Arnold, IEEE Trans. Inf. Theory 51(1), 2005,
// recalled).
func TestGrowthReachesPublishedGirth(t *testing.T) {
	g, err := Build(context.Background(), regular(3, 6, 1008), Settings{Method: Growth, Seed: 1, Girth: 8})
	if err != nil {
		t.Fatal(err)
	}
	if cycles, _ := g.ShortestCycles(context.Background()); cycles.Girth < 8 {
		t.Errorf("girth %d, want at least 8", cycles.Girth)
	}
}

func TestChainIsDualDiagonal(t *testing.T) {
	for _, method := range []Method{Growth, Randomized} {
		r := satellite(600)
		g, err := Build(context.Background(), r, Settings{Method: method, Seed: 3, DegreeTwo: Chain})
		if err != nil {
			t.Fatal(err)
		}
		if err := g.Verify(r); err != nil {
			t.Error(err)
		}
		first := g.Variables() - g.Checks()
		for k := range g.Checks() - 1 {
			if row := g.ChecksOf(first + k); !slices.Equal(row, []int32{int32(k), int32(k + 1)}) {
				t.Fatalf("%v: link %d joins %v", method, k, row)
			}
		}
		if row := g.ChecksOf(g.Variables() - 1); !slices.Equal(row, []int32{int32(g.Checks() - 1)}) {
			t.Errorf("%v: the end of the chain joins %v", method, row)
		}
		if n := len(g.VariablesOf(0)); n != 6 {
			t.Errorf("%v: the first row has %d entries, want the smaller degree 6", method, n)
		}
		// A chain with one end is a triangle: nothing is left over.
		if gap := g.Triangulate().Gap(); gap != 0 {
			t.Errorf("%v: gap %d, want 0", method, gap)
		}
	}
}

func TestBuildRefuses(t *testing.T) {
	cycle := ensembles.Realization{
		Length: 6, Checks: 4, Edges: 12,
		VariableNodes: ensembles.Counts{{Degree: 2, Nodes: 6}}, CheckNodes: ensembles.Counts{{Degree: 3, Nodes: 4}},
	}
	// The check node of degree 4 needs all four others, and a chain leaves no
	// three rows with room for the variable node of degree 3.
	full := ensembles.Realization{
		Length: 4, Checks: 3, Edges: 8,
		VariableNodes: ensembles.Counts{{Degree: 1, Nodes: 1}, {Degree: 2, Nodes: 2}, {Degree: 3, Nodes: 1}},
		CheckNodes:    ensembles.Counts{{Degree: 2, Nodes: 2}, {Degree: 4, Nodes: 1}},
	}
	if _, err := Build(context.Background(), full, Settings{}); err != nil {
		t.Errorf("without chain: %v", err)
	}
	unbalanced := regular(3, 6, 100)
	unbalanced.Edges++
	short := regular(3, 6, 4)
	for _, test := range []struct {
		r    ensembles.Realization
		s    Settings
		want string
	}{
		{cycle, Settings{DegreeTwo: Chain}, "chain: 6 variable nodes of degree 2: must be at most 3"},
		{full, Settings{DegreeTwo: Chain}, "beside the chain cannot be joined"},
		{full, Settings{DegreeTwo: Chain, Method: Randomized}, "beside the chain cannot be joined"},
		{unbalanced, Settings{}, "edges"},
		{short, Settings{}, "joining two nodes twice"},
		{regular(3, 6, 100), Settings{Girth: 7}, "girth 7: must be an even number from 4 to 12"},
		{regular(3, 6, 100), Settings{Method: "fast"}, `construction "fast": must be "growth" or "randomized"`},
	} {
		_, err := Build(context.Background(), test.r, test.s)
		if err == nil || !strings.Contains(err.Error(), test.want) {
			t.Errorf("%+v, %+v: error %v, want %q", test.r, test.s, err, test.want)
		}
	}
}

func TestBuildIsDeterministic(t *testing.T) {
	for _, method := range []Method{Growth, Randomized} {
		a, _ := Build(context.Background(), satellite(1000), Settings{Method: method, Seed: 9})
		b, _ := Build(context.Background(), satellite(1000), Settings{Method: method, Seed: 9})
		c, _ := Build(context.Background(), satellite(1000), Settings{Method: method, Seed: 10})
		if !slices.Equal(a.checkVar, b.checkVar) {
			t.Errorf("%v: the same seed gives different graphs", method)
		}
		if slices.Equal(a.checkVar, c.checkVar) {
			t.Errorf("%v: different seeds give the same graph", method)
		}
	}
}

func TestBuildEndsWithContext(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	for _, method := range []Method{Growth, Randomized} {
		if _, err := Build(ctx, regular(3, 6, 6000), Settings{Method: method}); err != context.Canceled {
			t.Errorf("%v: error %v, want %v", method, err, context.Canceled)
		}
	}
}

func ExampleBuild() {
	g, err := Build(context.Background(), regular(3, 6, 96), Settings{Seed: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(g.Variables(), "bits,", g.Checks(), "checks,", g.Edges(), "edges")
	// Output: 96 bits, 48 checks, 288 edges
}

func benchmarkBuild(b *testing.B, r ensembles.Realization, s Settings) {
	for b.Loop() {
		if _, err := Build(context.Background(), r, s); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkGrowth10000(b *testing.B) {
	benchmarkBuild(b, satellite(10000), Settings{Method: Growth, DegreeTwo: Chain})
}

func BenchmarkGrowth64800(b *testing.B) {
	benchmarkBuild(b, satellite(64800), Settings{Method: Growth, DegreeTwo: Chain})
}

func BenchmarkRandomized1000000(b *testing.B) {
	b.ReportAllocs()
	benchmarkBuild(b, satellite(1_000_000), Settings{Method: Randomized, DegreeTwo: Chain})
}

// Variable nodes of degree 2 form no cycle among themselves: with the check
// nodes as nodes and them as edges, the graph is a forest.
func TestDegreeTwoFormsForest(t *testing.T) {
	for _, length := range []int{200, 600, 2000, 20000} {
		for _, method := range []Method{Growth, Randomized} {
			for _, way := range []DegreeTwo{Forest, Chain} {
				g, err := Build(context.Background(), satellite(length), Settings{Method: method, Seed: 3, DegreeTwo: way})
				if err != nil {
					t.Fatal(err)
				}
				if n := g.DegreeTwoCycles(); n > 0 {
					t.Errorf("length %d, %s, %s: %d columns of degree 2 close a cycle", length, method, way, n)
				}
			}
		}
	}
}

// The independent cycles of a graph are its edges less its nodes plus its
// components. Of a ring with a chord the columns of degree 2 make two cycles;
// a column of degree 3 and one of degree 1 make none.
func TestDegreeTwoCycles(t *testing.T) {
	edges := []Edge{{5, 0}, {5, 1}, {5, 2}, {6, 3}}
	for v := range int32(4) {
		edges = append(edges, Edge{v, v}, Edge{v, (v + 1) % 4})
	}
	edges = append(edges, Edge{4, 0}, Edge{4, 2})
	g, err := NewGraph(7, 4, edges)
	if err != nil {
		t.Fatal(err)
	}
	if n := g.DegreeTwoCycles(); n != 2 {
		t.Errorf("%d columns of degree 2 close a cycle, want 2", n)
	}
}

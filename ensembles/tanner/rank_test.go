package tanner

import (
	"context"
	"math/bits"
	"math/rand/v2"
	"runtime"
	"slices"
	"testing"
)

// rankByElimination is Gaussian elimination on whole columns, the oracle.
func rankByElimination(g *Graph) int {
	columns := make([][]bool, g.Variables())
	for v := range columns {
		columns[v] = make([]bool, g.Checks())
		for _, c := range g.ChecksOf(v) {
			columns[v][c] = true
		}
	}
	rank := 0
	for c := range g.Checks() {
		for v := rank; v < len(columns); v++ {
			if !columns[v][c] {
				continue
			}
			columns[rank], columns[v] = columns[v], columns[rank]
			for u := rank + 1; u < len(columns); u++ {
				if columns[u][c] {
					for d := range columns[u] {
						columns[u][d] = columns[u][d] != columns[rank][d]
					}
				}
			}
			rank++
			break
		}
	}
	return rank
}

func rankOf(t *testing.T, g *Graph) int {
	t.Helper()
	rank, err := g.Triangulate().Rank(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return rank
}

func TestRankAgainstElimination(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 4))
	deficient := 0
	for i := range 300 {
		n, m := 1+random.IntN(150), 1+random.IntN(150)
		density := random.Float64()
		if i%2 == 0 {
			density = 3 * random.Float64() / float64(m)
		}
		var edges []Edge
		for v := range n {
			// Some columns repeat, so that constraints depend on each other.
			source := v
			if i%3 == 0 {
				source = v % (1 + n/5)
			}
			column := rand.New(rand.NewPCG(uint64(i), uint64(source)))
			for c := range m {
				if column.Float64() < density {
					edges = append(edges, Edge{int32(v), int32(c)})
				}
			}
		}
		g, err := NewGraph(n, m, edges)
		if err != nil {
			t.Fatal(err)
		}
		want := rankByElimination(g)
		if have := rankOf(t, g); have != want {
			t.Errorf("%d × %d, density %.3f: rank %d, want %d", m, n, density, have, want)
		}
		if want < min(n, m) {
			deficient++
		}
	}
	if deficient == 0 {
		t.Error("no matrix of deficient rank in the sweep")
	}
}

// The incidence matrix of points and lines of the projective plane of order
// 2^s has rank 3^s+1 over GF(2) (Graham & MacWilliams, Bell Syst. Tech. J.
// 45, 1966; as codes of lengths 21, 73, 273: Kou, Lin & Fossorier, IEEE Trans.
// Inf. Theory 47(7), 2001; recalled). The perfect difference sets are checked
// here.
func TestRankOfProjectivePlanes(t *testing.T) {
	for _, plane := range []struct {
		set  []int
		rank int
	}{
		{[]int{0, 1, 3}, 4},
		{[]int{0, 1, 4, 14, 16}, 10},
		{[]int{0, 1, 3, 7, 15, 31, 36, 54, 63}, 28},
	} {
		q := len(plane.set) - 1
		n := q*q + q + 1
		differences := map[int]bool{}
		var edges []Edge
		for _, a := range plane.set {
			for _, b := range plane.set {
				differences[(a-b+n)%n] = true
			}
			for c := range n {
				edges = append(edges, Edge{int32((a + c) % n), int32(c)})
			}
		}
		if len(differences) != n {
			t.Fatalf("%v is no difference set modulo %d", plane.set, n)
		}
		g, err := NewGraph(n, n, edges)
		if err != nil {
			t.Fatal(err)
		}
		if rank := rankOf(t, g); rank != plane.rank {
			t.Errorf("order %d: rank %d, want %d", q, rank, plane.rank)
		}
	}
}

// With even variable degrees the rows sum to zero, so the rank is at most one
// less than the number of rows, and almost surely just that (Miller & Cohen,
// The rate of regular LDPC codes, IEEE Trans. Inf. Theory 49(11), 2003,
// recalled).
func TestRankOfRegularGraphs(t *testing.T) {
	for _, test := range []struct{ dv, dc, deficiency int }{{4, 8, 1}, {3, 6, 0}, {6, 9, 1}} {
		g, err := Build(context.Background(), regular(test.dv, test.dc, 3600), Settings{Method: Randomized, Seed: 2})
		if err != nil {
			t.Fatal(err)
		}
		if have := g.Checks() - rankOf(t, g); have != test.deficiency {
			t.Errorf("(%d,%d): %d rows more than the rank, want %d", test.dv, test.dc, have, test.deficiency)
		}
	}
}

func TestTriangulationIsTriangular(t *testing.T) {
	g, err := Build(context.Background(), regular(3, 6, 2000), Settings{Method: Randomized, Seed: 4})
	if err != nil {
		t.Fatal(err)
	}
	tri := g.Triangulate()
	place := make([]int, g.Checks())
	for i, c := range tri.Rows {
		place[c] = i + 1
	}
	for _, c := range tri.GapRows {
		if place[c] != 0 {
			t.Fatalf("row %d is both in the triangle and in the gap", c)
		}
	}
	if len(tri.Rows)+tri.Gap() != g.Checks() {
		t.Errorf("%d rows and a gap of %d, want %d in all", len(tri.Rows), tri.Gap(), g.Checks())
	}
	for i, v := range tri.Columns {
		diagonal := false
		for _, c := range g.ChecksOf(int(v)) {
			if place[c] > i+1 {
				t.Fatalf("column %d on place %d has an entry in the later row %d", v, i, c)
			}
			diagonal = diagonal || place[c] == i+1
		}
		if !diagonal {
			t.Fatalf("column %d has no entry on the diagonal", v)
		}
	}
	// Richardson & Urbanke (2001) find a gap of 0.017 n for (3,6) with their
	// greedy rules (recalled).
	if tri.Gap() > 34 {
		t.Errorf("gap %d of length 2000, want at most 34", tri.Gap())
	}
}

func BenchmarkRank64800(b *testing.B) {
	g, err := Build(context.Background(), regular(3, 6, 64800), Settings{Method: Randomized})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if _, err := g.Triangulate().Rank(context.Background()); err != nil {
			b.Fatal(err)
		}
	}
}

// Matrices wider and higher than lanes and stripes, of full and of deficient
// rank, against plain elimination.
func TestReduceAgainstElimination(t *testing.T) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(3))
	random := rand.New(rand.NewPCG(5, 8))
	for _, size := range [][3]int{{1, 1, 1}, {64, 64, 64}, {70, 1100, 60}, {1100, 70, 60}, {300, 1030, 129}, {1500, 1500, 1500}} {
		rows, columns, most := size[0], size[1], size[2]
		// The product with a matrix of rank at most most.
		m := newBitMatrix(rows, columns)
		basis := make([][]uint64, most)
		words := (columns + 63) / 64
		for k := range basis {
			basis[k] = make([]uint64, words)
			for w := range basis[k] {
				basis[k][w] = random.Uint64() & random.Uint64()
			}
			basis[k][words-1] &= 1<<((columns-1)%64)<<1 - 1
		}
		plain := make([][]uint64, rows)
		for i := range plain {
			plain[i] = make([]uint64, words)
			for k := range basis {
				if random.Uint64()&1 != 0 {
					for w, x := range basis[k] {
						plain[i][w] ^= x
					}
				}
			}
			for w, x := range plain[i] {
				*m.word(i, w) = x
			}
		}
		if err := m.reduce(context.Background()); err != nil {
			t.Fatal(err)
		}
		// Gauß and Jordan: the reduced echelon form is unique but for the order
		// of its rows.
		rank := 0
		for column := range columns {
			bit := uint64(1) << (column % 64)
			for i := rank; i < rows; i++ {
				if plain[i][column/64]&bit == 0 {
					continue
				}
				plain[i], plain[rank] = plain[rank], plain[i]
				for j := range plain {
					if j != rank && plain[j][column/64]&bit != 0 {
						for w, x := range plain[rank] {
							plain[j][w] ^= x
						}
					}
				}
				rank++
				break
			}
		}
		if m.rows != rank || len(m.pivots) != rank {
			t.Errorf("%v: rank %d, want %d", size, m.rows, rank)
			continue
		}
		places := make([]int, rank)
		for i := range places {
			places[i] = i
		}
		slices.SortFunc(places, func(i, j int) int { return m.pivots[i] - m.pivots[j] })
		for k, i := range places {
			for w, want := range plain[k] {
				if have := *m.word(i, w); have != want {
					t.Fatalf("%v: row %d, word %d: %x, want %x", size, k, w, have, want)
				}
			}
		}
		// Every row is orthogonal to every vector of the kernel.
		kernel := m.kernel()
		if kernel.rows != columns-rank {
			t.Errorf("%v: kernel of %d, want %d", size, kernel.rows, columns-rank)
		}
		for k := range kernel.rows {
			for i := range m.rows {
				ones := 0
				for w := range words {
					ones += bits.OnesCount64(*kernel.word(k, w) & *m.word(i, w))
				}
				if ones%2 != 0 {
					t.Fatalf("%v: row %d is not orthogonal to vector %d of the kernel", size, i, k)
				}
			}
		}
	}
}

// A dense matrix as large as the gap of a regular (3,6) code of a million bits.
func BenchmarkReduce12000(b *testing.B) {
	random := rand.New(rand.NewPCG(5, 9))
	full := newBitMatrix(12000, 12000)
	for i := range full.rows {
		for w := range full.columns / 64 {
			*full.word(i, w) = random.Uint64()
		}
	}
	for b.Loop() {
		b.StopTimer()
		m := newBitMatrix(0, full.columns)
		m.append(full)
		b.StartTimer()
		if err := m.reduce(context.Background()); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkRank1000000(b *testing.B) {
	g, err := Build(context.Background(), regular(3, 6, 1_000_000), Settings{Method: Randomized, Girth: 4})
	if err != nil {
		b.Fatal(err)
	}
	triangle := g.Triangulate()
	for b.Loop() {
		if _, err := triangle.Rank(context.Background()); err != nil {
			b.Fatal(err)
		}
	}
}

package tanner

import (
	"context"
	"math/rand/v2"
	"runtime"
	"sync"
	"sync/atomic"
	"unsafe"
)

const (
	// rankSpare is how many more constraints than unknowns are taken at
	// first: random ones all hold a dependency by chance with probability
	// 2^-rankSpare, and then another round finds it out.
	rankSpare = 64
	// rankMemory bounds, in bytes, what the unknowns of all rows take that are
	// carried through the triangle at a time: a lane of them by each processor.
	rankMemory = 1 << 28
)

// Rank returns the rank of the parity-check matrix over GF(2), exactly. It
// seeks the dependencies among the rows: vectors y with yᵀH = 0, of which
// there are 2^(rows-rank). Along the diagonal of the triangulation each
// column says that the y of its row is the sum of those of earlier rows and
// of gap rows, so all y are linear in the y of the gap rows; every column
// that is not on the diagonal then is a constraint on these alone. As many
// constraints as there are gap rows, and a few more, are solved by dense
// elimination. The solutions are carried through the triangle and tested on
// all columns; where one fails, the column becomes a constraint, and the
// elimination goes on until all pass. The time is that of dense elimination
// of a square matrix of the size of the gap. It returns ctx.Err() when ctx
// ends.
func (t *Triangulation) Rank(ctx context.Context) (int, error) {
	gap := t.Gap()
	rest := t.offDiagonal()
	order := t.order()
	random := rand.New(rand.NewPCG(uint64(gap), uint64(len(rest))))
	random.Shuffle(len(rest), func(i, j int) { rest[i], rest[j] = rest[j], rest[i] })
	taken := rest[:min(len(rest), gap+rankSpare)]
	system := newBitMatrix(0, gap)
	for {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		constraints, err := order.constraints(ctx, taken)
		if err != nil {
			return 0, err
		}
		system.append(constraints)
		if err := system.reduce(ctx); err != nil {
			return 0, err
		}
		dependencies := system.kernel()
		if taken = order.violated(dependencies, rest); len(taken) == 0 {
			return t.g.Checks() - dependencies.rows, nil
		}
	}
}

// RankWork returns about how many additions of 64-bit words Rank takes: those
// of the unknowns carried along every edge, and those of the elimination, where
// the eight entries of tables that are added at once count as three. Two
// processors have done about 1e9 in a second, for gaps from 8,000 to 30,000.
func (t *Triangulation) RankWork() float64 {
	gap := float64(t.Gap())
	words := gap / 64
	return words*float64(t.g.Edges()) + 3*gap*words*words/2
}

// offDiagonal lists the columns that are not on the diagonal.
func (t *Triangulation) offDiagonal() []int32 {
	on := make([]bool, t.g.Variables())
	for _, v := range t.Columns {
		on[v] = true
	}
	var rest []int32
	for v := range on {
		if !on[v] {
			rest = append(rest, int32(v))
		}
	}
	return rest
}

// order is a triangulation with the rows numbered along the diagonal and those
// of the gap behind, so that what is near in time is near in memory.
type order struct {
	g        *Graph
	place    []int32 // of each row
	diagonal int
	gap      int
	start    []int32 // of each place on the diagonal in earlier
	earlier  []int32 // places of the other rows that its column meets
}

func (t *Triangulation) order() *order {
	o := &order{g: t.g, place: make([]int32, t.g.Checks()), diagonal: len(t.Rows), gap: t.Gap(), start: []int32{0}}
	for i, c := range t.Rows {
		o.place[c] = int32(i)
	}
	for k, c := range t.GapRows {
		o.place[c] = int32(o.diagonal + k)
	}
	for i, v := range t.Columns {
		for _, c := range t.g.ChecksOf(int(v)) {
			if c != t.Rows[i] {
				o.earlier = append(o.earlier, o.place[c])
			}
		}
		o.start = append(o.start, int32(len(o.earlier)))
	}
	return o
}

// constraints returns, one row per column of H, the constraints on the gap
// rows. The unknowns are carried through the triangle lane by lane. It returns
// ctx.Err() when ctx ends.
func (o *order) constraints(ctx context.Context, columns []int32) (*bitMatrix, error) {
	m := newBitMatrix(len(columns), o.gap)
	var next atomic.Int64
	var workers sync.WaitGroup
	most := max(1, rankMemory/(int(unsafe.Sizeof(lane{}))*max(1, len(o.place))))
	for range min(runtime.GOMAXPROCS(0), len(m.panels), most) {
		workers.Go(func() {
			y := make([]lane, len(o.place)) // of each row, by place
			for p := int(next.Add(1)) - 1; p < len(m.panels) && ctx.Err() == nil; p = int(next.Add(1)) - 1 {
				clear(y[o.diagonal:])
				for k := p * 64 * laneWords; k < min(o.gap, (p+1)*64*laneWords); k++ {
					y[o.diagonal+k][k/64%laneWords] = 1 << (k % 64)
				}
				for i := range o.diagonal {
					sum := &y[i]
					*sum = lane{}
					for _, place := range o.earlier[o.start[i]:o.start[i+1]] {
						sum.add(&y[place])
					}
				}
				for i, v := range columns {
					for _, c := range o.g.ChecksOf(int(v)) {
						m.panels[p][i].add(&y[o.place[c]])
					}
				}
			}
		})
	}
	workers.Wait()
	return m, ctx.Err()
}

// violated returns columns that a dependency fails on, at most about as many
// as there are dependencies, at least one unless all pass.
func (o *order) violated(dependencies *bitMatrix, rest []int32) []int32 {
	var columns []int32
	y := make([]uint64, len(o.place))
	for first := 0; first < dependencies.rows; first += 64 {
		count := min(64, dependencies.rows-first)
		clear(y[o.diagonal:])
		for k := range count {
			for j := range o.gap {
				y[o.diagonal+j] |= *dependencies.word(first+k, j/64) >> (j % 64) & 1 << k
			}
		}
		for i := range o.diagonal {
			var sum uint64
			for _, place := range o.earlier[o.start[i]:o.start[i+1]] {
				sum ^= y[place]
			}
			y[i] = sum
		}
		found := 0
		for _, v := range rest {
			var sum uint64
			for _, c := range o.g.ChecksOf(int(v)) {
				sum ^= y[o.place[c]]
			}
			if sum != 0 {
				columns = append(columns, v)
				if found++; found == count {
					break
				}
			}
		}
	}
	return columns
}

package tanner

import (
	"context"
	"math/rand/v2"
)

// Sizes in the computation of the rank.
const (
	// rankSpare is how many more constraints than unknowns are taken at
	// first: random ones all hold a dependency by chance with probability
	// 2^-rankSpare, and then another round finds it out.
	rankSpare = 64
	// rankWords is the number of 64-bit words of unknowns carried through
	// the triangle at a time: 128 bytes per row, so that a million rows take
	// 128 MB.
	rankWords = 16
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
	random := rand.New(rand.NewPCG(uint64(gap), uint64(len(rest))))
	random.Shuffle(len(rest), func(i, j int) { rest[i], rest[j] = rest[j], rest[i] })
	taken := rest[:min(len(rest), gap+rankSpare)]
	system := newBitMatrix(0, gap)
	for {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		system.append(t.constraints(taken))
		if err := system.reduce(ctx); err != nil {
			return 0, err
		}
		dependencies := system.kernel()
		if taken = t.violated(dependencies, rest); len(taken) == 0 {
			return t.g.Checks() - dependencies.rows, nil
		}
	}
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

// carry completes values of the gap rows, words per row in y, to all rows.
func (t *Triangulation) carry(y []uint64, words int) {
	for i, c := range t.Rows {
		sum := y[int(c)*words : (int(c)+1)*words]
		clear(sum)
		for _, d := range t.g.ChecksOf(int(t.Columns[i])) {
			if d != c {
				for w, x := range y[int(d)*words : (int(d)+1)*words] {
					sum[w] ^= x
				}
			}
		}
	}
}

// constraints returns, one row per column of H, the constraints on the gap
// rows. The unknowns are carried through the triangle block by block.
func (t *Triangulation) constraints(columns []int32) *bitMatrix {
	m := newBitMatrix(len(columns), t.Gap())
	y := make([]uint64, t.g.Checks()*min(rankWords, m.words))
	for first := 0; first < m.words; first += rankWords {
		words := min(rankWords, m.words-first)
		clear(y)
		for k := first * 64; k < min(t.Gap(), (first+words)*64); k++ {
			y[int(t.GapRows[k])*words+k/64-first] |= 1 << (k % 64)
		}
		t.carry(y[:t.g.Checks()*words], words)
		for i, v := range columns {
			sum := m.row(i)[first : first+words]
			for _, c := range t.g.ChecksOf(int(v)) {
				for w, x := range y[int(c)*words : (int(c)+1)*words] {
					sum[w] ^= x
				}
			}
		}
	}
	return m
}

// violated returns columns that a dependency fails on, at most about as many
// as there are dependencies, at least one unless all pass.
func (t *Triangulation) violated(dependencies *bitMatrix, rest []int32) []int32 {
	var columns []int32
	y := make([]uint64, t.g.Checks())
	for first := 0; first < dependencies.rows; first += 64 {
		count := min(64, dependencies.rows-first)
		clear(y)
		for k := range count {
			row := dependencies.row(first + k)
			for j, c := range t.GapRows {
				y[c] |= row[j/64] >> (j % 64) & 1 << k
			}
		}
		t.carry(y, 1)
		found := 0
		for _, v := range rest {
			var sum uint64
			for _, c := range t.g.ChecksOf(int(v)) {
				sum ^= y[c]
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

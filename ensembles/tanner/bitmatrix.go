package tanner

import (
	"context"
	"math/bits"
)

// bitMatrix is a dense matrix over GF(2), 64 columns to a word.
type bitMatrix struct {
	rows, columns, words int
	bits                 []uint64
	pivots               []int // after reduce: the leading column of each row
}

func newBitMatrix(rows, columns int) *bitMatrix {
	words := (columns + 63) / 64
	return &bitMatrix{rows: rows, columns: columns, words: words, bits: make([]uint64, rows*words)}
}

func (m *bitMatrix) row(i int) []uint64 { return m.bits[i*m.words : (i+1)*m.words] }

// append adds the rows of a matrix of the same width.
func (m *bitMatrix) append(other *bitMatrix) {
	m.bits = append(m.bits, other.bits...)
	m.rows += other.rows
}

// stripe is the number of columns that reduce handles at a time: 2^stripe
// combinations of pivot rows are tabulated. Eight keep the strip of a row in
// one byte and the table, of 256 rows, small beside the matrix.
const stripe = 8

// reduce brings the matrix to reduced echelon form and drops rows of zeros,
// by the method of the four Russians (Arlazarov, Dinic, Kronrod & Faradžev,
// Soviet Math. Doklady 11(5), 1970; for elimination: Albrecht, Bard & Pernet,
// Efficient dense Gaussian elimination over the finite field with two
// elements, 2011). For a stripe of columns pivot rows are found and reduced
// among themselves; all sums of them are tabulated, each from the one before
// by one addition; and every other row is cleared in the stripe by adding one
// entry of the table.
func (m *bitMatrix) reduce(ctx context.Context) error {
	m.pivots = m.pivots[:0]
	table := make([]uint64, (1<<stripe)*m.words)
	for first := 0; first < m.columns; first += stripe {
		if err := ctx.Err(); err != nil {
			return err
		}
		top := len(m.pivots)
		strips := m.findPivots(first, top)
		found := len(m.pivots) - top
		if found == 0 {
			continue
		}
		m.isolate(strips, first, top)
		index := m.tabulate(table, first, top)
		word := first / 64
		for i := range m.rows {
			if i >= top && i < top+found {
				continue
			}
			row := m.row(i)
			if k := index[row[word]>>(first%64)&(1<<stripe-1)]; k != 0 {
				for w, x := range table[k*m.words+word : (k+1)*m.words] {
					row[word+w] ^= x
				}
			}
		}
	}
	m.rows = len(m.pivots)
	m.bits = m.bits[:m.rows*m.words]
	return nil
}

// findPivots moves rows that are independent within the stripe to the top
// rows and notes their leading columns. It looks only at the strips: each is
// reduced by the pivots found before, without touching the rows. It returns
// the reduced strips of the pivots.
func (m *bitMatrix) findPivots(first, top int) (strips []uint8) {
	for i := top; i < m.rows && len(strips) < stripe; i++ {
		strip := uint8(m.row(i)[first/64] >> (first % 64))
		for k, s := range strips {
			if strip>>(m.pivots[top+k]-first)&1 != 0 {
				strip ^= s
			}
		}
		if strip == 0 {
			continue
		}
		to := top + len(strips)
		a, b := m.row(i), m.row(to)
		for w := range a {
			a[w], b[w] = b[w], a[w]
		}
		strips = append(strips, strip)
		m.pivots = append(m.pivots, first+bits.TrailingZeros8(strip))
	}
	return strips
}

// isolate adds the pivot rows of a stripe to each other so that each leading
// column has a single one among them.
func (m *bitMatrix) isolate(strips []uint8, first, top int) {
	for pass := range 2 {
		// Downwards each row is cleared by those above it, as its strip has
		// been; then upwards those above are cleared by it.
		for i := range strips {
			for k := range strips {
				if pass == 0 && k < i || pass == 1 && k > i {
					a, b := m.row(top+i), m.row(top+k)
					if column := m.pivots[top+k]; a[column/64]>>(column%64)&1 != 0 {
						for w, x := range b {
							a[w] ^= x
						}
					}
				}
			}
		}
	}
}

// tabulate fills the table with all sums of the pivot rows of a stripe, the
// k-th with the bits of k as coefficients, and returns the index of the entry
// that clears each pattern of the stripe.
func (m *bitMatrix) tabulate(table []uint64, first, top int) (index [1 << stripe]int) {
	found := len(m.pivots) - top
	clear(table[:m.words])
	for k := 1; k < 1<<found; k++ {
		low := k & -k
		to, from, row := table[k*m.words:(k+1)*m.words], table[(k^low)*m.words:], m.row(top+bits.TrailingZeros(uint(low)))
		for w, x := range row {
			to[w] = from[w] ^ x
		}
	}
	for pattern := range index {
		for k, column := range m.pivots[top:] {
			index[pattern] |= pattern >> (column - first) & 1 << k
		}
	}
	return index
}

// kernel returns a basis of the vectors that all rows of a reduced matrix are
// orthogonal to: one for every column without a leading one.
func (m *bitMatrix) kernel() *bitMatrix {
	leading := make([]bool, m.columns)
	for _, column := range m.pivots {
		leading[column] = true
	}
	basis := newBitMatrix(m.columns-len(m.pivots), m.columns)
	k := 0
	for column := range m.columns {
		if leading[column] {
			continue
		}
		y := basis.row(k)
		k++
		y[column/64] |= 1 << (column % 64)
		for i, pivot := range m.pivots {
			y[pivot/64] |= m.row(i)[column/64] >> (column % 64) & 1 << (pivot % 64)
		}
	}
	return basis
}

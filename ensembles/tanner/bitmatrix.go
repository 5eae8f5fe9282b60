package tanner

import (
	"context"
	"math/bits"
	"runtime"
	"sync"
	"sync/atomic"
)

// laneWords is the number of 64-bit words in a lane.
const laneWords = 16

// lane is a stretch of a row, 1024 columns: long enough to pay for finding it,
// and short enough for thousands of them to stay in a processor's own cache.
type lane [laneWords]uint64

func (l *lane) add(x *lane) {
	for w := range l {
		l[w] ^= x[w]
	}
}

// bitMatrix is a dense matrix over GF(2), 64 columns to a word. It is kept in
// panels, each of which has one lane of every row, so that processors can work
// on different panels.
type bitMatrix struct {
	rows, columns int
	panels        [][]lane
	pivots        []int // after reduce: the leading column of each row
}

func newBitMatrix(rows, columns int) *bitMatrix {
	m := &bitMatrix{rows: rows, columns: columns, panels: make([][]lane, (columns+64*laneWords-1)/(64*laneWords))}
	for p := range m.panels {
		m.panels[p] = make([]lane, rows)
	}
	return m
}

// word returns a word of a row.
func (m *bitMatrix) word(row, word int) *uint64 {
	return &m.panels[word/laneWords][row][word%laneWords]
}

// append adds the rows of a matrix of the same width.
func (m *bitMatrix) append(other *bitMatrix) {
	for p := range m.panels {
		m.panels[p] = append(m.panels[p], other.panels[p]...)
	}
	m.rows += other.rows
}

// Sizes in reduce: a stripe is as many columns as a word has, and cut into
// cuts of as many as have a table of their own.
const (
	stripe = 64
	cut    = 8
)

// reduce brings the matrix to reduced echelon form and drops rows of zeros,
// by the method of the four Russians (Arlazarov, Dinic, Kronrod & Faradžev,
// Soviet Math. Doklady 11(5), 1970; for elimination, with several tables at
// once: Albrecht, Bard & Pernet, Efficient dense Gaussian elimination over the
// finite field with two elements, 2011). For a stripe of columns pivot rows
// are found and reduced among themselves; for each cut of it all sums of its
// pivot rows are tabulated; and every other row is cleared in the stripe by
// adding one entry of each table. Panels are independent but for the stripe
// itself, which says what to add.
func (m *bitMatrix) reduce(ctx context.Context) error {
	m.pivots = m.pivots[:0]
	tables := make([]sums, min(runtime.GOMAXPROCS(0), len(m.panels)))
	step := pivoting{patterns: make([]uint64, m.rows)}
	for first := 0; first < m.columns; first += stripe {
		if err := ctx.Err(); err != nil {
			return err
		}
		if !m.pivot(&step, first/64) {
			continue
		}
		var next atomic.Int64
		next.Store(int64(first / 64 / laneWords))
		var workers sync.WaitGroup
		for i := range tables {
			workers.Go(func() {
				for p := next.Add(1) - 1; int(p) < len(m.panels); p = next.Add(1) - 1 {
					tables[i].clear(m.panels[p], &step)
				}
			})
		}
		workers.Wait()
	}
	m.rows = len(m.pivots)
	for p := range m.panels {
		m.panels[p] = m.panels[p][:m.rows]
	}
	return nil
}

// pivoting is what is to be done to all panels for one stripe.
type pivoting struct {
	top       int        // first of the pivot rows
	additions []addition // that isolate the leading columns of the pivot rows
	rowAt     [stripe]int
	// The stripe of every row that has to be cleared, 0 of others.
	patterns []uint64
}

// addition says that one row is added to another, both counted from the top.
type addition struct{ to, from int }

// pivot moves rows that are independent within a stripe behind the pivot rows
// there are, notes their leading columns, and finds what is to be done. It
// looks at the stripe only: each row's is reduced by those of the pivots found
// before, without touching the rows. It returns false if there are none.
func (m *bitMatrix) pivot(s *pivoting, word int) bool {
	s.top, s.additions = len(m.pivots), s.additions[:0]
	for column := range s.rowAt {
		s.rowAt[column] = -1
	}
	var strips []uint64
	for i := s.top; i < m.rows && len(strips) < stripe; i++ {
		strip := *m.word(i, word)
		mark := len(s.additions)
		for k, x := range strips {
			if strip>>(m.pivots[s.top+k]%64)&1 != 0 {
				strip ^= x
				s.additions = append(s.additions, addition{len(strips), k})
			}
		}
		if strip == 0 {
			s.additions = s.additions[:mark]
			continue
		}
		for _, panel := range m.panels[word/laneWords:] {
			a, b := &panel[i], &panel[s.top+len(strips)]
			*a, *b = *b, *a
		}
		column := bits.TrailingZeros64(strip)
		s.rowAt[column] = s.top + len(strips)
		m.pivots = append(m.pivots, 64*word+column)
		strips = append(strips, strip)
	}
	// Each has been cleared in the leading columns of those above it; those
	// above are cleared in its own.
	for k := len(strips) - 1; k > 0; k-- {
		for i := range k {
			if strips[i]>>(m.pivots[s.top+k]%64)&1 != 0 {
				strips[i] ^= strips[k]
				s.additions = append(s.additions, addition{i, k})
			}
		}
	}
	for i := range m.rows {
		s.patterns[i] = *m.word(i, word)
	}
	clear(s.patterns[s.top : s.top+len(strips)])
	return len(strips) > 0
}

// sums are the tables for one panel: for each cut of the stripe and each
// pattern of it, the sum of the pivot rows that clear it.
type sums [stripe / cut][1 << cut]lane

// clear does to a panel what is to be done for a stripe.
func (t *sums) clear(panel []lane, s *pivoting) {
	for _, a := range s.additions {
		panel[s.top+a.to].add(&panel[s.top+a.from])
	}
	for c := range t {
		for pattern := 1; pattern < 1<<cut; pattern++ {
			low := bits.TrailingZeros(uint(pattern))
			t[c][pattern] = t[c][pattern&(pattern-1)]
			if row := s.rowAt[c*cut+low]; row >= 0 {
				t[c][pattern].add(&panel[row])
			}
		}
	}
	for i, pattern := range s.patterns[:len(panel)] {
		if pattern == 0 {
			continue
		}
		a, b, c, d := &t[0][uint8(pattern)], &t[1][uint8(pattern>>8)], &t[2][uint8(pattern>>16)], &t[3][uint8(pattern>>24)]
		e, f, g, h := &t[4][uint8(pattern>>32)], &t[5][uint8(pattern>>40)], &t[6][uint8(pattern>>48)], &t[7][uint8(pattern>>56)]
		row := &panel[i]
		for w := range row {
			row[w] ^= a[w] ^ b[w] ^ c[w] ^ d[w] ^ e[w] ^ f[w] ^ g[w] ^ h[w]
		}
	}
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
		*basis.word(k, column/64) |= 1 << (column % 64)
		for i, pivot := range m.pivots {
			*basis.word(k, pivot/64) |= *m.word(i, column/64) >> (column % 64) & 1 << (pivot % 64)
		}
		k++
	}
	return basis
}

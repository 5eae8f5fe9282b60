package tanner

// Triangulation is the approximate lower triangular form of a parity-check
// matrix, by which a code is encoded in a time of O(n + gap²) after
// preparation (Richardson & Urbanke, Efficient encoding of low-density
// parity-check codes, IEEE Trans. Inf. Theory 47(2), 2001). Rows[i] and
// Columns[i] form the diagonal: column Columns[i] has no entries in later
// Rows, but may have entries in GapRows. All entries of a column that is not
// on the diagonal are free: they belong to information bits, or to the
// parity bits that the gap rows determine.
type Triangulation struct {
	Rows, Columns []int32
	GapRows       []int32
	g             *Graph
}

// Gap returns the number of rows outside the triangle. A gap that grows like
// the square root of the length or less makes encoding linear.
func (t *Triangulation) Gap() int { return len(t.GapRows) }

// Triangulate finds the form greedily, in linear time. As long as some column
// has a single entry in the rows that are left, the two go to the diagonal
// and the row is left no more. When there is none, a row goes to the gap: one
// that has most columns with exactly two entries left, because each of these
// can go to the diagonal next.
func (g *Graph) Triangulate() *Triangulation {
	t := &Triangulation{g: g}
	e := newElimination(g)
	for {
		for len(e.single) > 0 {
			v := e.single[len(e.single)-1]
			e.single = e.single[:len(e.single)-1]
			if e.left[v] != 1 {
				continue // its row has gone with another column
			}
			for _, c := range g.ChecksOf(int(v)) {
				if e.pairs[c] >= 0 {
					t.Rows, t.Columns = append(t.Rows, c), append(t.Columns, v)
					e.remove(c)
					break
				}
			}
		}
		c := e.mostPairs()
		if c < 0 {
			return t
		}
		t.GapRows = append(t.GapRows, c)
		e.remove(c)
	}
}

// elimination is the state of Triangulate.
type elimination struct {
	g      *Graph
	left   []int32 // entries of each column in the rows left
	pairs  []int32 // columns with two entries left that meet each row; -1 if the row is gone
	single []int32 // columns that had a single entry left at some time
	// The rows by number of pairs. An entry is void if the row's number has
	// changed or the row is gone; each change adds an entry.
	byPairs [][]int32
}

func newElimination(g *Graph) *elimination {
	e := &elimination{g: g, left: degrees(g.varStart), pairs: make([]int32, g.Checks())}
	for v, n := range e.left {
		switch n {
		case 1:
			e.single = append(e.single, int32(v))
		case 2:
			for _, c := range g.ChecksOf(v) {
				e.pairs[c]++
			}
		}
	}
	for c := range e.pairs {
		e.file(int32(c))
	}
	return e
}

func (e *elimination) file(c int32) {
	n := int(e.pairs[c])
	for n >= len(e.byPairs) {
		e.byPairs = append(e.byPairs, nil)
	}
	e.byPairs[n] = append(e.byPairs[n], c)
}

// remove takes row c away and counts anew the columns that meet it.
func (e *elimination) remove(c int32) {
	e.pairs[c] = -1
	for _, v := range e.g.VariablesOf(int(c)) {
		e.left[v]--
		change := int32(0)
		switch e.left[v] {
		case 1:
			e.single = append(e.single, v)
			change = -1
		case 2:
			change = 1
		default:
			continue
		}
		for _, d := range e.g.ChecksOf(int(v)) {
			if e.pairs[d] >= 0 {
				e.pairs[d] += change
				e.file(d)
			}
		}
	}
}

// mostPairs returns a row with the greatest number of pairs, -1 if no row is
// left.
func (e *elimination) mostPairs() int32 {
	for n := len(e.byPairs) - 1; n >= 0; n-- {
		for len(e.byPairs[n]) > 0 {
			last := len(e.byPairs[n]) - 1
			c := e.byPairs[n][last]
			e.byPairs[n] = e.byPairs[n][:last]
			if e.pairs[c] == int32(n) {
				return c
			}
		}
	}
	return -1
}

package tanner

import "slices"

// shelf keeps the check nodes that have free sockets, sorted by the fraction
// of their sockets in use.
type shelf struct {
	s     *sockets
	level map[[2]int32]int // by sockets in use and degree
	rows  [][]int32        // check nodes on each level, the emptiest first
	row   []int            // level of each check node, -1 if full
	at    []int32          // its place there
	count int              // check nodes on the shelf
}

func newShelf(s *sockets) *shelf {
	m := len(s.checkEnd)
	h := &shelf{s: s, row: make([]int, m), at: make([]int32, m)}
	h.level, h.rows = levels(s)
	for c := range int32(m) {
		h.row[c] = -1
		if s.free(c) > 0 {
			h.insert(c, s.used(c))
		}
	}
	return h
}

func (h *shelf) insert(c, used int32) {
	level := h.level[[2]int32{used, h.s.checkStart[c+1] - h.s.checkStart[c]}]
	h.row[c], h.at[c] = level, int32(len(h.rows[level]))
	h.rows[level] = append(h.rows[level], c)
	h.count++
}

func (h *shelf) remove(c int32) {
	row := h.rows[h.row[c]]
	last := row[len(row)-1]
	row[h.at[c]], h.at[last] = last, h.at[c]
	h.rows[h.row[c]] = row[:len(row)-1]
	h.row[c] = -1
	h.count--
}

// take notes that c is about to use one more socket.
func (h *shelf) take(c int32) {
	h.remove(c)
	if used := h.s.used(c) + 1; h.s.free(c) > 1 {
		h.insert(c, used)
	}
}

// put notes that c has freed a socket.
func (h *shelf) put(c int32) {
	if h.row[c] >= 0 {
		h.remove(c)
	}
	h.insert(c, h.s.used(c))
}

// any returns a check node with a free socket; there must be one.
func (h *shelf) any() int32 {
	for _, row := range h.rows {
		if len(row) > 0 {
			return row[0]
		}
	}
	panic("tanner: more sockets of variable nodes than of check nodes")
}

// levels numbers the possible fractions of sockets in use, in increasing
// order, for all check degrees that occur; equal fractions share a number.
// The key is the number of sockets in use and the degree.
func levels(s *sockets) (number map[[2]int32]int, rows [][]int32) {
	number = map[[2]int32]int{}
	var fractions [][2]int32
	for _, d := range tally(s.checkStart) {
		for used := range int32(d.Degree) {
			fractions = append(fractions, [2]int32{used, int32(d.Degree)})
		}
	}
	slices.SortFunc(fractions, compareFractions)
	for i, f := range fractions {
		if i == 0 || compareFractions(fractions[i-1], f) != 0 {
			rows = append(rows, nil)
		}
		number[f] = len(rows) - 1
	}
	return number, rows
}

func compareFractions(a, b [2]int32) int {
	left, right := int64(a[0])*int64(b[1]), int64(b[0])*int64(a[1])
	switch {
	case left < right:
		return -1
	case left > right:
		return 1
	}
	return 0
}

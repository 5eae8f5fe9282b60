package tanner

import "math/rand/v2"

// shelf keeps the check nodes that have free sockets, by their number.
type shelf struct {
	rows  [][]int32 // check nodes with as many free sockets as the row's number
	row   []int32   // row of each check node, 0 if it is not on the shelf
	at    []int32   // its place there
	count int       // check nodes on the shelf
	free  int       // their free sockets
}

func newShelf(s *sockets) *shelf {
	m := len(s.checkEnd)
	most := int32(0)
	for c := range s.checkEnd {
		most = max(most, s.free(int32(c)))
	}
	h := &shelf{rows: make([][]int32, most+1), row: make([]int32, m), at: make([]int32, m)}
	for c := range int32(m) {
		h.insert(c, s.free(c))
	}
	return h
}

// insert puts a check node that is not on the shelf in its row, if it has free
// sockets.
func (h *shelf) insert(c, free int32) {
	if free == 0 {
		return
	}
	h.row[c], h.at[c] = free, int32(len(h.rows[free]))
	h.rows[free] = append(h.rows[free], c)
	h.count++
	h.free += int(free)
}

// remove takes a check node from the shelf, if it is there.
func (h *shelf) remove(c int32) {
	free := h.row[c]
	if free == 0 {
		return
	}
	row := h.rows[free]
	last := row[len(row)-1]
	row[h.at[c]], h.at[last] = last, h.at[c]
	h.rows[free] = row[:len(row)-1]
	h.row[c] = 0
	h.count--
	h.free -= int(free)
}

// take notes that c is about to use one more socket, put that it has one less
// in use.
func (h *shelf) take(c int32) { h.change(c, -1) }
func (h *shelf) put(c int32)  { h.change(c, 1) }

func (h *shelf) change(c, by int32) {
	free := h.row[c] + by
	h.remove(c)
	h.insert(c, free)
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

// draw returns the check node of a random free socket; there must be one.
func (h *shelf) draw(random *rand.Rand) int32 {
	n := random.IntN(h.free)
	for free, row := range h.rows {
		if n < free*len(row) {
			return row[n/free]
		}
		n -= free * len(row)
	}
	panic("tanner: fewer free sockets than counted")
}

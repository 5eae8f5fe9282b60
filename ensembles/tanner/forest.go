package tanner

import "math/rand/v2"

// A cycle through variable nodes of degree 2 alone is a codeword of as many
// ones as it has variable nodes, and in ensembles near the stability bound a
// random graph has short ones: the error floor. Up to one less than there are
// check nodes they can be joined without any cycle (Di, Richardson
// & Urbanke, Weight distribution of low-density parity-check codes, IEEE Trans.
// Inf. Theory 52(11), 2006, on the part that they play).

// plantTries is how many pairs of sockets are drawn for a node before a pair
// that fits is looked for.
const plantTries = 200

// degreeTwo returns the first column of degree 2 or less, and how many columns
// of degree 2 there are from it on.
func (s *sockets) degreeTwo() (first int32, nodes int) {
	first = s.frozen
	for first > 0 && s.varStart[first]-s.varStart[first-1] <= 2 {
		first--
		if s.varStart[first+1]-s.varStart[first] == 2 {
			nodes++
		}
	}
	return first, nodes
}

// plant joins variable nodes of degree 2 to random sockets so that they form
// no cycle, all of them or as many as that is possible with, and freezes them.
// It returns false, with nothing joined, if it finds no way.
func (s *sockets) plant(random *rand.Rand) bool {
	first, nodes := s.degreeTwo()
	first += int32(max(0, nodes-len(s.checkEnd)+1))
	if nodes == 0 || first == s.frozen {
		return false
	}
	trees := newTrees(len(s.checkEnd))
	var open []int32 // check node of each free socket
	for c := range s.checkEnd {
		for range s.free(int32(c)) {
			open = append(open, int32(c))
		}
	}
	take := func(i int) int32 {
		c := open[i]
		open[i] = open[len(open)-1]
		open = open[:len(open)-1]
		return c
	}
	for v := first; v < s.frozen; v++ {
		if s.varStart[v+1]-s.varStart[v] < 2 {
			s.join(v, take(random.IntN(len(open))))
			continue
		}
		a := random.IntN(len(open))
		b := -1
		for try := range plantTries + len(open) {
			if try < plantTries {
				a, b = random.IntN(len(open)), random.IntN(len(open))
			} else {
				b = try - plantTries
			}
			if trees.root(open[a]) != trees.root(open[b]) {
				break
			}
			b = -1
		}
		if b < 0 {
			s.uproot(first, v)
			return false
		}
		if a < b {
			a, b = b, a // taking the later one leaves the earlier one in place
		}
		c, d := take(a), take(b)
		trees.unite(c, d)
		s.join(v, c)
		s.join(v, d)
	}
	s.frozen = first
	return true
}

// uproot takes back the edges of the columns from first up to end.
func (s *sockets) uproot(first, end int32) {
	for v := first; v < end; v++ {
		for _, c := range s.checksOf(v) {
			s.checkEnd[c]--
		}
		s.varEnd[v] = s.varStart[v]
	}
}

// DegreeTwoCycles returns how many variable nodes of degree 2 close a cycle
// with such nodes before them: the number of independent cycles among them. It
// is at least their number less that of the check nodes plus one.
func (g *Graph) DegreeTwoCycles() (closing int) {
	forest := newTrees(g.Checks())
	for v := range g.Variables() {
		if ends := g.ChecksOf(v); len(ends) == 2 {
			if forest.root(ends[0]) == forest.root(ends[1]) {
				closing++
			}
			forest.unite(ends[0], ends[1])
		}
	}
	return closing
}

// trees are disjoint sets of check nodes (Galler & Fischer, Commun. ACM 7(5),
// 1964), with halving of the paths.
type trees []int32

func newTrees(n int) trees {
	t := make(trees, n)
	for i := range t {
		t[i] = int32(i)
	}
	return t
}

func (t trees) root(x int32) int32 {
	for t[x] != x {
		t[x] = t[t[x]]
		x = t[x]
	}
	return x
}

func (t trees) unite(x, y int32) { t[t.root(x)] = t.root(y) }

package tanner

// sockets is a graph under construction. Every node has a row of sockets, as
// many as its degree, of which the first up to End are in use; an edge joins
// a variable node's socket to a check node's socket.
type sockets struct {
	varStart, varEnd     []int32
	checkStart, checkEnd []int32
	varCheck             []int32 // check node at each variable node's socket
	checkVar             []int32 // variable node at each check node's socket
	mate                 []int32 // the check node's socket joined to each variable node's socket
	// Variable nodes from frozen on keep their edges (the chain).
	frozen int32
}

func newSockets(variableDegrees, checkDegrees []int32) *sockets {
	s := &sockets{varStart: starts(variableDegrees), checkStart: starts(checkDegrees), frozen: int32(len(variableDegrees))}
	s.varEnd = append([]int32(nil), s.varStart[:len(variableDegrees)]...)
	s.checkEnd = append([]int32(nil), s.checkStart[:len(checkDegrees)]...)
	edges := s.varStart[len(variableDegrees)]
	s.varCheck, s.checkVar, s.mate = make([]int32, edges), make([]int32, edges), make([]int32, edges)
	return s
}

func starts(degrees []int32) []int32 {
	start := make([]int32, len(degrees)+1)
	for i, d := range degrees {
		start[i+1] = start[i] + d
	}
	return start
}

func (s *sockets) checksOf(v int32) []int32    { return s.varCheck[s.varStart[v]:s.varEnd[v]] }
func (s *sockets) variablesOf(c int32) []int32 { return s.checkVar[s.checkStart[c]:s.checkEnd[c]] }

// free returns the number of unused sockets of check node c.
func (s *sockets) free(c int32) int32 { return s.checkStart[c+1] - s.checkEnd[c] }

// join adds an edge; both nodes must have an unused socket.
func (s *sockets) join(v, c int32) {
	s.joinAt(v, s.checkEnd[c])
	s.varCheck[s.varEnd[v]-1] = c
	s.checkEnd[c]++
}

func (s *sockets) joinAt(v, socket int32) {
	s.mate[s.varEnd[v]] = socket
	s.checkVar[socket] = v
	s.varEnd[v]++
}

// adjacent tells whether v and c are joined.
func (s *sockets) adjacent(v, c int32) bool {
	if row, column := s.checksOf(v), s.variablesOf(c); len(row) <= len(column) {
		for _, x := range row {
			if x == c {
				return true
			}
		}
	} else {
		for _, x := range column {
			if x == v {
				return true
			}
		}
	}
	return false
}

// owner returns the variable node that the edge at this socket belongs to.
func (s *sockets) owner(edge int32) int32 { return s.checkVar[s.mate[edge]] }

// swap exchanges the check nodes of two edges, given by their variable
// nodes' sockets. All degrees stay as they are.
func (s *sockets) swap(a, b int32) {
	v, w := s.owner(a), s.owner(b)
	s.mate[a], s.mate[b] = s.mate[b], s.mate[a]
	s.varCheck[a], s.varCheck[b] = s.varCheck[b], s.varCheck[a]
	s.checkVar[s.mate[a]], s.checkVar[s.mate[b]] = v, w
}

// swappable tells whether swap(a, b) keeps the graph free of repeated edges
// at the two nodes concerned.
func (s *sockets) swappable(a, b int32) bool {
	v, w := s.owner(a), s.owner(b)
	c, d := s.varCheck[a], s.varCheck[b]
	return v != w && c != d && !s.adjacent(v, d) && !s.adjacent(w, c)
}

// movable returns the number of edges that may be swapped: those of the
// variable nodes before frozen, whose sockets come first.
func (s *sockets) movable() int32 { return s.varStart[s.frozen] }

// graph returns the finished graph, with neighbours in increasing order.
func (s *sockets) graph() *Graph {
	g := &Graph{varStart: s.varStart}
	g.checkStart, g.checkVar = transpose(s.varStart, s.varCheck, len(s.checkEnd))
	g.varStart, g.varCheck = transpose(g.checkStart, g.checkVar, len(s.varEnd))
	return g
}

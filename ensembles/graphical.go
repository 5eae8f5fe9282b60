package ensembles

// graphical tells whether there is a bipartite graph with these degrees in
// which no two nodes are joined twice. The sockets of both kinds must be
// equal in number.
//
// By the theorem of Gale (Pacific J. Math. 7, 1957) and Ryser (Canad. J.
// Math. 9, 1957) there is one exactly if, for every k, the k variable nodes
// of largest degree have no more sockets than Σ min(degree, k) over the check
// nodes. Between two changes of degree the left side is linear in k and the
// right side concave, so it is enough to look where the degree changes.
func graphical(variable, check Counts) bool {
	nodes, sockets := 0, 0
	for i := len(variable) - 1; i >= 0; i-- {
		nodes += variable[i].Nodes
		sockets += variable[i].Nodes * variable[i].Degree
		room := 0
		for _, c := range check {
			room += c.Nodes * min(c.Degree, nodes)
		}
		if sockets > room {
			return false
		}
	}
	return true
}

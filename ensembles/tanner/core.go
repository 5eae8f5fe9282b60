package tanner

// core returns the 2-core, what is left when the edges of nodes of degree 1
// are removed again and again. All cycles lie in it; trees and branches do
// not, so that searches for cycles need not walk them. Nodes keep their
// numbers.
func (g *Graph) core() *Graph {
	varDegree, checkDegree := degrees(g.varStart), degrees(g.checkStart)
	removed := 0
	// Removing the only edge of a variable node may leave its check node
	// with one edge, whose removal may leave another variable node with one.
	follow := func(v int32) {
		for v >= 0 && varDegree[v] == 1 {
			varDegree[v] = 0
			c := first(g.ChecksOf(int(v)), checkDegree)
			checkDegree[c]--
			removed++
			v = -1
			if checkDegree[c] == 1 {
				checkDegree[c] = 0
				v = first(g.VariablesOf(int(c)), varDegree)
				varDegree[v]--
				removed++
			}
		}
	}
	for v := range varDegree {
		follow(int32(v))
	}
	for c := range checkDegree {
		if checkDegree[c] == 1 {
			checkDegree[c] = 0
			v := first(g.VariablesOf(c), varDegree)
			varDegree[v]--
			removed++
			follow(v)
		}
	}
	if removed == 0 {
		return g
	}
	edges := make([]Edge, 0, g.Edges()-removed)
	for v, degree := range varDegree {
		if degree == 0 {
			continue
		}
		for _, c := range g.ChecksOf(v) {
			if checkDegree[c] > 0 {
				edges = append(edges, Edge{int32(v), c})
			}
		}
	}
	return assemble(g.Variables(), g.Checks(), edges)
}

func degrees(start []int32) []int32 {
	d := make([]int32, len(start)-1)
	for i := range d {
		d[i] = start[i+1] - start[i]
	}
	return d
}

// first returns the first node of a row that still has edges. A node of
// degree 1 has exactly one neighbour that does.
func first(row, degree []int32) int32 {
	for _, x := range row {
		if degree[x] > 0 {
			return x
		}
	}
	panic("tanner: a node of degree 1 without neighbour")
}

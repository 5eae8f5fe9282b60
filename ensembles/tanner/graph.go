package tanner

import (
	"fmt"
	"math"
)

// MaxEdges is the largest number of edges a Graph may have: positions among
// the edges are 32-bit integers.
const MaxEdges = math.MaxInt32

// Edge joins a variable node to a check node, both numbered from 0.
type Edge struct{ Variable, Check int32 }

// Graph is a Tanner graph without repeated edges: the bipartite graph of a
// parity-check matrix whose rows are check nodes and whose columns are
// variable nodes. Both sides are kept as compressed rows with neighbours in
// increasing order, 8 bytes per edge and 4 per node in all. A Graph is
// immutable and safe for concurrent use.
type Graph struct {
	varStart, varCheck   []int32 // checks of v: varCheck[varStart[v]:varStart[v+1]]
	checkStart, checkVar []int32 // variables of c: checkVar[checkStart[c]:checkStart[c+1]]
}

// NewGraph returns the graph with the given numbers of nodes and edges. It
// refuses edges that are out of range or repeated, and more than MaxEdges.
// Nodes without edges are allowed.
func NewGraph(variables, checks int, edges []Edge) (*Graph, error) {
	if variables < 0 || checks < 0 || variables > MaxEdges || checks > MaxEdges || len(edges) > MaxEdges {
		return nil, fmt.Errorf("%d variable nodes, %d check nodes, %d edges: each must be from 0 to %d", variables, checks, len(edges), MaxEdges)
	}
	for _, e := range edges {
		if e.Variable < 0 || int(e.Variable) >= variables || e.Check < 0 || int(e.Check) >= checks {
			return nil, fmt.Errorf("edge of variable node %d and check node %d: nodes must be below %d and %d", e.Variable, e.Check, variables, checks)
		}
	}
	g := assemble(variables, checks, edges)
	if v, c, found := g.repeated(); found {
		return nil, fmt.Errorf("edge of variable node %d and check node %d: given more than once", v, c)
	}
	return g, nil
}

// assemble sorts edges that are in range; they may be repeated.
func assemble(variables, checks int, edges []Edge) *Graph {
	g := &Graph{checkStart: make([]int32, checks+1), checkVar: make([]int32, len(edges))}
	for _, e := range edges {
		g.checkStart[e.Check]++
	}
	// Each start is first the end of its row and then counts down to its
	// beginning as the row fills.
	var end int32
	for c := range g.checkStart {
		end += g.checkStart[c]
		g.checkStart[c] = end
	}
	for _, e := range edges {
		g.checkStart[e.Check]--
		g.checkVar[g.checkStart[e.Check]] = e.Variable
	}
	// Transposing visits the rows in order, so it sorts; twice sorts both.
	g.varStart, g.varCheck = transpose(g.checkStart, g.checkVar, variables)
	g.checkStart, g.checkVar = transpose(g.varStart, g.varCheck, checks)
	return g
}

// transpose returns the compressed columns of compressed rows.
func transpose(start, to []int32, columns int) (columnStart, from []int32) {
	columnStart = make([]int32, columns+1)
	from = make([]int32, len(to))
	for _, j := range to {
		columnStart[j]++
	}
	var sum int32
	for j := range columnStart {
		columnStart[j], sum = sum, sum+columnStart[j]
	}
	for i := range len(start) - 1 {
		for _, j := range to[start[i]:start[i+1]] {
			from[columnStart[j]] = int32(i)
			columnStart[j]++
		}
	}
	// Each start has moved to its row's end, which is the next row's start.
	copy(columnStart[1:], columnStart)
	columnStart[0] = 0
	return columnStart, from
}

// repeated finds the first edge that occurs twice.
func (g *Graph) repeated() (v, c int32, found bool) {
	for v := range g.Variables() {
		row := g.ChecksOf(v)
		for i := 1; i < len(row); i++ {
			if row[i] == row[i-1] {
				return int32(v), row[i], true
			}
		}
	}
	return 0, 0, false
}

// Variables returns the number of variable nodes: the code length.
func (g *Graph) Variables() int { return len(g.varStart) - 1 }

// Checks returns the number of check nodes.
func (g *Graph) Checks() int { return len(g.checkStart) - 1 }

// Edges returns the number of edges: the ones of the parity-check matrix.
func (g *Graph) Edges() int { return len(g.varCheck) }

// ChecksOf returns the check nodes of variable node v in increasing order;
// the slice must not be written to.
func (g *Graph) ChecksOf(v int) []int32 { return g.varCheck[g.varStart[v]:g.varStart[v+1]] }

// VariablesOf returns the variable nodes of check node c in increasing
// order; the slice must not be written to.
func (g *Graph) VariablesOf(c int) []int32 { return g.checkVar[g.checkStart[c]:g.checkStart[c+1]] }

// CheckRows returns the graph as compressed rows, one row per check node, as
// decoders walk it: the variable nodes of check c are
// variables[start[c]:start[c+1]]. The slices must not be written to.
func (g *Graph) CheckRows() (start, variables []int32) { return g.checkStart, g.checkVar }

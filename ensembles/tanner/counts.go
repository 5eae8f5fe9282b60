package tanner

import (
	"fmt"
	"slices"

	"tannery/ensembles"
)

// Realization returns the node counts of the graph, and with them its
// ensemble and design rate. It is an error if a node has no edges or a check
// node only one, as no profile has such nodes.
func (g *Graph) Realization() (ensembles.Realization, error) {
	for c := range g.Checks() {
		if len(g.VariablesOf(c)) == 1 {
			return ensembles.Realization{}, fmt.Errorf("found row %d with a single entry; allowed: at least 2 in every row, as a check of one bit makes it 0", c+1)
		}
	}
	r := ensembles.Realization{
		Length: g.Variables(), Checks: g.Checks(), Edges: g.Edges(),
		VariableNodes: tally(g.varStart), CheckNodes: tally(g.checkStart),
	}
	return r, r.Validate()
}

// tally counts the rows by length.
func tally(start []int32) ensembles.Counts {
	nodes := map[int]int{}
	for i := range len(start) - 1 {
		nodes[int(start[i+1]-start[i])]++
	}
	counts := make(ensembles.Counts, 0, len(nodes))
	for degree, n := range nodes {
		counts = append(counts, ensembles.Count{Degree: degree, Nodes: n})
	}
	slices.SortFunc(counts, func(a, b ensembles.Count) int { return a.Degree - b.Degree })
	return counts
}

// Verify returns an error that names the first difference between the
// degrees of the graph and the node counts of r.
func (g *Graph) Verify(r ensembles.Realization) error {
	if err := compare("variable", tally(g.varStart), r.VariableNodes); err != nil {
		return err
	}
	return compare("check", tally(g.checkStart), r.CheckNodes)
}

func compare(side string, have, want ensembles.Counts) error {
	nodes := map[int]int{}
	for _, c := range have {
		nodes[c.Degree] = c.Nodes
	}
	for _, c := range want {
		if nodes[c.Degree] != c.Nodes {
			return fmt.Errorf("the graph has %d %s nodes of degree %d: must have %d", nodes[c.Degree], side, c.Degree, c.Nodes)
		}
		delete(nodes, c.Degree)
	}
	for _, c := range have {
		if n := nodes[c.Degree]; n > 0 {
			return fmt.Errorf("the graph has %d %s nodes of degree %d: must have none", n, side, c.Degree)
		}
	}
	return nil
}

package tanner

import (
	"context"
	"fmt"
	"math/rand/v2"
	"slices"

	"tannery/ensembles"
)

// Method names a way to construct a graph.
type Method string

// The methods. Growth is progressive edge growth, practical up to lengths of
// about a hundred thousand; Randomized joins sockets at random and then
// removes short cycles, in time nearly linear in the length.
const (
	Growth     Method = "growth"
	Randomized Method = "randomized"
)

// MethodFor returns the method that Build chooses by itself for a length.
func MethodFor(length int) Method {
	if length > PracticalGrowth {
		return Randomized
	}
	return Growth
}

// PracticalGrowth is the greatest length for which Build chooses Growth by
// itself.
const PracticalGrowth = 100_000

// DefaultGirth is the girth that Build aims at by edge swaps unless told
// otherwise.
const DefaultGirth = 10

// DegreeTwo is a way to join the variable nodes of degree 2. Cycles of them
// alone are codewords, and near the stability bound a random graph has enough
// of them for a floor of the frame error rate just below the threshold.
type DegreeTwo string

// The ways. With Forest they form no cycle among themselves, or as few as
// their number allows. Where they are nearly as many as the check nodes, that
// leaves no check node without one, which the ensemble of the profile has, and
// costs some thousandths of the threshold. Chain lays them as a chain through
// the check nodes, the k-th of them joining rows k and k+1 of the matrix (dual
// diagonal), as the last columns, and ends it with one variable node of degree
// 1 if there is any; it needs at least one more check node than there are
// variable nodes of degree 2, and costs more. Free joins them like others.
const (
	Forest DegreeTwo = "forest"
	Chain  DegreeTwo = "chain"
	Free   DegreeTwo = "free"
)

// Settings say how Build constructs a graph. The zero value is valid.
type Settings struct {
	// Method is Growth or Randomized; empty means Growth up to a length of
	// PracticalGrowth and Randomized beyond.
	Method Method
	// Seed chooses among the graphs: the same seed gives the same graph.
	Seed uint64
	// DegreeTwo is how the variable nodes of degree 2 are joined; empty means
	// Forest.
	DegreeTwo DegreeTwo
	// Girth is the girth aimed at by edge swaps after the construction, an
	// even number from 4 to 12: cycles shorter than that are removed where
	// possible with bounded effort. 4 leaves all cycles in place, so that
	// Randomized draws from the configuration model without repeated edges.
	// 0 means DefaultGirth.
	Girth int
	// Progress, if not nil, is called now and then by the goroutine of Build
	// with the number of edges placed.
	Progress func(done, total int)
}

// Build constructs a graph with exactly the node counts of r and no repeated
// edges. The columns are in decreasing order of degree. It returns an error
// if the counts are inconsistent or no such graph exists, if a chain is
// impossible, if settings are out of range, and ctx.Err() when ctx ends.
func Build(ctx context.Context, r ensembles.Realization, s Settings) (*Graph, error) {
	if err := r.Validate(); err != nil {
		return nil, err
	}
	if r.Edges > MaxEdges {
		return nil, fmt.Errorf("%d edges: must be at most %d", r.Edges, MaxEdges)
	}
	if s.Girth == 0 {
		s.Girth = DefaultGirth
	}
	if s.Girth < 4 || s.Girth > 12 || s.Girth%2 != 0 {
		return nil, fmt.Errorf("girth %d: must be an even number from 4 to 12", s.Girth)
	}
	if s.DegreeTwo == "" {
		s.DegreeTwo = Forest
	}
	if s.DegreeTwo != Forest && s.DegreeTwo != Chain && s.DegreeTwo != Free {
		return nil, fmt.Errorf("degree two %q: must be %q, %q or %q", s.DegreeTwo, Forest, Chain, Free)
	}
	if s.Method == "" {
		s.Method = MethodFor(r.Length)
	}
	if s.Progress == nil {
		s.Progress = func(int, int) {}
	}
	random := rand.New(rand.NewPCG(s.Seed, uint64(r.Length)))
	plan, err := layOut(r, s.DegreeTwo == Chain, random)
	if err != nil {
		return nil, err
	}
	switch s.Method {
	case Growth:
		if err = plan.grow(ctx, random, s.Progress); err == nil {
			// What has grown without a cycle, but for one, is to stay so.
			if first, nodes := plan.degreeTwo(); s.DegreeTwo == Forest && nodes <= r.Checks {
				plan.frozen = first
			}
		}
	case Randomized:
		planted := s.DegreeTwo == Forest && plan.plant(random)
		if err = plan.scatter(ctx, random); err != nil && planted && ctx.Err() == nil {
			// The rest of a small dense graph may not fit around it.
			if plan, err = layOut(r, s.DegreeTwo == Chain, random); err == nil {
				err = plan.scatter(ctx, random)
			}
		}
	default:
		err = fmt.Errorf("construction %q: must be %q or %q", s.Method, Growth, Randomized)
	}
	if err != nil {
		return nil, err
	}
	if err := plan.removeCycles(ctx, s.Girth, random); err != nil {
		return nil, err
	}
	s.Progress(r.Edges, r.Edges)
	return plan.graph(), nil
}

// layOut orders the nodes and places the chain if there is to be one.
func layOut(r ensembles.Realization, chain bool, random *rand.Rand) (*sockets, error) {
	variables, checks := spread(r.VariableNodes), spread(r.CheckNodes)
	slices.Reverse(variables)
	links, tail := 0, 0
	for _, d := range r.VariableNodes {
		switch d.Degree {
		case 1:
			tail = 1
		case 2:
			links = d.Nodes
		}
	}
	switch {
	case !chain || links == 0:
		return newSockets(variables, checks), nil
	case links >= len(checks):
		return nil, fmt.Errorf("chain: %d variable nodes of degree 2: must be at most %d, one less than the check nodes", links, len(checks)-1)
	}
	// The first row meets one link only: it gets the least degree, so that a
	// profile with one check node of smaller degree comes out regular
	// elsewhere. The order of the others is drawn.
	random.Shuffle(len(checks)-1, func(i, j int) { checks[i+1], checks[j+1] = checks[j+1], checks[i+1] })
	// Columns: the others by decreasing degree, which ends with degree 2 and
	// 1. Those of degree 1 that are not the tail move before the chain.
	ones := 0
	for ones < len(variables) && variables[len(variables)-1-ones] == 1 {
		ones++
	}
	first := len(variables) - ones - links
	for i := range ones - tail {
		variables[first+i] = 1
	}
	first += ones - tail
	for i := range links {
		variables[first+i] = 2
	}
	s := newSockets(variables, checks)
	s.frozen = int32(first)
	for i := range int32(links) {
		s.join(s.frozen+i, i)
		s.join(s.frozen+i, i+1)
	}
	if tail == 1 {
		s.join(s.frozen+int32(links), int32(links))
	}
	return s, nil
}

// spread lists the degree of every node in increasing order.
func spread(counts ensembles.Counts) []int32 {
	degrees := make([]int32, 0, counts.Nodes())
	for _, c := range counts {
		for range c.Nodes {
			degrees = append(degrees, int32(c.Degree))
		}
	}
	return degrees
}

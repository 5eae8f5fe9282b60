package ensembles

import (
	"errors"
	"fmt"
	"slices"
)

// MaxLength is the greatest number of nodes of a kind in a Realization.
const MaxLength = 1_000_000_000

// Realization is an ensemble in whole nodes: how many variable and check
// nodes of each degree a Tanner graph of a given length has. Its invariants
// are those that Validate checks.
type Realization struct {
	Length        int // variable nodes, which are code bits
	Checks        int // check nodes
	Edges         int
	VariableNodes Counts
	CheckNodes    Counts
	Results       []Result // thresholds of Ensemble(), not of the profile it came from
}

// Count is the number of nodes of a degree.
type Count struct {
	Degree int
	Nodes  int
}

// Counts are numbers of nodes, positive, in strictly increasing order of
// degree.
type Counts []Count

// Nodes returns the number of all nodes.
func (c Counts) Nodes() int {
	sum := 0
	for _, n := range c {
		sum += n.Nodes
	}
	return sum
}

// Sockets returns the number of edges that end at the nodes.
func (c Counts) Sockets() int {
	sum := 0
	for _, n := range c {
		sum += n.Degree * n.Nodes
	}
	return sum
}

func (c Counts) sort() {
	slices.SortFunc(c, func(a, b Count) int { return a.Degree - b.Degree })
}

// edges returns the distribution in edge perspective. Each fraction is the
// quotient of two whole numbers, rounded once.
func (c Counts) edges() Distribution {
	d := make(Distribution, len(c))
	sockets := float64(c.Sockets())
	for i, n := range c {
		d[i] = Term{n.Degree, float64(n.Degree*n.Nodes) / sockets}
	}
	return d
}

// DesignRate returns 1 - Checks/Length, information bits per code bit.
func (r Realization) DesignRate() float64 {
	return 1 - float64(r.Checks)/float64(r.Length)
}

// Ensemble returns the ensemble with exactly these counts.
func (r Realization) Ensemble() Ensemble {
	return Ensemble{r.VariableNodes.edges(), r.CheckNodes.edges()}
}

// Validate returns an error for each invariant that the counts break: the
// variable nodes sum to Length and the check nodes to Checks, both kinds have
// exactly Edges sockets, and there is a graph with these degrees in which no
// two nodes are joined twice.
func (r Realization) Validate() error {
	var errs []error
	for _, f := range r.faults() {
		errs = append(errs, fmt.Errorf("%s: found %s; allowed: %s", f.key, f.found, f.allowed))
	}
	return errors.Join(errs...)
}

// fault is an invariant that a Realization breaks, under the key by which
// files know the offender.
type fault struct{ key, found, allowed string }

func (r Realization) faults() []fault {
	var faults []fault
	add := func(key, found, allowed string, a ...any) {
		faults = append(faults, fault{key, found, fmt.Sprintf(allowed, a...)})
	}
	for _, side := range []struct {
		key    string
		counts Counts
		least  int
	}{{"variable_nodes", r.VariableNodes, 1}, {"check_nodes", r.CheckNodes, 2}} {
		if len(side.counts) == 0 {
			add(side.key, "no nodes", "at least one")
		}
		for i, c := range side.counts {
			switch {
			case c.Degree < side.least || c.Degree > MaxDegree:
				add(side.key, fmt.Sprintf("degree %d", c.Degree), "degrees from %d to %d", side.least, MaxDegree)
			case c.Nodes < 1 || c.Nodes > MaxLength:
				add(side.key, fmt.Sprintf("%d nodes of degree %d", c.Nodes, c.Degree), "from 1 to %d", MaxLength)
			case i > 0 && c.Degree <= side.counts[i-1].Degree:
				add(side.key, fmt.Sprintf("degree %d after %d", c.Degree, side.counts[i-1].Degree), "degrees in increasing order")
			}
		}
	}
	if faults != nil {
		return faults
	}
	// The nodes first: sums of sockets cannot overflow once these are right.
	if n := r.VariableNodes.Nodes(); n != r.Length || n > MaxLength {
		add("length", fmt.Sprint(r.Length), "%d, the sum of variable_nodes, and at most %d", n, MaxLength)
	}
	if n := r.CheckNodes.Nodes(); n != r.Checks || n > MaxLength {
		add("checks", fmt.Sprint(r.Checks), "%d, the sum of check_nodes, and at most %d", n, MaxLength)
	}
	if faults != nil {
		return faults
	}
	variable, check := r.VariableNodes.Sockets(), r.CheckNodes.Sockets()
	if variable != r.Edges {
		add("edges", fmt.Sprint(r.Edges), "%d, the sum of degree times number over variable_nodes", variable)
	}
	if check != variable {
		add("check_nodes", fmt.Sprintf("%d edges", check), "%d edges, as at variable_nodes", variable)
	}
	if faults == nil && !graphical(r.VariableNodes, r.CheckNodes) {
		add("variable_nodes", "degrees that no graph has without joining two nodes twice", "degrees that fit check_nodes")
	}
	return faults
}

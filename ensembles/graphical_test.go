package ensembles

import (
	"slices"
	"testing"
)

// The theorem's condition agrees with building the graph: joining each
// variable node, the largest first, to the checks with the most free sockets
// succeeds exactly if there is a graph at all (Gale's construction).
func TestGraphicalAgainstConstruction(t *testing.T) {
	r := seeded(21)
	outcomes := map[bool]int{}
	for range 5000 {
		var variable, check Counts
		for degree := 1; degree <= 6; degree++ {
			if n := r.IntN(3); n > 0 {
				variable = append(variable, Count{degree, n})
			}
			if n := r.IntN(3); n > 0 && degree > 1 {
				check = append(check, Count{degree, n})
			}
		}
		if variable.Sockets() != check.Sockets() || len(variable) == 0 {
			continue
		}
		got := graphical(variable, check)
		if want := construct(variable, check); got != want {
			t.Fatalf("%v and %v: %v, but construction gives %v", variable, check, got, want)
		}
		outcomes[got]++
	}
	if outcomes[true] < 20 || outcomes[false] < 20 {
		t.Errorf("outcomes %v: too few of a kind to tell", outcomes)
	}
}

func construct(variable, check Counts) bool {
	var free []int
	for _, c := range check {
		for range c.Nodes {
			free = append(free, c.Degree)
		}
	}
	for i := len(variable) - 1; i >= 0; i-- {
		for range variable[i].Nodes {
			slices.SortFunc(free, func(a, b int) int { return b - a })
			for j := range variable[i].Degree {
				if j >= len(free) || free[j] == 0 {
					return false
				}
				free[j]--
			}
		}
	}
	return true
}

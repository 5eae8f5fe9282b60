package ensembles

import "math"

const (
	// nearWhole is how far a real number of nodes may be from a whole one
	// and still mean just that: fractions of edges are known to 1e-16 of
	// themselves, and nobody means a millionth of a node.
	nearWhole = 1e-6
	// deserving is the real number of nodes from which a degree keeps at
	// least one: the nearest whole number is then not zero.
	deserving = 0.5
)

// nodes are the real numbers of nodes that one side of a profile asks for:
// target[i] nodes of degree[i].
type nodes struct {
	degree []int
	target []float64
}

// nodesOf asks for total nodes with a distribution in edge perspective.
func nodesOf(d Distribution, total int) nodes {
	var n nodes
	for _, t := range d.Nodes() {
		n.degree = append(n.degree, t.Degree)
		n.target = append(n.target, float64(total)*t.Fraction)
	}
	return n
}

// without leaves out the degrees above largest; the nodes they asked for are
// missing then.
func (n nodes) without(largest int) nodes {
	var rest nodes
	for i, degree := range n.degree {
		if degree <= largest {
			rest.degree = append(rest.degree, degree)
			rest.target = append(rest.target, n.target[i])
		}
	}
	return rest
}

// distance is the number of edges that end at other degrees than they
// should, counted at both degrees.
func (n nodes) distance(count []int) float64 {
	var sum float64
	for i, c := range count {
		sum += float64(n.degree[i]) * math.Abs(float64(c)-n.target[i])
	}
	return sum
}

// lost is the number of degrees that deserve a node and have none.
func (n nodes) lost(count []int) int {
	lost := 0
	for i, c := range count {
		if c == 0 && n.target[i] >= deserving {
			lost++
		}
	}
	return lost
}

// sockets is the number of edges that end at the nodes.
func (n nodes) sockets(count []int) int {
	sum := 0
	for i, c := range count {
		sum += n.degree[i] * c
	}
	return sum
}

// roundings returns whole numbers of nodes that sum to total, each the
// target rounded down or up: the ones of least distance first, at most limit
// of them. Degrees that deserve a node have one. Where rounding down and up
// cannot reach both of this and total, because there are few nodes for many
// degrees, the most numerous degrees give or take the difference.
func (n nodes) roundings(total, limit int) [][]int {
	base := make([]int, len(n.target))
	open := total // nodes still to be given, one each to some of the free
	var free, single []int
	for i, target := range n.target {
		base[i] = int(math.Floor(target + nearWhole))
		switch rest := target - float64(base[i]); {
		case rest <= nearWhole:
		case base[i] == 0 && target >= deserving:
			single = append(single, i)
		default:
			free = append(free, i)
		}
		open -= base[i]
	}
	for open < len(single) && base[n.mostNumerous(base)] > 1 {
		base[n.mostNumerous(base)]--
		open++
	}
	if open < len(single) {
		free, single = append(free, single...), nil
	}
	for _, i := range single {
		base[i] = 1
		open--
	}
	for ; open > len(free); open-- {
		base[n.mostNumerous(base)]++
	}
	costs := make([]float64, len(free))
	for k, i := range free {
		// Rounding up in place of down changes the distance by this.
		costs[k] = float64(n.degree[i]) * (1 - 2*(n.target[i]-float64(base[i])))
	}
	var out [][]int
	for _, up := range cheapestSubsets(costs, open, limit) {
		count := append([]int(nil), base...)
		for _, k := range up {
			count[free[k]]++
		}
		out = append(out, count)
	}
	return out
}

func (n nodes) mostNumerous(count []int) int {
	most := 0
	for i, c := range count {
		if c > count[most] {
			most = i
		}
	}
	return most
}

// counts leaves out the degrees without nodes.
func (n nodes) counts(count []int) Counts {
	var out Counts
	for i, c := range count {
		if c > 0 {
			out = append(out, Count{n.degree[i], c})
		}
	}
	return out
}

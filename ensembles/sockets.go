package ensembles

import (
	"math"
	"slices"
)

// bisections find θ to 1e-19 of the bracket, so that even 10⁹ nodes come out
// to far less than one.
const bisections = 64

// tilted returns the targets nearest to n, in relative entropy, that have the
// given numbers of nodes and of sockets: targetⱼ·e^(θj), up to a factor, with
// the θ that gives the mean degree asked for (Csiszár, Annals of Probability
// 3(1), 1975). The mean must lie strictly between the least and the largest
// degree; ok is false if it does not.
func (n nodes) tilted(total, sockets int) (tilted nodes, ok bool) {
	last := len(n.degree) - 1
	mean := float64(sockets) / float64(total)
	if last < 1 || mean <= float64(n.degree[0]) || mean >= float64(n.degree[last]) {
		return nodes{}, false
	}
	// Σ targetⱼ(j-mean)e^(θ(j-mean)) increases with θ: bracket and bisect.
	moment := func(theta float64) float64 {
		var sum float64
		for i, degree := range n.degree {
			off := float64(degree) - mean
			sum += n.target[i] * off * math.Exp(theta*off)
		}
		return sum
	}
	step := 1 / float64(n.degree[last]-n.degree[0])
	low, high := -step, step
	for ; moment(low) > 0; low *= 2 {
	}
	for ; moment(high) < 0; high *= 2 {
	}
	for range bisections {
		theta := low + (high-low)/2
		if moment(theta) < 0 {
			low = theta
		} else {
			high = theta
		}
	}
	tilted = nodes{n.degree, make([]float64, len(n.target))}
	var sum float64
	for i, degree := range n.degree {
		tilted.target[i] = n.target[i] * math.Exp(high*(float64(degree)-mean))
		sum += tilted.target[i]
	}
	if !(sum > 0) || math.IsInf(sum, 1) {
		return nodes{}, false // fractions of some 1e-300 take part
	}
	for i := range tilted.target {
		tilted.target[i] *= float64(total) / sum
	}
	return tilted, true
}

// match returns numbers of nodes of the degrees of n that sum to total and
// have exactly the given number of sockets, near the tilted targets: these
// are rounded, and what is missing is made up by moving one or two nodes to
// another degree. It returns nil if that does not succeed.
func (n nodes) match(total, sockets int) []int {
	for _, end := range []int{0, len(n.degree) - 1} {
		if sockets == n.degree[end]*total {
			count := make([]int, len(n.degree))
			count[end] = total
			return count
		}
	}
	tilted, ok := n.tilted(total, sockets)
	if !ok {
		return nil
	}
	count := tilted.roundings(total, 1)[0]
	if !tilted.repair(count, sockets-tilted.sockets(count)) {
		return nil
	}
	return count
}

// move takes one node from a degree to another.
type move struct {
	from, to int // indices
	cost     float64
}

// repair changes the number of sockets by the given amount with at most two
// moves, the cheapest in distance, and tells whether it could.
func (n nodes) repair(count []int, missing int) bool {
	if missing == 0 {
		return true
	}
	cheapest := map[int]move{} // by the change in sockets
	var changes []int
	for from := range count {
		if count[from] == 0 {
			continue
		}
		for to := range count {
			change := n.degree[to] - n.degree[from]
			m := move{from, to, n.costOf(from, count[from], -1) + n.costOf(to, count[to], 1)}
			known, found := cheapest[change]
			if change != 0 && (!found || m.cost < known.cost) {
				cheapest[change] = m
			}
			if change != 0 && !found {
				changes = append(changes, change)
			}
		}
	}
	best := []move(nil)
	least := math.Inf(1)
	if m, found := cheapest[missing]; found {
		best, least = []move{m}, m.cost
	}
	slices.Sort(changes)
	for _, change := range changes {
		first := cheapest[change]
		second, found := cheapest[missing-change]
		if !found || first.cost+second.cost >= least || first.from == second.from && count[first.from] < 2 {
			continue
		}
		best, least = []move{first, second}, first.cost+second.cost
	}
	for _, m := range best {
		count[m.from]--
		count[m.to]++
	}
	return best != nil
}

// costOf is the change in distance when count nodes of a degree become one
// more or less. Losing a degree that deserves a node costs more than all
// else.
func (n nodes) costOf(i, count, change int) float64 {
	if count+change == 0 && n.target[i] >= deserving {
		return MaxLength
	}
	return float64(n.degree[i]) * (math.Abs(float64(count+change)-n.target[i]) - math.Abs(float64(count)-n.target[i]))
}

// maxForeign bounds the search for the least number of nodes of a degree
// that the profile does not have: differences of degrees in use are smaller.
const maxForeign = 64

// matchWithNeighbour returns counts that match with the help of one degree
// next to a degree of n, with as few nodes of it as possible. Where n has one
// degree, or the mean is too far below or above its degrees for that, they
// are concentrated on the two whole numbers around the mean. least is the smallest degree
// allowed.
func (n nodes) matchWithNeighbour(total, sockets, least int) []Counts {
	var neighbours []int
	for _, degree := range n.degree {
		neighbours = append(neighbours, degree-1, degree+1)
	}
	slices.Sort(neighbours)
	last := len(n.degree) - 1
	var out []Counts
	for _, foreign := range slices.Compact(neighbours) {
		if last == 0 || foreign < least || slices.Contains(n.degree, foreign) {
			continue
		}
		// The rest must have a mean within the degrees of n.
		first := max(1, n.degree[0]*total-sockets+1, sockets-n.degree[last]*total+1)
		for k := first; k < min(total, first+maxForeign); k++ {
			if count := n.match(total-k, sockets-k*foreign); count != nil {
				counts := append(n.counts(count), Count{foreign, k})
				counts.sort()
				out = append(out, counts)
				break
			}
		}
	}
	inside := sockets > n.degree[0]*total && sockets < n.degree[last]*total
	if low := sockets / total; len(out) == 0 && !inside && low >= least {
		above := sockets - low*total
		concentrated := nodes{degree: []int{low, low + 1}}
		out = append(out, concentrated.counts([]int{total - above, above}))
	}
	return out
}

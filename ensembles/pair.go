package ensembles

import (
	"math"
	"slices"
)

// maxRareDegrees bounds the degrees that pairs rounds both ways.
const maxRareDegrees = 5

// wholeNode is how near a whole number a target counts as one: it is then not
// rounded both ways.
const wholeNode = 1e-6

// pairs returns numbers of nodes of the degrees of n that sum to total and
// have exactly the given number of sockets: the two most frequent degrees make
// up for whatever the others, rounded down and up, leave. It matters where a
// few nodes of a large degree carry many edges, so that one more or less
// shifts the others by hundreds.
func (n nodes) pairs(total, sockets int) [][]int {
	if len(n.degree) < 3 {
		return nil
	}
	byTarget := make([]int, len(n.degree))
	for i := range byTarget {
		byTarget[i] = i
	}
	slices.SortStableFunc(byTarget, func(a, b int) int {
		switch {
		case n.target[a] > n.target[b]:
			return -1
		case n.target[a] < n.target[b]:
			return 1
		}
		return 0
	})
	low, high := min(byTarget[0], byTarget[1]), max(byTarget[0], byTarget[1])
	rare := byTarget[max(2, len(byTarget)-maxRareDegrees):]
	step := n.degree[high] - n.degree[low]
	var found [][]int
	for up := range 1 << len(rare) {
		count := make([]int, len(n.degree))
		left, ends := total, sockets
		for k, i := range byTarget[2:] {
			count[i] = int(math.Round(n.target[i]))
			if r := k + 2 - (len(byTarget) - len(rare)); r >= 0 && math.Abs(n.target[i]-math.Round(n.target[i])) > wholeNode {
				count[i] = int(n.target[i]) + up>>r&1
			}
			left -= count[i]
			ends -= count[i] * n.degree[i]
		}
		// a+b = left and a·low + b·high = ends.
		over := ends - left*n.degree[low]
		if left < 0 || over < 0 || over%step != 0 || over/step > left {
			continue
		}
		count[high], count[low] = over/step, left-over/step
		found = append(found, count)
	}
	return found
}

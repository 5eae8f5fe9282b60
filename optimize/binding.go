package optimize

import "slices"

// bindingTolerance is the gain, relative to t, of a unit of what a limit
// forbids below which the limit does not count as binding: a hundred times
// what the linear programme leaves.
const bindingTolerance = 1e-9

// binding names the limits of which relaxing gains, by the multipliers. best
// is the ensemble's programme, free the one without a limit on the number of
// distinct degrees.
func binding(p Problem, d designer, best, free *candidate) []string {
	var names []string
	at := d.at(free)
	gains := at.gains(free.points, free.weights, free.two, free.alpha, free.beta, forbidden(p.VariableDegrees))
	if slices.Max(gains) > bindingTolerance*free.t {
		names = append(names, limitVariable)
	}
	if len(p.CheckDegrees) > 0 && checksBind(p, d, best) {
		names = append(names, limitCheck)
	}
	if l := p.Limits.EdgesPerBit; l > 0 && best.lambda.Integral()*l < 1+edgesTolerance {
		names = append(names, limitEdges)
	}
	for i, row := range at.two {
		if row.limit != "" && free.two[i] > bindingTolerance {
			names = append(names, row.limit)
		}
	}
	if best != free && free.value > best.value*(1+bindingTolerance) {
		names = append(names, limitDistinct)
	}
	return names
}

// edgesTolerance is how near the edges per bit must be to their limit.
const edgesTolerance = 1e-6

// forbidden returns degrees, in increasing order, that are not among the given
// ones: those in between, and some beyond.
func forbidden(allowed []int) []int {
	last := allowed[len(allowed)-1]
	var degrees []int
	for j := 2; j < last; j++ {
		if _, found := slices.BinarySearch(allowed, j); !found {
			degrees = append(degrees, j)
		}
	}
	for next := last + 1; next <= 4*last+1; next += 1 + last/2 {
		degrees = append(degrees, next)
	}
	return degrees
}

// checksBind tells whether moving edges to a check degree that is not allowed
// gains, compared with all degrees in use.
func checksBind(p Problem, d designer, c *candidate) bool {
	inUse := degreesOf(c.rho)
	var others []int
	for j := max(c.rho.Min()-checkReach, 2); j <= c.rho.Max()+checkReach; j++ {
		if _, found := slices.BinarySearch(p.CheckDegrees, j); !found {
			others = append(others, j)
		}
	}
	if len(others) == 0 {
		return false
	}
	g := checkGradient(d.at(c), c, p.Rate, slices.Concat(inUse, others))
	return slices.Min(g[len(inUse):]) < slices.Max(g[:len(inUse)])-bindingTolerance*c.t
}

package de

import (
	"math"

	"tannery/de/channel"
	"tannery/de/density"
)

// nearby gives the densities of a family's channels around a parameter, by
// interpolation between three: quicker than projecting each on the grid.
type nearby struct {
	family channel.Family
	grid   *density.Grid
	width  float64 // of a node to the next
	node   [3]float64
	at     [3]*density.Density
}

// nearbyWidth is the distance of the nodes relative to the parameter. The
// error goes with its third power, TestNeckIsFixedPoint sees it.
const nearbyWidth = 1e-3

// interpolate sets dst to the density at the parameter, which must be in the
// family's range.
func (n *nearby) interpolate(dst *density.Density, parameter float64) {
	if n.at[0] == nil || math.Abs(parameter-n.node[1]) > n.width {
		n.width = nearbyWidth * parameter
		best, worst := n.family.Range()
		first := max(min(parameter+n.width, worst)-2*n.width, best)
		for i := range n.node {
			n.node[i] = first + float64(i)*n.width
			n.at[i] = n.grid.Project(n.family.Density(n.node[i]))
		}
	}
	dst.Combine(lagrange(parameter, n.node[:]), n.at[:])
}

// lagrange returns the weights of the values at the nodes in the value at x of
// the polynomial through them.
func lagrange(x float64, node []float64) []float64 {
	weight := make([]float64, len(node))
	for j := range node {
		weight[j] = 1
		for k := range node {
			if k != j {
				weight[j] *= (x - node[k]) / (node[j] - node[k])
			}
		}
	}
	return weight
}

package density

// A point mass at a place between the nodes of a grid is replaced by masses
// on six neighbouring nodes, with the weights of quintic Lagrange
// interpolation: whatever smooth function is later integrated against the
// density, the result is that of the function's quintic interpolant, so the
// error is of sixth order in the grid step. Weights sum to 1, so mass is
// kept. Some are slightly negative; masses on the grid are therefore those of
// a signed measure, which is harmless because everything done to them is
// linear or a convolution.
//
// Two places need care, since interpolation is only as good as the function
// is smooth in the coordinate. At magnitude 0 every function of a symmetric
// density is even in x, so that nodes below it stand for those above; and it
// takes moments up to the fourth to add up hundreds of messages smaller than
// the step without error. Near u = 0 the Bhattacharyya parameter goes like √u,
// so √u is the coordinate there.

// order is the number of nodes that share a mass.
const order = 6

// stencil spreads a mass over the nodes first … first+order-1.
type stencil struct {
	first  int32
	weight [order]float64
}

// lagrange returns the interpolation weights at x of nodes at the given
// distinct coordinates.
func lagrange(x float64, nodes [order]float64) (weight [order]float64) {
	for i := range nodes {
		w := 1.0
		for j := range nodes {
			if j != i {
				w *= (x - nodes[j]) / (nodes[i] - nodes[j])
			}
		}
		weight[i] = w
	}
	return weight
}

// centred holds the coordinates of the nodes around the cell [0, 1].
// Interpolation from as many nodes on either side multiplies no frequency by
// more than 1, so that high powers of a spectrum stay bounded; one-sided
// interpolation would not.
var centred = [order]float64{-2, -1, 0, 1, 2, 3}

package density

// A point mass at a place between the nodes of a grid is replaced by masses
// on four neighbouring nodes, with the weights of cubic Lagrange
// interpolation: whatever smooth function is later integrated against the
// density, the result is that of the function's cubic interpolant, so the
// error is of fourth order in the grid step. Weights sum to 1, so mass is
// kept. Some are slightly negative; masses on the grid are therefore those of
// a signed measure, which is harmless because everything done to them is
// linear or a convolution.
//
// Two places need care, since interpolation is only as good as the function
// is smooth in the coordinate. Near magnitude 0 every function of a symmetric
// density is even in x, so x² is the coordinate there; near u = 0 the
// Bhattacharyya parameter goes like √u, so √u is.

// order is the number of nodes that share a mass.
const order = 4

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

// centred holds the coordinates of the nodes around the cell [0, 1]. Cubic
// interpolation from the two nodes on either side multiplies no frequency by
// more than 1, so that high powers of a spectrum stay bounded; one-sided
// interpolation would not.
var centred = [order]float64{-1, 0, 1, 2}

package density

import "gonum.org/v1/gonum/mat"

// Anderson speeds up an iteration x ← F(x) of densities towards a fixed point.
// Of the last images F(x) it takes that combination, with weights that sum to
// 1, for which the same combination of the residuals F(x)-x is smallest (in
// the sum of squares of the even functions): near the fixed point, where F is
// linear, that is where F would lead from there. Linear functionals that F
// keeps are kept, such as the Bhattacharyya parameter. (Anderson, Iterative
// procedures for nonlinear integral equations, J. ACM 12(4), 1965; Walker & Ni,
// Anderson acceleration for fixed-point iterations, SIAM J. Numer. Anal. 49(4),
// 2011, whose form with differences this is.)
//
// It holds the history of one iteration: use one for each.
type Anderson struct {
	image    []*Density // F(x), the last one last
	residual [][]float64
}

// andersonDepth is how many differences of images are combined. Thresholds
// take the same number of steps with 4 as with 12.
const andersonDepth = 5

// Next sets x, whose image under F is given, to the next density to try.
func (a *Anderson) Next(x, image *Density) {
	n := len(x.even)
	residual := make([]float64, n)
	for k := range residual {
		residual[k] = image.even[k] - x.even[k]
	}
	if len(a.image) > andersonDepth {
		a.image, a.residual = a.image[1:], a.residual[1:]
	}
	a.image, a.residual = append(a.image, image.Clone()), append(a.residual, residual)
	x.Copy(image)
	m := len(a.image) - 1
	if m == 0 {
		return
	}
	differences := mat.NewDense(n, m, nil)
	for k := range n {
		row := differences.RawRowView(k)
		for j := range row {
			row[j] = a.residual[j+1][k] - a.residual[j][k]
		}
	}
	var qr mat.QR
	qr.Factorize(differences)
	var share mat.VecDense
	// Differences that nearly depend on each other make shares large, at
	// worst so that the iteration does not settle: the error is not needed.
	_ = qr.SolveVecTo(&share, false, mat.NewVecDense(n, residual))
	for j := range m {
		for k := range x.even {
			x.even[k] -= share.AtVec(j) * (a.image[j+1].even[k] - a.image[j].even[k])
		}
	}
	x.settle()
}

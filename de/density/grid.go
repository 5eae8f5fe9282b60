package density

import (
	"fmt"
	"math"
	"sync"
)

// Grid is the pair of grids that densities live on, with the maps between
// them. It is immutable and safe for concurrent use.
//
// Variable side. Magnitudes x = |LLR| at the nodes k·Reach/Points. A symmetric
// density f(-x) = e^(-x) f(x) is held as the even function
// g(x) = e^(-x/2) f(x): convolving f convolves g, g's total is the
// Bhattacharyya parameter, and reliable messages carry almost none of it, so
// that a message beyond the grid's end is reflected there without changing
// that parameter. The mass at magnitude x is 2·cosh(x/2)·g(x).
//
// Check side. u = -ln tanh(x/2) adds at a check node (Richardson & Urbanke,
// IEEE Trans. Inf. Theory 47(2), 2001). Reliable messages have u near 0 with
// features on the scale of u itself, so one uniform grid would be too coarse
// there and too fine elsewhere. But u ≥ 0: sums below a bound involve only
// terms below it. So the convolution is done on a few levels, each covering a
// shorter range [0, U) with a finer step, cut off at U without any error below
// it; results are taken from the finest level that covers them.
type Grid struct {
	shape
	points int
	step   float64   // of x
	bulge  []float64 // 2·cosh(x/2), mass per g, with 1 at x=0 and half at the end
	levels []*level

	// Functionals of a density: sums over the nodes with these weights for g.
	errorWeight   []float64
	entropyWeight []float64
}

// shape says how far a grid reaches and how its levels are laid out.
type shape struct {
	// reach is the largest magnitude with a node of its own. What lies
	// beyond, error probabilities below e^-24, keeps its Bhattacharyya
	// parameter.
	reach float64
	// top is the range of the coarsest check-side level. What lies near its
	// end and beyond, magnitudes below 4e-5 whose information is x²/8, is
	// counted as erased.
	top float64
	// ratio is how much shorter the range of each level is, and count how
	// many there are: with 256 points the finest step is 1e-8, a magnitude
	// of 19.
	ratio float64
	count int
	// cells is the size of each level per point of the variable side.
	cells int
	// damping is the exponent D of the factor e^(-Du/U) under which a
	// level's convolution is done, so that what wraps around from [U, 2U)
	// returns reduced by e^(-D), while rounding grows by e^(Du/U). With more
	// than 24, sums of hundreds of messages leave their range on 128 points.
	damping float64
}

// standard is the shape of NewGrid. TestGridShape holds the error that it
// leaves against a longer and finer one.
var standard = shape{reach: 24, top: 12, ratio: 8, count: 8, cells: 2, damping: 20}

// long is the shape of NewLongGrid: with twice the points, magnitudes and the
// coarsest level are divided as with the standard shape.
var long = shape{reach: 48, top: 12, ratio: 8, count: 12, cells: 1, damping: 22}

// MinPoints and MaxPoints bound the number of points of a Grid.
const (
	MinPoints = 64
	MaxPoints = 1 << 16
)

var grids sync.Map // blueprint → *Grid

type blueprint struct {
	points int
	shape  shape
}

// NewGrid returns the grid with the given number of points on the variable
// side, a power of two from MinPoints to MaxPoints; each check-side level has
// twice as many cells. Grids are built once and shared. The error of a threshold
// falls with the sixth power of the number of points: 256 give about 1e-7 of
// the parameter for most ensembles, down to 1e-8 and less.
func NewGrid(points int) (*Grid, error) { return shared(blueprint{points, standard}) }

// NewLongGrid returns a grid that reaches twice as far and has levels for more
// reliable messages, for error probabilities below 1e-6 of ensembles with
// variable nodes of degree 2. Otherwise it is like NewGrid, with which half as
// many points give the same steps in two thirds of the time.
func NewLongGrid(points int) (*Grid, error) { return shared(blueprint{points, long}) }

func shared(b blueprint) (*Grid, error) {
	if b.points < MinPoints || b.points > MaxPoints || b.points&(b.points-1) != 0 {
		return nil, fmt.Errorf("grid points %d: must be a power of two from %d to %d", b.points, MinPoints, MaxPoints)
	}
	if g, ok := grids.Load(b); ok {
		return g.(*Grid), nil
	}
	g, _ := grids.LoadOrStore(b, buildGrid(b.points, b.shape))
	return g.(*Grid), nil
}

func buildGrid(points int, s shape) *Grid {
	g := &Grid{
		shape:         s,
		points:        points,
		step:          s.reach / float64(points),
		bulge:         make([]float64, points+1),
		errorWeight:   make([]float64, points+1),
		entropyWeight: make([]float64, points+1),
	}
	for k := range g.bulge {
		x := float64(k) * g.step
		g.bulge[k] = 2 * math.Cosh(x/2)
		switch k {
		case 0:
			g.bulge[k] = 1
		case points:
			g.bulge[k] /= 2
		}
		g.errorWeight[k] = g.bulge[k] / (1 + math.Exp(x))
		g.entropyWeight[k] = g.bulge[k] * binaryEntropy(x)
	}
	// The error probability goes like 1/2 - x/4 near magnitude 0, so that the
	// sum over the nodes misses, by the Euler-Maclaurin formula, step²/12 of
	// that slope times the density there; the density, without a message
	// erased for certain, is the even extrapolation from the next two nodes.
	g.errorWeight[1] -= g.bulge[1] * g.step / 48 * 4 / 3
	g.errorWeight[2] += g.bulge[2] * g.step / 48 * 1 / 3
	top := s.top
	for l := range s.count {
		g.levels = append(g.levels, newLevel(g, l, top))
		top /= s.ratio
	}
	return g
}

// binaryEntropy is that of a bit whose LLR is x ≥ 0, in bits.
func binaryEntropy(x float64) float64 {
	e := math.Exp(-x)
	return (math.Log1p(e) + x*e/(1+e)) / math.Ln2
}

// Points returns the number of points on the variable side.
func (g *Grid) Points() int { return g.points }

// place returns the stencil that puts a mass of magnitude x on the grid, in
// terms of mass; what its weights lack to 1 is mass at infinity. At 0 it is
// folded, since every function of a symmetric density is even; at the end, and
// beyond it, the Bhattacharyya parameter is kept.
func (g *Grid) place(x float64) stencil {
	last := g.points - order + 1
	cell := math.Floor(x / g.step)
	k := int(math.Min(cell, float64(g.points)))
	switch {
	case k < g.points-order/2+1:
		first := k - order/2 + 1
		s := stencil{first: int32(max(first, 0))}
		for i, w := range lagrange(x/g.step-cell, centred) {
			if n := first + i; n < 0 {
				s.weight[-n] += w
			} else {
				s.weight[n-int(s.first)] += w
			}
		}
		return s
	case k < g.points:
		before := math.Exp(g.step / 2)
		share := (before - math.Exp((float64(k+1)*g.step-x)/2)) / (before - 1)
		s := stencil{first: int32(last)}
		s.weight[k-last], s.weight[k+1-last] = 1-share, share
		return s
	default:
		s := stencil{first: int32(last)}
		s.weight[order-1] = math.Exp((g.reach - x) / 2)
		return s
	}
}

// toU maps a magnitude to the check side and back, u = -ln tanh(x/2), which is
// its own inverse; without cancellation at either end.
func toU(x float64) float64 {
	e := math.Exp(-x)
	return math.Log1p(e) - math.Log(-math.Expm1(-x))
}

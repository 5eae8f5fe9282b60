package density

import (
	"math"
	"slices"

	"tannery/de/channel"
)

// Project puts a channel's LLR density on the grid. Atoms are spread over
// their neighbours; the continuous part is integrated cell by cell against the
// same weights, with Gauss-Legendre points as atoms, cells being halved until
// the mass of the halves agrees with that of the whole.
func (g *Grid) Project(c channel.Density) *Density {
	d := g.NewDensity()
	for _, a := range c.Atoms {
		d.put(a.Magnitude, a.Mass)
	}
	if c.PDF != nil {
		end := math.Min(c.End, g.reach)
		for low := 0.0; low < end; low += g.step {
			d.integrate(c.PDF, low, math.Min(low+g.step, end), projectionDepth)
		}
		if c.End > g.reach {
			// Beyond the grid only the Bhattacharyya parameter counts. It
			// falls like e^(-x/2), so a few more units say all.
			const beyond = 64
			for low := g.reach; low < math.Min(c.End, g.reach+beyond); low++ {
				d.integrate(c.PDF, low, math.Min(low+1, c.End), projectionDepth)
			}
		}
	}
	d.settle()
	return d
}

// Refine returns about the same density on a grid of the same kind with twice
// as many points, to go on from: what is not smooth on the scale of the grid,
// besides a mass at 0, comes out distorted.
func (g *Grid) Refine(d *Density) *Density {
	if g.shape != d.grid.shape || g.points != 2*d.grid.points {
		panic("density: Refine between grids that do not fit")
	}
	fine := g.NewDensity()
	n := d.grid.points
	value := slices.Clone(d.even)
	// What stands at 0 beyond the even extrapolation is a mass of its own.
	value[0] = (4*d.even[1] - d.even[2]) / 3
	at := func(k int) float64 {
		if k < 0 {
			k = -k
		}
		if k > n {
			k = 2*n - k
		}
		return value[k]
	}
	for k := range n + 1 {
		fine.even[2*k] = value[k] / 2
		if k < n {
			fine.even[2*k+1] = (9*(at(k)+at(k+1)) - at(k-1) - at(k+2)) / 32
		}
	}
	fine.even[0] += d.even[0] - value[0]
	fine.settle()
	return fine
}

// put adds a mass at magnitude x.
func (d *Density) put(x, mass float64) {
	s := d.grid.place(x)
	for i, w := range s.weight {
		k := int(s.first) + i
		d.even[k] += mass * w / d.grid.bulge[k]
	}
}

const (
	// projectionDepth is how often a cell may be halved: densities on the
	// scale of 2^-30 cells have no information left to lose.
	projectionDepth = 30
	// projectionTolerance is the mass by which halving may change a cell.
	projectionTolerance = 1e-14
)

// legendre has the nodes on (0, 1) and weights of the Gauss-Legendre rule
// with 8 points on (-1, 1) (Abramowitz & Stegun, Handbook of Mathematical
// Functions, 1964, table 25.4).
var legendre = [4][2]float64{
	{0.1834346424956498, 0.3626837833783620},
	{0.5255324099163290, 0.3137066458778873},
	{0.7966664774136267, 0.2223810344533745},
	{0.9602898564975363, 0.1012285362903763},
}

// integrate adds the mass of pdf on (low, high).
func (d *Density) integrate(pdf func(float64) float64, low, high float64, depth int) {
	if depth > 0 {
		middle := (low + high) / 2
		whole, halves := mass(pdf, low, high), mass(pdf, low, middle)+mass(pdf, middle, high)
		if math.Abs(whole-halves) > projectionTolerance {
			d.integrate(pdf, low, middle, depth-1)
			d.integrate(pdf, middle, high, depth-1)
			return
		}
	}
	centre, half := (low+high)/2, (high-low)/2
	for _, n := range legendre {
		for _, x := range [2]float64{centre - half*n[0], centre + half*n[0]} {
			if m := half * n[1] * pdf(x); m != 0 {
				d.put(x, m)
			}
		}
	}
}

func mass(pdf func(float64) float64, low, high float64) float64 {
	centre, half := (low+high)/2, (high-low)/2
	sum := 0.0
	for _, n := range legendre {
		sum += n[1] * (pdf(centre-half*n[0]) + pdf(centre+half*n[0]))
	}
	return half * sum
}

package density

import (
	"math"
	"slices"
)

// Density is the density of an LLR message, given that a zero was sent, on a
// Grid. It is symmetric by construction, since only the even function
// g(x) = e^(-x/2) f(x) is stored, and its mass is 1 by construction, since the
// mass at infinity (bits known for certain) is what the finite mass lacks.
type Density struct {
	grid     *Grid
	even     []float64 // g at the nodes; at the first and last one, all of it
	infinite float64
}

// NewDensity returns the density of a bit known for certain.
func (g *Grid) NewDensity() *Density {
	return &Density{grid: g, even: make([]float64, g.points+1), infinite: 1}
}

// Clone returns an independent copy.
func (d *Density) Clone() *Density {
	return &Density{d.grid, slices.Clone(d.even), d.infinite}
}

// Copy sets d to src, which must be of the same grid.
func (d *Density) Copy(src *Density) {
	if d.grid != src.grid {
		panic("density: Copy between grids")
	}
	copy(d.even, src.even)
	d.infinite = src.infinite
}

// Combine sets d to the sum of densities of its grid with weights that sum to
// 1: a mixture where all are positive, else an interpolation or extrapolation.
// Of may include d.
func (d *Density) Combine(weight []float64, of []*Density) {
	for k := range d.even {
		sum := 0.0
		for i, w := range weight {
			sum += w * of[i].even[k]
		}
		d.even[k] = sum
	}
	d.settle()
}

// Grid returns the grid that d lives on.
func (d *Density) Grid() *Grid { return d.grid }

// settle sets the mass at infinity to what the finite mass lacks to 1.
func (d *Density) settle() {
	d.infinite = 1 - dot(d.grid.bulge, d.even)
}

// Infinite returns the mass at infinity: messages known for certain.
func (d *Density) Infinite() float64 { return d.infinite }

// Erased returns the mass at zero: messages that say nothing.
func (d *Density) Erased() float64 { return d.even[0] }

// Masses calls yield for each node in increasing order of magnitude with the
// mass there, and last for magnitude +Inf. The masses sum to 1; where the
// density is not smooth on the scale of the grid some are slightly negative.
func (d *Density) Masses(yield func(magnitude, mass float64) bool) {
	for k, g := range d.even {
		if !yield(float64(k)*d.grid.step, g*d.grid.bulge[k]) {
			return
		}
	}
	yield(math.Inf(1), d.infinite)
}

// Bhattacharyya returns E[e^(-L/2)], from 0 to 1: it multiplies at variable
// nodes, and falls strictly in an evolution that succeeds.
func (d *Density) Bhattacharyya() float64 {
	n := len(d.even) - 1
	sum := 0.0
	for _, g := range d.even[1:n] {
		sum += g
	}
	return d.even[0] + 2*sum + d.even[n]
}

// ErrorProbability returns that of a decision by the message's sign, an
// erased message counted half. It holds to fourth order in the step for
// messages whose density is smooth near magnitude 0, as those from variable
// nodes are; to second order for channels projected, and to first order in the
// mass of atoms nearer to 0 than three steps.
func (d *Density) ErrorProbability() float64 { return dot(d.grid.errorWeight, d.even) }

// Entropy returns that of the bit given the message, in bits; 1 minus it is
// the mutual information of bit and message.
func (d *Density) Entropy() float64 { return dot(d.grid.entropyWeight, d.even) }

// Moment returns E[tanh(|L|/2)^(2k)] for k ≥ 1; it multiplies at check nodes.
// The entropy is 1 - Σ_k Moment(k)/(2k(2k-1))/ln 2.
func (d *Density) Moment(k int) float64 {
	sum := d.infinite
	for node, mass := range d.Masses {
		if !math.IsInf(node, 1) {
			sum += mass * math.Pow(math.Tanh(node/2), float64(2*k))
		}
	}
	return sum
}

func dot(weight, value []float64) float64 {
	value = value[:len(weight)]
	sum := 0.0
	for k, w := range weight {
		sum += w * value[k]
	}
	return sum
}

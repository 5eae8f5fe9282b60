package density

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"

	"tannery/ensembles"
)

// plainStep does a step of an evolution on the same grids and levels as
// CheckNode and VariableNode, but with gonum's transforms, and with powers one
// degree at a time: an oracle for the results and a yardstick for the speed.
type plainStep struct {
	grid        *Grid
	lambda, rho ensembles.Distribution
	real        *fourier.FFT
	cosine      *fourier.DCT
	cells       []float64
	spectrum    []complex128
	channel     []float64
	wave        []float64
}

func newPlainStep(g *Grid, e ensembles.Ensemble, channel *Density) *plainStep {
	size := g.points * g.cells
	p := &plainStep{
		grid: g, lambda: e.Lambda, rho: e.Rho,
		real:     fourier.NewFFT(size),
		cosine:   fourier.NewDCT(g.points + 1),
		cells:    make([]float64, size),
		spectrum: make([]complex128, size/2+1),
		channel:  make([]float64, g.points+1),
		wave:     make([]float64, g.points+1),
	}
	p.cosine.Transform(p.channel, channel.even)
	return p
}

func (p *plainStep) check(dst, src *Density) {
	clear(dst.even)
	known := 0.0
	for l, v := range p.grid.levels {
		v.spread(p.cells, src.even, src.infinite)
		p.real.Coefficients(p.spectrum, p.cells)
		for k, z := range p.spectrum {
			sum := complex(0, 0)
			for _, t := range p.rho {
				sum += complex(t.Fraction, 0) * integerPower(z, t.Degree-1)
			}
			p.spectrum[k] = sum
		}
		p.real.Sequence(p.cells, p.spectrum)
		for j := range p.cells {
			p.cells[j] /= 2 // gonum multiplies by the size, the levels expect half of it
		}
		v.collect(dst.even, p.cells)
		if l == 0 {
			known = dot(v.keep, p.cells)
		}
	}
	erased := 1 - known
	dst.even[0] += erased
	dst.settle()
}

func (p *plainStep) variable(dst, src *Density) {
	p.cosine.Transform(p.wave, src.even)
	for k, z := range p.wave {
		sum := 0.0
		for _, t := range p.lambda {
			sum += t.Fraction * math.Pow(z, float64(t.Degree-1))
		}
		p.wave[k] = sum * p.channel[k] / float64(2*p.grid.points)
	}
	p.cosine.Transform(dst.even, p.wave)
	dst.settle()
}

// integerPower returns zⁿ by repeated squaring.
func integerPower(z complex128, n int) complex128 {
	if n > 64 {
		return cmplx.Pow(z, complex(float64(n), 0))
	}
	power := complex(1, 0)
	for ; n > 0; n-- {
		power *= z
	}
	return power
}

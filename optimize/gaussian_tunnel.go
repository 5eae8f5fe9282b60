package optimize

import (
	"math"
	"sync"

	"tannery/de"
	"tannery/ensembles"
)

// Under the Gaussian approximation (Chung, Richardson & Urbanke, IEEE Trans.
// Inf. Theory 47(2), 2001) decoding succeeds at the channel's mean LLR s if
// Σ λᵢ φ(s+(i-1)u(r)) < r for all r in (0,φ(s)), so F(p,i) is
// φ(s+(i-1)u(r))/r. A point is p = ln m where r = φ(m): m is the mean of the
// normal messages that do as well as those from variable nodes, and the
// points are m > s. As m → ∞ only λ₂ counts, and the limit is that of the
// stability condition with Π(j-1)^ρⱼ in place of ρ'(1); the true condition
// λ₂ρ'(1)e^(-s/4) ≤ 1 is stronger, and is a row of its own.
type gaussianTunnel struct {
	rho    ensembles.Distribution
	s      float64
	checks *gaussianChecks

	u  []float64 // on the grid; made when first used
	by map[int][]float64

	last, lastU, lastR float64 // the point asked for last
}

const (
	// The grid is in steps of gaussianStep in ln m up to gaussianTail, from
	// where on u differs from m by little more than a constant.
	gaussianStep     = 0.02
	gaussianTailStep = 0.05
	gaussianTail     = 10.
	// The grid ends where F differs from its limit by a term that is of one
	// sign, and before φ underflows.
	gaussianEnd = 1500.
	// gaussianBelow is how far below the Shannon limit's s the grid begins:
	// the approximation may be optimistic.
	gaussianBelow = 0.5
)

// gaussianChecks holds on the grid r and, for each check degree, φ⁻¹ of what
// comes out; shared by the tunnels of a search.
type gaussianChecks struct {
	p, r []float64
	mu   sync.Mutex
	by   map[int][]float64
}

func newGaussianChecks(least float64) *gaussianChecks {
	g := &gaussianChecks{by: map[int][]float64{}}
	for p := math.Log(least); p < math.Log(gaussianEnd); {
		g.p = append(g.p, p)
		g.r = append(g.r, de.Phi(math.Exp(p)))
		if p < math.Log(gaussianTail) {
			p += gaussianStep
		} else {
			p += gaussianTailStep
		}
	}
	return g
}

func (g *gaussianChecks) column(degree int) []float64 {
	g.mu.Lock()
	defer g.mu.Unlock()
	v, found := g.by[degree]
	if !found {
		v = make([]float64, len(g.r))
		for k, r := range g.r {
			v[k] = checkMean(degree, r)
		}
		g.by[degree] = v
	}
	return v
}

// checkMean returns φ⁻¹(1-(1-r)^(j-1)).
func checkMean(j int, r float64) float64 {
	return de.GaussianCheck(ensembles.Distribution{{Degree: j, Fraction: 1}}, r)
}

func (g *gaussianTunnel) grid() []float64 { return g.checks.p }

// point returns u and r at p.
func (g *gaussianTunnel) point(p float64) (u, r float64) {
	if p != g.last || g.lastR == 0 {
		g.last, g.lastR = p, de.Phi(math.Exp(p))
		g.lastU = de.GaussianCheck(g.rho, g.lastR)
	}
	return g.lastU, g.lastR
}

// outside tells whether p is not a point at this s: m ≤ s is not asked for.
func (g *gaussianTunnel) outside(p float64) bool { return math.Exp(p) <= g.s }

func (g *gaussianTunnel) at(p float64, degree int) float64 {
	if g.outside(p) {
		return 0
	}
	u, r := g.point(p)
	return de.Phi(g.s+float64(degree-1)*u) / r
}

func (g *gaussianTunnel) column(degree int) []float64 {
	if g.u == nil {
		g.u = make([]float64, len(g.checks.p))
		for _, t := range g.rho {
			for k, v := range g.checks.column(t.Degree) {
				g.u[k] += t.Fraction * v
			}
		}
		g.by = map[int][]float64{}
	}
	v, found := g.by[degree]
	if !found {
		v = make([]float64, len(g.u))
		for k, u := range g.u {
			if !g.outside(g.checks.p[k]) {
				v[k] = de.Phi(g.s+float64(degree-1)*u) / g.checks.r[k]
			}
		}
		g.by[degree] = v
	}
	return v
}

func (g *gaussianTunnel) price(points, weights []float64, degrees []int, out []float64) {
	for k, p := range points {
		if g.outside(p) {
			continue
		}
		u, r := g.point(p)
		for i, degree := range degrees {
			v := de.Phi(g.s+float64(degree-1)*u) / r
			if v < negligiblePower {
				break
			}
			out[i] += weights[k] * v
		}
	}
}

// slopeStep is the relative step of the difference that stands for φ': its
// error is of the square, and derivatives only steer.
const slopeStep = 1e-4

// phiSlope returns φ'(x).
func phiSlope(x float64) float64 {
	return (de.Phi(x*(1+slopeStep)) - de.Phi(x*(1-slopeStep))) / (2 * slopeStep * x)
}

func (g *gaussianTunnel) byCheck(p float64, lambda ensembles.Distribution, checks []int) []float64 {
	out := make([]float64, len(checks))
	if g.outside(p) {
		return out
	}
	u, r := g.point(p)
	var slope float64 // of Σ λᵢ F by u
	for _, t := range lambda {
		n := float64(t.Degree - 1)
		slope += t.Fraction * n * phiSlope(g.s+n*u)
	}
	for k, j := range checks {
		out[k] = slope / r * checkMean(j, r)
	}
	return out
}

// byMean returns the derivative of Σ λᵢ F(p,i) by s.
func (g *gaussianTunnel) byMean(p float64, lambda ensembles.Distribution) float64 {
	if g.outside(p) {
		return 0
	}
	u, r := g.point(p)
	var slope float64
	for _, t := range lambda {
		slope += t.Fraction * phiSlope(g.s+float64(t.Degree-1)*u)
	}
	return slope / r
}

package optimize

import (
	"math"
	"sync"

	"tannery/ensembles"
)

// On the BEC decoding succeeds if ε·λ(y(x)) < x for all x in (0,1], where
// y(x) = 1-ρ(1-x), so F(p,i) = y^(i-1)/x and the threshold is 1/t: for given ρ
// the best λ is found by one linear programme, with no search over ε.
//
// A point is p = ln((1-y)/y), so that y and 1-y are both known to full
// precision, and x solves ρ(1-x) = 1-y. As y → 0, F(p,2) → ρ'(1) and F(p,i) → 0
// for i > 2: the stability condition, a row on λ₂. As y → 1, F(p,i) → 1, which
// never binds. A point fixed in y rather than x makes the powers of y, the bulk
// of the work, the same for every ρ.
type erasureTunnel struct {
	rho    ensembles.Distribution
	powers *erasurePowers

	x  []float64 // on the grid; made when first used
	by map[int][]float64

	last, lastX, lastLog float64 // the point asked for last, with x and ln y
}

const (
	// The grid is in steps of erasureStep in p where e^p ≈ -ln y and each
	// factor of e is a feature's width, and of erasureTail where y is small
	// and Σ λᵢ F(p,i) is nearly a polynomial of low degree in y.
	erasureStep = 0.05
	erasureTail = 0.2
	tailFrom    = 2.
	// The grid begins where even the largest degree has y^(i-1) > 0.99 and
	// F falls as x rises, and ends where F differs from its limit at y = 0 by
	// less than anything asked for.
	erasureNear = 0.01
	erasureEnd  = 18.
)

// erasurePowers holds the powers of y on the grid by degree, shared by the
// tunnels of a search.
type erasurePowers struct {
	p  []float64
	mu sync.Mutex
	by map[int][]float64
}

func newErasurePowers(largest int) *erasurePowers {
	s := &erasurePowers{by: map[int][]float64{}}
	for p := math.Log(erasureNear / float64(largest)); p < erasureEnd; {
		s.p = append(s.p, p)
		if p < tailFrom {
			p += erasureStep
		} else {
			p += erasureTail
		}
	}
	return s
}

func (s *erasurePowers) column(degree int) []float64 {
	s.mu.Lock()
	defer s.mu.Unlock()
	v, found := s.by[degree]
	if !found {
		v = make([]float64, len(s.p))
		for k, p := range s.p {
			v[k] = math.Exp(float64(degree-1) * logErasure(p))
		}
		s.by[degree] = v
	}
	return v
}

// logErasure returns ln y at p.
func logErasure(p float64) float64 { return -softplus(p) }

// softplus returns ln(1+e^p).
func softplus(p float64) float64 {
	if p > 0 {
		return p + math.Log1p(math.Exp(-p))
	}
	return math.Log1p(math.Exp(p))
}

// inverseTolerance is the relative step after which Newton's method for ln(1-x)
// ends: the error left is of its square.
const inverseTolerance = 1e-10

// checkInverse returns ln(1-x) for the x with ρ(1-x) = 1-y, given ln(1-y) < 0,
// to full relative precision. In z = ln(1-x), ln ρ(e^z) is convex and
// increasing, so Newton's method converges, and from the right without a
// detour; the start is there by Jensen's inequality.
func checkInverse(rho ensembles.Distribution, logarithm float64) float64 {
	if len(rho) == 1 {
		return logarithm / float64(rho[0].Degree-1)
	}
	slope := 0.
	for _, t := range rho {
		slope += t.Fraction * float64(t.Degree-1)
	}
	z := logarithm / slope
	const steps = 60 // a handful is usual
	for range steps {
		// ρ(e^z)-1 where that is small, ρ(e^z) relative to its largest term
		// otherwise.
		var value, derivative float64
		if z > -1e-3 {
			var less float64
			for _, t := range rho {
				n := float64(t.Degree - 1)
				v := math.Expm1(n * z)
				less += t.Fraction * v
				derivative += t.Fraction * n * (1 + v)
			}
			value, derivative = math.Log1p(less), derivative/(1+less)
		} else {
			least := float64(rho[0].Degree - 1)
			for _, t := range rho {
				n := float64(t.Degree - 1)
				v := t.Fraction * math.Exp((n-least)*z)
				value += v
				derivative += n * v
			}
			value, derivative = least*z+math.Log(value), derivative/value
		}
		step := (logarithm - value) / derivative
		z += step
		if math.Abs(step) <= inverseTolerance*math.Abs(z) {
			break
		}
	}
	return z
}

// point returns x and ln y at p.
func (e *erasureTunnel) point(p float64) (x, logY float64) {
	if p != e.last || e.lastX == 0 {
		e.last, e.lastX, e.lastLog = p, -math.Expm1(checkInverse(e.rho, -softplus(-p))), logErasure(p)
	}
	return e.lastX, e.lastLog
}

// erasureY returns y = 1-ρ(1-x), precise for small x too.
func erasureY(rho ensembles.Distribution, x float64) float64 {
	y, l := 0., math.Log1p(-x)
	for _, t := range rho {
		y -= t.Fraction * math.Expm1(float64(t.Degree-1)*l)
	}
	return y
}

// logit returns the point p at y.
func logit(y float64) float64 { return math.Log1p(-y) - math.Log(y) }

func (e *erasureTunnel) grid() []float64 { return e.powers.p }

func (e *erasureTunnel) at(p float64, degree int) float64 {
	x, l := e.point(p)
	return math.Exp(float64(degree-1)*l) / x
}

func (e *erasureTunnel) column(degree int) []float64 {
	if e.x == nil {
		e.x = make([]float64, len(e.powers.p))
		for k, p := range e.powers.p {
			e.x[k], _ = e.point(p)
		}
		e.by = map[int][]float64{}
	}
	v, found := e.by[degree]
	if !found {
		v = make([]float64, len(e.x))
		for k, power := range e.powers.column(degree) {
			v[k] = power / e.x[k]
		}
		e.by[degree] = v
	}
	return v
}

const (
	// negligiblePower ends a sum over falling powers: what is left does not
	// change a double.
	negligiblePower = 1e-20
	// resync is the number of products after which a running power is
	// computed anew, so that its rounding does not build up.
	resync = 32
)

func (e *erasureTunnel) price(points, weights []float64, degrees []int, out []float64) {
	for k, p := range points {
		x, l := e.point(p)
		addPowers(weights[k]/x, l, degrees, out)
	}
}

// addPowers adds w·e^((i-1)l) for each degree i, l ≤ 0, to out.
func addPowers(w, l float64, degrees []int, out []float64) {
	y := math.Exp(l)
	power, last := 0., 0
	for i, degree := range degrees {
		if degree == last+1 && i%resync != 0 {
			power *= y
		} else {
			power = math.Exp(float64(degree-1) * l)
		}
		if power < negligiblePower {
			break
		}
		last = degree
		out[i] += w * power
	}
}

// byCheck follows from ρ(1-x) = 1-y at fixed y: with q = 1-x,
// dx/dρⱼ = q^(j-1)/ρ'(q), and F is as 1/x.
func (e *erasureTunnel) byCheck(p float64, lambda ensembles.Distribution, checks []int) []float64 {
	z := checkInverse(e.rho, -softplus(-p))
	x := -math.Expm1(z)
	var height, slope float64
	l := logErasure(p)
	for _, t := range lambda {
		height += t.Fraction * math.Exp(float64(t.Degree-1)*l)
	}
	// q·ρ'(q), so that q^(j-1)/ρ'(q) = q^j/(qρ'(q)).
	for _, t := range e.rho {
		slope += t.Fraction * float64(t.Degree-1) * math.Exp(float64(t.Degree-1)*z)
	}
	out := make([]float64, len(checks))
	for k, j := range checks {
		out[k] = -height / (x * x) * math.Exp(float64(j)*z) / slope
	}
	return out
}

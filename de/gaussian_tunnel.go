package de

import (
	"math"

	"tannery/ensembles"
)

// Under the Gaussian approximation decoding succeeds at the channel's mean
// LLR s if
//
//	h(s,r) = Σᵢ λᵢ φ(s+(i-1)u(r)) < r  for all r in (0,φ(s)).
//
// For r ≥ φ(s) it holds anyhow. Since h falls with s, each r alone asks for s
// above the root S(r) of h(s,r) = r, and the threshold is the supremum of S.
// No evolution is run. The coordinate is l = -ln r, and the equation is solved
// as
//
//	F(s) = ln Σᵢ λᵢ e^(-E(s+(i-1)u)) + l = 0,  E = -ln φ.
//
// E is increasing and concave, so F is decreasing and convex, and Newton's
// method converges to the root from the left at once, from the right after
// one step.
//
// As r → 0, φ⁻¹(nr) → φ⁻¹(r) - 4 ln n, only λ₂ counts, and S tends to
// 4 (ln λ₂ + Σⱼ ρⱼ ln(j-1)), the stability condition of the approximation.
// Since S(r) < φ⁻¹(r), small l need no search once some S is known. For large
// l the search ends by a bound: φ(x) = e^(-x/4) G(x) with G falling and ln G
// convex (1/cosh √(2y) is a Laplace transform, that of a Brownian exit time,
// so G is completely monotone). With κ = 4 Σⱼ ρⱼ ln(j-1), therefore,
// u ≥ m-κ where m = φ⁻¹(r), and
//
//	h(s,r)/r ≤ Σᵢ λᵢ e^(-(s+(i-2)m-(i-1)κ)/4) · max(1, G(s+(i-1)(m-κ))/G(m)),
//
// which falls as m grows if no exponent rises: once it is below 1, h < r from
// there on.

const (
	// tunnelPointsPerE is the number of points of the first grid while l
	// grows e-fold, and tunnelEnd the l where it ends at the latest: S there
	// differs from its limit by terms of order 1/l that are of one sign.
	tunnelPointsPerE = 12
	tunnelEnd        = 1500
	// tunnelStart is the least l looked at: s is about 2l there, so that
	// thresholds up to σ = 10⁴ are found.
	tunnelStart = 1e-8
	// tunnelSamplesFrom and tunnelSamplesTo bound the l of the first samples.
	tunnelSamplesFrom = 0.1
	tunnelSamplesTo   = 20
	// tunnelMismatch is the error of the cubic through two points, as seen
	// in the middle and relative to S, above which an interval is halved.
	tunnelMismatch = 1e-4
	// tunnelDepth bounds the halvings of an interval of the first grid.
	tunnelDepth = 12
	// rootTolerance is the relative step at which Newton's method for S ends;
	// convergence is quadratic.
	rootTolerance = 1e-10
)

// tunnelPoint is S at one l.
type tunnelPoint struct {
	v        float64 // ln l
	l, u     float64
	s, slope float64 // S and dS/dv; 0 and 0 where any s is enough
}

// tunnelSearch looks for the supremum of S.
type tunnelSearch struct {
	e      *ensembles.Ensemble
	kappa  float64
	best   tunnelPoint
	points int
	maxima []tunnelPoint
}

// at evaluates S at ln l = v, starting Newton's method at the guess.
func (t *tunnelSearch) at(v, guess float64) tunnelPoint {
	t.points++
	p := tunnelPoint{v: v, l: math.Exp(v)}
	var du float64
	p.u, du = gaussianCheck(t.e.Rho, p.l)
	p.s = math.Max(guess, 0)
	for range 100 {
		f, fs, fu := variableExponent(t.e.Lambda, p.s, p.u)
		next := p.s + (p.l-f)/fs // F = l-f
		if next <= 0 {
			if p.s == 0 {
				p.slope = 0
				break
			}
			next = 0
		}
		p.slope = (1 - fu*du) / fs * p.l
		done := math.Abs(next-p.s) <= rootTolerance*next
		p.s = next
		if done {
			break
		}
	}
	if p.s > t.best.s {
		t.best = p
	}
	return p
}

// variableExponent returns -ln Σᵢ λᵢ φ(s+(i-1)u) and its derivatives by s and
// by u.
func variableExponent(lambda ensembles.Distribution, s, u float64) (f, fs, fu float64) {
	// Relative to the largest term, that of the smallest degree, nothing
	// underflows.
	least := float64(lambda[0].Degree - 1)
	l0, d0 := phiExponentSlope(s + least*u)
	sum := lambda[0].Fraction
	fs, fu = sum*d0, sum*d0*least
	var complement float64 // Σᵢ λᵢ (1-φᵢ)
	if l0 < math.Ln2 {
		complement = -sum * math.Expm1(-l0)
	}
	for _, t := range lambda[1:] {
		n := float64(t.Degree - 1)
		l, d := phiExponentSlope(s + n*u)
		w := t.Fraction * math.Exp(l0-l)
		sum += w
		fs += w * d
		fu += w * d * n
		if l0 < math.Ln2 {
			complement -= t.Fraction * math.Expm1(-l)
		}
	}
	if l0 < math.Ln2 && complement < 0.5 {
		f = -math.Log1p(-complement)
	} else {
		f = l0 - math.Log(sum)
	}
	return f, fs / sum, fu / sum
}

// run searches all l.
func (t *tunnelSearch) run() {
	for _, term := range t.e.Rho {
		t.kappa += 4 * term.Fraction * math.Log(float64(term.Degree-1))
	}
	if l2 := t.e.Lambda.Fraction(2); l2 > 0 {
		t.best.s = math.Max(0, t.kappa+4*math.Log(l2))
		t.best.l = math.Inf(1)
	}
	// A few samples give an S that spares most of the ends.
	for l := tunnelSamplesFrom; l < tunnelSamplesTo; l *= 2 {
		t.at(math.Log(l), t.best.s)
	}
	const step = 1. / tunnelPointsPerE
	a := t.at(math.Log(math.Max(tunnelStart, phiExponent(t.best.s))), t.best.s)
	for a.l < tunnelEnd && !t.closedFrom(a.l) {
		b := t.at(a.v+step, a.s+step*a.slope)
		t.refine(&a, &b, tunnelDepth)
		a = b
	}
}

// closedFrom tells whether h < r is certain for all -ln r ≥ l at the best s.
func (t *tunnelSearch) closedFrom(l float64) bool {
	return tailHolds(t.e, t.kappa, t.best.s, l)
}

// tailHolds tells whether h(s,r) < r for all r with -ln r ≥ l by the bound
// above.
func tailHolds(e *ensembles.Ensemble, kappa, s, l float64) bool {
	m := phiExponentInverse(l)
	if m < kappa {
		return false
	}
	var sum float64
	for _, t := range e.Lambda {
		x := s + float64(t.Degree-1)*(m-kappa)
		if x < m {
			sum += t.Fraction * math.Exp(l-phiExponent(x))
		} else {
			sum += t.Fraction * math.Exp((m-x)/4)
		}
	}
	return sum < 1
}

// refine looks for maxima of S between a and b, halving as long as the cubic
// through them does not foretell the middle and a value that counts may hide.
func (t *tunnelSearch) refine(a, b *tunnelPoint, depth int) {
	h := b.v - a.v
	foretold := (a.s+b.s)/2 + h/8*(a.slope-b.slope)
	m := t.at((a.v+b.v)/2, foretold)
	mismatch := math.Abs(m.s - foretold)
	highest := math.Max(m.s, math.Max(a.s, b.s))
	if highest+8*mismatch+h*math.Max(a.slope, -b.slope)/4 < t.best.s*(1-2*criticalSlack) {
		return
	}
	if depth > 0 && mismatch > tunnelMismatch*m.s {
		t.refine(a, &m, depth-1)
		t.refine(&m, b, depth-1)
		return
	}
	t.polish(a, &m)
	t.polish(&m, b)
}

// polish finds the maximum of S between a and b, if S rises at a and falls at
// b, as the root of its slope by the Illinois rule (Dowell & Jarratt, BIT 11,
// 1971): S is stationary there, so its error is of the order of the square.
func (t *tunnelSearch) polish(a, b *tunnelPoint) {
	if !(a.slope > 0 && b.slope < 0) {
		return
	}
	va, vb, fa, fb := a.v, b.v, a.slope, b.slope
	p := *a
	for side := 0; vb-va > polishTolerance; {
		v := (va*fb - vb*fa) / (fb - fa)
		last := p.v
		p = t.at(v, p.s)
		if math.Abs(v-last) < polishTolerance || p.slope == 0 {
			break
		}
		if p.slope > 0 {
			va, fa = v, p.slope
			if side > 0 {
				fb /= 2
			}
			side = 1
		} else {
			vb, fb = v, p.slope
			if side < 0 {
				fa /= 2
			}
			side = -1
		}
	}
	t.maxima = append(t.maxima, p)
}

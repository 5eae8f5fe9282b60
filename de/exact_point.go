package de

import (
	"math"

	"tannery/ensembles"
)

// The fixed points of the erasure recursion x ← ε·λ(1-ρ(1-x)) (Luby,
// Mitzenmacher, Shokrollahi & Spielman, IEEE Trans. Inf. Theory 47(2), 2001)
// are the solutions of ε = f(x) with
//
//	f(x) = x/λ(y),  y(x) = 1-ρ(1-x),
//
// and the recursion from x = 1 reaches 0 exactly if ε < f(x) for all x in
// (0,1]. In the coordinate t = ln x, with the elasticities
//
//	A = d ln λ/d ln y = yλ'(y)/λ(y),   B = d ln y/d ln x = x·y'/y,  y' = ρ'(1-x),
//
// the function g = ln f has slope 1-A·B and curvature
//
//	g″ = A·x²ρ″(1-x)/y - A·B(1-B) - V·B²,
//
// where V is the variance of the degree i-1 under the weights λᵢy^(i-1), whose
// mean is A.

// erasurePoint is f and what bounds it, at one x.
type erasurePoint struct {
	x, t float64 // x and ln x
	y    float64 // 1-ρ(1-x)
	f    float64 // x/λ(y); +Inf where λ(y) underflows
	g    float64 // ln f
	mean float64 // A
	sq   float64 // second moment of i-1, so that V = sq - A²
	dy   float64 // ρ'(1-x)
	d2y  float64 // ρ″(1-x)
	b    float64 // B

	slope, curvature float64 // of g in t
}

// resync is after how many products a running power is computed afresh, so
// that rounding does not build up over distributions of thousands of terms.
const resync = 32

// largestFactor is the largest step in degree for which a running power is
// advanced by repeated squaring; beyond it e^(n·ln y) is faster, and the
// rounding of squaring, which grows with the step, would show.
const largestFactor = 32

// check returns y = 1-ρ(z), ρ(z), ρ'(z) and ρ″(z) for z = 1-x, with y to full
// relative precision however small x is.
func check(rho ensembles.Distribution, x float64) (y, r, dr, d2r float64) {
	if x >= 1 {
		r = rho.Fraction(1)
		return 1 - r, r, rho.Fraction(2), 2 * rho.Fraction(3)
	}
	z := 1 - x
	l := logarithm(z, x)
	for _, t := range rho {
		n := float64(t.Degree - 1)
		var power, rest float64 // zⁿ and 1-zⁿ
		if a := n * l; a < -1 {
			power = math.Exp(a)
			rest = 1 - power
		} else {
			rest = -math.Expm1(a)
			power = 1 - rest
		}
		power *= t.Fraction
		y += t.Fraction * rest
		r += power
		dr += n * power
		d2r += n * (n - 1) * power
	}
	return y, r, dr / z, d2r / (z * z)
}

// variable returns λ(y)/y^(m-1) and the weighted sums of i-1 and (i-1)², all
// divided by the same power of the smallest degree m, which keeps them from
// underflowing. r is 1-y, which may be the more exact of the two.
func variable(lambda ensembles.Distribution, y, r float64) (sum, first, second, logY float64) {
	logY = math.NaN()
	least := lambda[0].Degree
	power, degree, products := 1.0, least, 0
	for _, t := range lambda {
		if step := t.Degree - degree; step <= largestFactor && products < resync {
			power *= ensembles.Power(y, step)
			products++
		} else {
			if logY != logY {
				logY = logarithm(y, r)
			}
			power = math.Exp(float64(t.Degree-least) * logY)
			products = 0
		}
		degree = t.Degree
		n := float64(t.Degree - 1)
		w := t.Fraction * power
		sum += w
		first += n * w
		second += n * n * w
	}
	return sum, first, second, logY
}

// logarithm returns ln y from y or r = 1-y, whichever is the smaller.
func logarithm(y, r float64) float64 {
	if r < 0.5 {
		return math.Log1p(-r)
	}
	return math.Log(y)
}

// erasureAt evaluates f at x in (0,1].
func erasureAt(e *ensembles.Ensemble, x float64) erasurePoint {
	p := erasurePoint{x: x, t: math.Log(x)}
	p.evaluate(e)
	return p
}

// erasureAtLog evaluates f at x = e^t, t ≤ 0.
func erasureAtLog(e *ensembles.Ensemble, t float64) erasurePoint {
	p := erasurePoint{x: math.Exp(t), t: t}
	p.evaluate(e)
	return p
}

// evaluate fills in what follows from x.
func (p *erasurePoint) evaluate(e *ensembles.Ensemble) {
	x := p.x
	var r float64
	p.y, r, p.dy, p.d2y = check(e.Rho, x)
	sum, first, second, logY := variable(e.Lambda, p.y, r)
	var power float64
	if n := e.Lambda[0].Degree - 1; n <= largestFactor {
		power = ensembles.Power(p.y, n)
	} else {
		if logY != logY {
			logY = logarithm(p.y, r)
		}
		power = math.Exp(float64(n) * logY)
	}
	p.f = x / (power * sum)
	p.g = math.Log(p.f)
	p.mean = first / sum
	p.sq = second / sum
	p.b = x * p.dy / p.y
	p.slope = 1 - p.mean*p.b
	p.curvature = p.mean*x*x*p.d2y/p.y - p.mean*p.b*(1-p.b) - (p.sq-p.mean*p.mean)*p.b*p.b
}

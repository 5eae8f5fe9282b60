package channel

import "math"

// solve returns the zero between low and high of a continuous function of
// opposite signs there, to the last bits of x or of the unit, whichever is
// greater, by inverse quadratic interpolation safeguarded by bisection (Chandrupatla, A new hybrid
// quadratic/bisection algorithm for finding the zero of a nonlinear function
// without using derivatives, Advances in Engineering Software 28(3), 1997).
// Where rounding has taken the change of sign away, the zero lies at an end,
// and solve returns the end with the smaller value.
func solve(low, high, unit float64, f func(float64) float64) float64 {
	a, b := high, low
	fa, fb := f(a), f(b)
	if fa == 0 || fb == 0 || (fa > 0) == (fb > 0) {
		if math.Abs(fa) < math.Abs(fb) {
			return a
		}
		return b
	}
	const (
		roundoff   = 0x1p-53
		iterations = 200 // bisection alone needs 64 for a bracket of one binade
	)
	t := 0.5
	for range iterations {
		x := a + t*(b-a)
		fx := f(x)
		c, fc := b, fb
		if (fx > 0) == (fa > 0) {
			c, fc = a, fa
		} else {
			b, fb = a, fa
		}
		a, fa = x, fx
		best, value := a, fa
		if math.Abs(fb) < math.Abs(fa) {
			best, value = b, fb
		}
		tolerance := 2 * roundoff * math.Max(math.Abs(best), unit) / math.Abs(b-a)
		if value == 0 || tolerance >= 0.5 {
			return best
		}
		// Interpolate where the quadratic through the three points is
		// monotone between them, else bisect.
		xi, phi := (a-b)/(c-b), (fa-fb)/(fc-fb)
		t = 0.5
		if phi*phi < xi && (1-phi)*(1-phi) < 1-xi {
			t = fa/(fb-fa)*fc/(fb-fc) + (c-a)/(b-a)*fa/(fc-fa)*fb/(fc-fb)
		}
		t = math.Min(1-tolerance, math.Max(tolerance, t))
	}
	return a
}

// solveLog is solve for a positive unknown, in its logarithm: capacities and
// entropies are close to powers of their parameters, so that the logarithm of
// one is nearly a straight line in the logarithm of the other.
func solveLog(low, high float64, f func(float64) float64) float64 {
	return math.Exp(solve(math.Log(low), math.Log(high), 1, func(u float64) float64 { return f(math.Exp(u)) }))
}

// atRate returns the x between low and high, an increasing measure of the
// signal, at which the capacity equals the rate. The function information
// returns the capacity and the equivocation, which add up to 1, each with
// full relative accuracy.
func atRate(rate, low, high float64, information func(x float64) (capacity, equivocation float64)) float64 {
	return solveLog(low, high, func(x float64) float64 {
		capacity, equivocation := information(x)
		if rate <= 0.5 {
			return math.Log(capacity / rate)
		}
		return math.Log((1 - rate) / equivocation)
	})
}

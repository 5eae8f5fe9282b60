package channel

import (
	"context"
	"math"

	"gonum.org/v1/gonum/mat"
)

// interiorPointSteps is far above the two or three dozen steps that channels
// of any size take.
const interiorPointSteps = 200

// interiorPoint maximises the mutual information over the distributions of
// the input by a primal-dual interior-point method (Boyd & Vandenberghe,
// Convex Optimization, 2004, section 11.7). With D(x) as in Capacity and the
// multiplier λ of Σp = 1, the conditions of Kuhn and Tucker are
//
//	D(x) + s(x) = λ,  p(x)·s(x) = μ → 0,  p, s > 0,
//
// and since ∂D(x)/∂p(x') = -A(x,x') with A = W diag(1/q) Wᵀ, a Newton step is
//
//	(A + diag(s/p)) dp + 1·dλ = μ/p + D - λ,  Σdp = 1 - Σp,  ds = (μ - s·dp)/p - s.
//
// Once the first condition holds, max D ≤ λ = Σp·D + nμ, so that the bounds
// of visit close as μ goes to 0.
func (s *inputSearch) interiorPoint(ctx context.Context) {
	const (
		start    = 0.1   // share of the uniform distribution to begin with
		boundary = 0.995 // share of the way to the boundary that is gone
		center   = 0.1   // μ after a step over μ before it
		careful  = 0.6   // the same, after a short step
		short    = 0.5   // a short step
	)
	n := len(s.rows)
	p, slack := make([]float64, n), make([]float64, n)
	for x, best := range s.result.Distribution {
		p[x] = (1-start)*best + start/float64(n)
	}
	s.visit(p)
	lambda := s.most + (s.most - s.mean)
	for x, d := range s.divergence {
		slack[x] = lambda - d
	}
	shrink := center
	var newton newtonStep
	for step := 0; step < interiorPointSteps && !s.closed() && ctx.Err() == nil; step++ {
		s.result.Iterations++
		mu := 0.0
		for x := range p {
			mu += p[x] * slack[x]
		}
		mu *= shrink / float64(n)
		dp, dLambda, ok := newton.solve(s, p, slack, lambda, mu)
		if !ok {
			return
		}
		length := 1.0
		ds := make([]float64, n)
		for x := range p {
			ds[x] = (mu-slack[x]*dp[x])/p[x] - slack[x]
			length = math.Min(length, stepToZero(p[x], dp[x], boundary))
			length = math.Min(length, stepToZero(slack[x], ds[x], boundary))
		}
		total := 0.0
		for x := range p {
			p[x] += length * dp[x]
			slack[x] += length * ds[x]
			total += p[x]
		}
		for x := range p {
			p[x] /= total
		}
		lambda += length * dLambda
		if shrink = center; length < short {
			shrink = careful
		}
		s.visit(p)
	}
}

// stepToZero returns the share of the step dv that takes v > 0 the given part
// of the way to 0, +Inf if it does not go there.
func stepToZero(v, dv, part float64) float64 {
	if dv >= 0 {
		return math.Inf(1)
	}
	return -part * v / dv
}

// newtonStep holds the matrices of a Newton step between calls.
type newtonStep struct {
	scaled   *mat.Dense
	hessian  *mat.SymDense
	cholesky mat.Cholesky
}

// solve returns the step from the point that was visited last; ok is false if
// it cannot be found.
func (w *newtonStep) solve(s *inputSearch, p, slack []float64, lambda, mu float64) (dp []float64, dLambda float64, ok bool) {
	n := len(p)
	if w.scaled == nil {
		w.scaled = mat.NewDense(n, len(s.output), nil)
		w.hessian = mat.NewSymDense(n, nil)
	}
	for x, row := range s.rows {
		for y, probability := range row {
			w.scaled.Set(x, y, probability/math.Sqrt(s.output[y]))
		}
	}
	w.hessian.SymOuterK(1, w.scaled)
	trace := 0.0
	for x := range p {
		trace += w.hessian.At(x, x)
		w.hessian.SetSym(x, x, w.hessian.At(x, x)+slack[x]/p[x])
	}
	// Equal rows leave the matrix singular to rounding once μ is small. A
	// ridge shortens the step between such rows, where length is all the same.
	for ridge := 0.0; !w.cholesky.Factorize(w.hessian); {
		grown := math.Max(1e-15*trace/float64(n), 100*ridge)
		if !(grown < trace) {
			return nil, 0, false
		}
		for x := range p {
			w.hessian.SetSym(x, x, w.hessian.At(x, x)+grown-ridge)
		}
		ridge = grown
	}
	right := mat.NewDense(n, 2, nil)
	for x := range p {
		right.Set(x, 0, mu/p[x]+s.divergence[x]-lambda)
		right.Set(x, 1, 1)
	}
	// Errors of SolveTo warn of the condition number; the bounds judge.
	_ = w.cholesky.SolveTo(right, right)
	sumFirst, sumSecond := 0.0, 0.0
	for x := range p {
		sumFirst += right.At(x, 0)
		sumSecond += right.At(x, 1)
	}
	dLambda = sumFirst / sumSecond
	dp = make([]float64, n)
	for x := range p {
		dp[x] = right.At(x, 0) - dLambda*right.At(x, 1)
		ok = true
		if math.IsNaN(dp[x]) || math.IsInf(dp[x], 0) {
			return nil, 0, false
		}
	}
	return dp, dLambda, ok
}

package de

import (
	"cmp"
	"context"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/ensembles"
)

// ExactEngine analyses the BEC, where density evolution is the scalar
// recursion x ← ε·λ(1-ρ(1-x)) (Luby, Mitzenmacher, Shokrollahi & Spielman,
// IEEE Trans. Inf. Theory 47(2), 2001). The zero value works.
type ExactEngine struct{}

var _ Engine = ExactEngine{}

// Method returns Exact.
func (ExactEngine) Method() Method { return Exact }

// evaluationError is the relative error allowed for the rounding of f at its
// minimum; tests hold the engine to it against arithmetic of 200 bits.
const evaluationError = 1e-13

// Threshold returns min over x in (0,1] of x/λ(1-ρ(1-x)), without iterating
// the recursion: the minimum is bracketed by a branch and bound whose
// remaining gap is the uncertainty. Critical lists the fixed points, and the
// limit at 0 where the stability condition is close. Iterations counts
// evaluations of the function.
func (ExactEngine) Threshold(ctx context.Context, e ensembles.Ensemble, f channel.Family) (Threshold, error) {
	if err := covers(Exact, f, bec); err != nil {
		return Threshold{}, err
	}
	if err := ctx.Err(); err != nil {
		return Threshold{}, err
	}
	if e.Lambda.Fraction(1) > 0 {
		return Threshold{Method: Exact, Warnings: []string{degreeOneWarning}}, nil
	}
	s := erasureSearch{e: &e}
	s.run()
	return Threshold{
		Method:      Exact,
		Value:       s.best,
		Uncertainty: s.best - s.lower + s.best*evaluationError,
		Critical:    s.critical(),
		Iterations:  s.points,
	}, nil
}

const degreeOneWarning = "variable nodes of degree 1: their bits are never corrected for certain, so the error probability has no threshold below which it tends to 0"

// critical lists the local minima within criticalSlack of the least. The end
// x = 1 is listed only if nothing else binds.
func (s *erasureSearch) critical() []Critical {
	minima := s.minima[:s.found]
	slices.SortFunc(minima, func(a, b localMinimum) int { return cmp.Compare(a.f, b.f) })
	// A minimum is found again only up to rounding.
	if len(minima) == 0 || minima[0].f > s.best*(1+boundTolerance) {
		return []Critical{{Entropy: 1}}
	}
	n := 0
	for n < len(minima) && minima[n].f <= s.best*(1+criticalSlack) {
		n++
	}
	critical := make([]Critical, n)
	for i, m := range minima[:n] {
		critical[i] = Critical{Entropy: m.x, Slack: m.f/minima[0].f - 1}
	}
	return critical
}

// negligibleError is the bit error probability at which a trace that is known
// to converge ends: below anything that is measured or asked for.
const negligibleError = 1e-30

// stallTolerance is the relative progress in x at which a trace has stalled:
// a few roundings.
const stallTolerance = 1e-15

// Trace iterates the recursion. On the BEC the entropy and the Bhattacharyya
// parameter of a message both equal its erasure probability x, and the error
// probability is x/2. Convergence is declared once x/λ(y(x))>ε holds from the
// current x down to 0, which the bounds of the threshold's search tell: at
// the latest below the smallest fixed point.
func (ExactEngine) Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error) {
	if err := covers(Exact, f, bec); err != nil {
		return Trace{}, err
	}
	if err := checkParameter(f, parameter); err != nil {
		return Trace{}, err
	}
	nodes := e.Lambda.Nodes()
	slope0 := e.Rho.Derivative(1)
	trace := Trace{Method: Exact, Parameter: parameter, Outcome: Exhausted}
	x, bit := parameter, parameter
	for i := 0; ; i++ {
		if err := ctx.Err(); err != nil {
			return Trace{}, err
		}
		y, _, _, _ := check(e.Rho, x)
		trace.Points = append(trace.Points, Point{
			Iteration:           i,
			ErrorProbability:    x / 2,
			Entropy:             x,
			Bhattacharyya:       x,
			CheckEntropy:        y,
			BitErrorProbability: bit / 2,
		})
		// λ(y)/y ≤ its value here and y/x ≤ ρ'(1) for all smaller x.
		next := parameter * e.Lambda.At(y)
		if x == 0 || bit/2 <= negligibleError && e.Lambda.Min() > 1 && next*slope0 < y {
			trace.Outcome = Converged
			break
		}
		if i > 0 && next >= x*(1-stallTolerance) {
			trace.Outcome = Stalled
			break
		}
		if i == iterations {
			break
		}
		bit = parameter * y * nodes.At(y)
		x = next
	}
	trace.Narrowest = narrowest(trace.Points)
	return trace, nil
}

// narrowest returns the index of the interior point from which the
// Bhattacharyya parameter falls by the least factor, -1 if there is none.
func narrowest(points []Point) int {
	least, index := math.Inf(1), -1
	for i := 1; i < len(points)-2; i++ {
		before := math.Log(points[i-1].Bhattacharyya / points[i].Bhattacharyya)
		here := math.Log(points[i].Bhattacharyya / points[i+1].Bhattacharyya)
		after := math.Log(points[i+1].Bhattacharyya / points[i+2].Bhattacharyya)
		if here < least && here <= before && here <= after {
			least, index = here, i
		}
	}
	return index
}

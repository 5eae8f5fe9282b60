package optimize

import (
	"context"
	"math"

	"tannery/ensembles"
)

// designer finds the best λ for a ρ.
type designer interface {
	// best finds the best λ on the given variable degrees, and the channel
	// parameter it reaches; near is a candidate for a similar ρ, or nil. The
	// error wraps ErrUnreachable if there is no λ.
	best(ctx context.Context, rho ensembles.Distribution, degrees []int, near *candidate) (*candidate, error)
	// at returns the linear programme of which the candidate is the answer.
	at(c *candidate) *design
	// free tells whether its analysis holds for any ρ, and not only for ρ on
	// two neighbouring degrees.
	free() bool
}

// The names of the limits, for Result.Binding.
const (
	limitVariable  = "variable degrees"
	limitCheck     = "check degrees"
	limitEdges     = "edges per bit"
	limitParity    = "degree-two parity"
	limitStability = "stability margin"
	limitDistinct  = "distinct degrees"
)

// The phases, with the fraction of the work that is done after each.
const (
	phaseMean, doneMean       = "mean check degree", 0.4
	phaseBetween, doneBetween = "between neighbouring check degrees", 0.6
	phaseDistinct, doneDist   = "few distinct degrees", 0.75
	phaseFree, doneFree       = "free check degrees", 1.
)

// parityRow returns the row λ₂ ≤ 2∫ρ if that is a limit.
func parityRow(p Problem, rho ensembles.Distribution) []degreeTwo {
	if !p.Limits.DegreeTwoParity {
		return nil
	}
	return []degreeTwo{{
		limit:   limitParity,
		bound:   2 * rho.Integral(),
		byCheck: func(j int) float64 { return 2 / float64(j) },
	}}
}

// searchChecks searches over ρ, each with its best λ: first ρ concentrated on
// two neighbouring check degrees, which leaves one real number, the mean
// degree; then, where the number of distinct variable degrees is limited, over
// the sets of degrees; then over free ρ.
func searchChecks(ctx context.Context, p Problem, r *run, d designer) error {
	r.distinct = p.Limits.DistinctDegrees
	m := &means{p: p, r: r, d: d, degrees: p.VariableDegrees, found: map[int]*candidate{}}
	m.knots()
	if r.distinct == 1 {
		return searchRegular(ctx, p, r, d, m)
	}
	r.enter(phaseMean)
	stop, err := m.coarse(ctx)
	if stop || err != nil {
		return err
	}
	r.enter(phaseBetween)
	best, stop, err := m.between(ctx, doneMean, doneBetween)
	if stop || err != nil || best == nil {
		return err
	}
	if r.distinct > 0 && len(best.lambda) > r.distinct {
		r.enter(phaseDistinct)
		if best, stop, err = searchDistinct(ctx, m, best); stop || err != nil || best == nil {
			return err
		}
	}
	if !d.free() {
		r.report(doneFree)
		return nil
	}
	r.enter(phaseFree)
	return searchFree(ctx, p, r, d, best)
}

// checkGradient returns the derivatives of t by each ρⱼ, the rest of ρ left
// alone, at the optimum of d: by the envelope theorem only the programme's
// data move, and the multipliers say what that is worth.
func checkGradient(d *design, c *candidate, rate float64, checks []int) []float64 {
	g := make([]float64, len(checks))
	for k, j := range checks {
		g[k] = c.beta / (float64(j) * (1 - rate))
	}
	for i, p := range c.points {
		for k, v := range d.byCheck(p, c.lambda, checks) {
			g[k] += c.weights[i] * v
		}
	}
	two := c.lambda.Fraction(2)
	for i, row := range d.two {
		for k, j := range checks {
			if row.factor > 0 {
				g[k] += c.two[i] * two * row.byCheck(j)
			} else {
				g[k] -= c.two[i] * row.byCheck(j)
			}
		}
	}
	return g
}

// mixture returns the ρ on the degrees low < high of which the mean over nodes
// is the one given.
func mixture(low, high int, mean float64) ensembles.Distribution {
	// Nodes: a fraction (high-mean)/(high-low) has degree low.
	edges := float64(low) * (float64(high) - mean) / (float64(high-low) * mean)
	switch {
	case edges >= 1-pureTolerance:
		return ensembles.Distribution{{Degree: low, Fraction: 1}}
	case edges <= pureTolerance:
		return ensembles.Distribution{{Degree: high, Fraction: 1}}
	}
	return ensembles.Distribution{{Degree: low, Fraction: edges}, {Degree: high, Fraction: 1 - edges}}
}

// pureTolerance is the fraction below which a degree is left out: rounding.
const pureTolerance = 1e-12

// mixtureSlope returns dt/dmean of mixture(low, high, mean) from the
// derivatives by the two ρⱼ.
func mixtureSlope(low, high int, mean, byLow, byHigh float64) float64 {
	l, h := float64(low), float64(high)
	return l * h / ((h - l) * mean * mean) * (byHigh - byLow)
}

// around returns the largest allowed check degree that is at most mean and
// the smallest above it; the same twice if there is none above.
func (p Problem) around(mean float64) (low, high int) {
	if len(p.CheckDegrees) == 0 {
		low = max(int(math.Floor(mean)), 2)
		return low, low + 1
	}
	c := p.CheckDegrees
	for i, degree := range c {
		if float64(degree) > mean && i > 0 {
			return c[i-1], degree
		}
	}
	return c[len(c)-1], c[len(c)-1]
}

// rhoAt returns the concentrated ρ with the given mean over nodes.
func (p Problem) rhoAt(mean float64) ensembles.Distribution {
	low, high := p.around(mean)
	if low == high {
		return ensembles.Distribution{{Degree: low, Fraction: 1}}
	}
	return mixture(low, high, mean)
}

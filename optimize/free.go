package optimize

import (
	"context"
	"errors"
	"math"
	"slices"

	"tannery/ensembles"
	"tannery/optimize/linprog"
)

// Free ρ is searched by sequential linear programming (Palacios-Gomez, Lasdon
// & Engquist, Management Science 28(10), 1982): λ and ρ move together in a
// programme in which F is linearised in ρ around the best found, within a
// trust region; the design rate, Σλᵢ/i = Σρⱼ/(j(1-R)), is linear in both as it
// is. A step is taken only if the best λ of the new ρ, found by the programme
// that is not linearised, is better.
const (
	firstRadius = 0.1  // of the trust region, in any ρⱼ
	lastRadius  = 1e-4 // below it, gains are of its square
	// Each round tries steps of freeSteps radii, each shorter by freeShrink.
	freeSteps  = 4
	freeShrink = 4
	freeRounds = 12
	// freeGain is the relative gain in a round below which the search ends.
	freeGain = 1e-9
	// checkReach is how far beyond the present check degrees others are tried.
	checkReach = 3
	// negligibleFraction of a check degree is dropped.
	negligibleFraction = 1e-7
)

// searchFree searches ρ from the candidate.
func searchFree(ctx context.Context, p Problem, r *run, d designer, c *candidate) error {
	if len(p.CheckDegrees) == 1 {
		r.report(doneFree)
		return nil
	}
	radius := firstRadius
	for round := 0; round < freeRounds && radius >= lastRadius; round++ {
		var tasks []func() (*candidate, error)
		var radii []float64
		for step := radius; step >= lastRadius && len(tasks) < freeSteps; step /= freeShrink {
			tasks = append(tasks, func() (*candidate, error) {
				rho, err := freeStep(p, d.at(c), c, step)
				if err != nil {
					return nil, err
				}
				return d.best(ctx, rho, c.degrees, c)
			})
			radii = append(radii, step)
		}
		found, stop, err := r.batch(ctx, tasks)
		r.report(doneDist + (doneFree-doneDist)*float64(round+1)/freeRounds)
		if stop || err != nil {
			return err
		}
		old := c.value
		next := radii[len(radii)-1] / freeShrink
		for i, f := range found {
			if f != nil && f.value > c.value && (r.distinct == 0 || len(f.lambda) <= r.distinct) {
				c, next = f, radii[i]
				if i == 0 {
					next *= 2
				}
			}
		}
		radius = min(next, firstRadius)
		if c.value > old && c.value < old*(1+freeGain) {
			break
		}
	}
	r.report(doneFree)
	return nil
}

// freeStep solves the linearised programme and returns its ρ.
func freeStep(p Problem, d *design, c *candidate, radius float64) (ensembles.Distribution, error) {
	checks := freeChecks(p, c.rho)
	degrees := freeDegrees(d.degrees, c.working.degrees)
	old := make([]float64, len(checks))
	low := make([]float64, len(checks))
	program := linprog.Program{Goal: linprog.Minimize}
	program.AddColumn(1)
	for range degrees {
		program.AddColumn(0)
	}
	for k, j := range checks {
		old[k] = c.rho.Fraction(j)
		low[k] = max(0, old[k]-radius)
		column, err := program.AddColumn(0)
		if err != nil {
			return nil, err
		}
		program.SetUpper(column, min(1, old[k]+radius)-low[k])
	}
	// row adds Σ aᵢλᵢ + Σ bⱼρⱼ - t·[withT] rel rhs, ρⱼ being low plus a column.
	row := func(relation linprog.Relation, rhs float64, t float64, a, b func(k int) float64) {
		entries := []float64{t}
		for k := range degrees {
			entries = append(entries, a(k))
		}
		for k := range checks {
			entries = append(entries, b(k))
			rhs -= b(k) * low[k]
		}
		program.AddRow(relation, rhs, entries...)
	}
	zero := func(int) float64 { return 0 }
	one := func(int) float64 { return 1 }
	row(linprog.Equal, 1, 0, one, zero)
	row(linprog.Equal, 1, 0, zero, one)
	row(linprog.Equal, 0, 0,
		func(k int) float64 { return 1 / float64(degrees[k]) },
		func(k int) float64 { return -1 / (float64(checks[k]) * (1 - p.Rate)) })
	if l := p.Limits.EdgesPerBit; l > 0 {
		row(linprog.AtLeast, (1-p.Rate)/l, 0, zero, func(k int) float64 { return 1 / float64(checks[k]) })
	}
	two := c.lambda.Fraction(2)
	isTwo := func(k int) float64 {
		if degrees[k] == 2 {
			return 1
		}
		return 0
	}
	for _, limit := range d.two {
		if limit.factor > 0 { // λ₂f + λ₂⁰Σf'ⱼ(ρⱼ-ρⱼ⁰) ≤ t
			slope := func(k int) float64 { return two * limit.byCheck(checks[k]) }
			row(linprog.AtMost, dot(old, slope), -1, func(k int) float64 { return limit.factor * isTwo(k) }, slope)
		} else { // λ₂ ≤ b + Σb'ⱼ(ρⱼ-ρⱼ⁰)
			slope := func(k int) float64 { return -limit.byCheck(checks[k]) }
			row(linprog.AtMost, limit.bound+dot(old, slope), 0, isTwo, slope)
		}
	}
	points := slices.Clone(c.points)
	for k, point := range d.grid() {
		if k%2 == 0 {
			points = append(points, point)
		}
	}
	for _, point := range points {
		slopes := d.byCheck(point, c.lambda, checks)
		slope := func(k int) float64 { return slopes[k] }
		row(linprog.AtMost, dot(old, slope), -1, func(k int) float64 { return d.at(point, degrees[k]) }, slope)
	}
	s, err := program.Solve()
	if err != nil {
		return nil, errors.Join(err, ErrUnreachable)
	}
	if s.Status != linprog.Optimal {
		return nil, ErrUnreachable
	}
	var terms []ensembles.Term
	for k, j := range checks {
		if f := low[k] + s.X[1+len(degrees)+k]; f > negligibleFraction {
			terms = append(terms, ensembles.Term{Degree: j, Fraction: f})
		}
	}
	return ensembles.Normalize(terms), nil
}

func dot(v []float64, f func(k int) float64) float64 {
	sum := 0.
	for k, x := range v {
		sum += x * f(k)
	}
	return sum
}

// freeChecks returns the check degrees to try: all that are allowed if they
// are few, otherwise those near the present ones and some further off.
func freeChecks(p Problem, rho ensembles.Distribution) []int {
	if c := p.CheckDegrees; len(c) > 0 && len(c) <= 4*checkReach {
		return c
	}
	low, high := rho.Min(), rho.Max()
	var checks []int
	add := func(j int) {
		if j < 2 || j > ensembles.MaxDegree {
			return
		}
		if c := p.CheckDegrees; len(c) > 0 {
			if _, found := slices.BinarySearch(c, j); !found {
				return
			}
		}
		checks = append(checks, j)
	}
	for _, t := range rho {
		add(t.Degree)
	}
	for j := max(low-checkReach, 2); j <= low; j++ {
		add(j)
	}
	for j := high; j <= high+checkReach; j++ {
		add(j)
	}
	for _, f := range []float64{0.5, 0.7, 1.4, 2} {
		add(int(math.Round(f * float64(low+high) / 2)))
	}
	slices.Sort(checks)
	return slices.Compact(checks)
}

// freeDegrees returns the variable degrees to try: all if they are few,
// otherwise those in use and their neighbours.
func freeDegrees(allowed, used []int) []int {
	const few = 40
	if len(allowed) <= few {
		return allowed
	}
	var degrees []int
	for _, degree := range used {
		i, _ := slices.BinarySearch(allowed, degree)
		for k := max(i-2, 0); k <= min(i+2, len(allowed)-1); k++ {
			degrees = append(degrees, allowed[k])
		}
	}
	degrees = append(degrees, allowed[0], allowed[min(1, len(allowed)-1)], allowed[len(allowed)-1])
	slices.Sort(degrees)
	return slices.Compact(degrees)
}

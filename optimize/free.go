package optimize

import (
	"cmp"
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
	firstRadius = 0.2  // of the trust region: edges that may change degree
	lastRadius  = 1e-5 // below it, gains are of its square
	// Each round tries steps of freeSteps radii, each shorter by freeShrink.
	freeSteps  = 4
	freeShrink = 3
	freeRounds = 30
	// freeGain is the relative gain in a round below which a start ends.
	freeGain = 1e-8
	// checkReach is how far beyond the present check degrees others are tried;
	// further off, degrees in the ratio checkRatio, up to checkFar times the
	// mean.
	checkReach = 3
	checkRatio = 1.05
	checkFar   = 10
	// Points within freeNear of binding count in a step, every freeStride'th of
	// the grid.
	freeNear   = 0.1
	freeStride = 3
	// A start away from the best is given up after freeTrial rounds unless its
	// gap to the Shannon limit is within freePromise times the best.
	freeTrial   = 4
	freePromise = 1.02
	// negligibleFraction of a check degree is dropped.
	negligibleFraction = 1e-7
	// awayEdges is the fraction of edges that the starts away from the best
	// move to a check degree of awayRatios times the mean.
	awayEdges = 0.1
)

var awayRatios = []float64{1.7, 3, 6}

// searchFree searches ρ from the candidate, and, as the problem has several
// local optima, from some ρ away from it.
func searchFree(ctx context.Context, p Problem, r *run, d designer, c *candidate) error {
	if len(p.CheckDegrees) == 1 {
		r.report(doneFree)
		return nil
	}
	starts := []*candidate{c}
	var tasks []func() (*candidate, error)
	for _, ratio := range awayRatios {
		if rho := away(p, c.rho, ratio); rho != nil {
			tasks = append(tasks, func() (*candidate, error) { return d.best(ctx, rho, c.degrees, c) })
		}
	}
	found, stop, err := r.batch(ctx, tasks)
	if stop || err != nil {
		return err
	}
	for _, f := range found {
		if f != nil {
			starts = append(starts, f)
		}
	}
	for i, start := range starts {
		from := doneDist + (doneFree-doneDist)*float64(i)/float64(len(starts))
		to := doneDist + (doneFree-doneDist)*float64(i+1)/float64(len(starts))
		if stop, err := climb(ctx, p, r, d, start, from, to); stop || err != nil {
			return err
		}
	}
	return nil
}

// away returns ρ with awayEdges of the edges moved to an allowed degree near
// the ratio times the mean, and the mean kept by a concentrated rest; nil if
// that cannot be.
func away(p Problem, rho ensembles.Distribution, ratio float64) ensembles.Distribution {
	integral := rho.Integral()
	far := int(math.Round(ratio / integral))
	if n := len(p.CheckDegrees); n > 0 {
		i, _ := slices.BinarySearch(p.CheckDegrees, far)
		far = p.CheckDegrees[min(i, n-1)]
	}
	rest := (1 - awayEdges) / (integral - awayEdges/float64(far))
	if rest < 2 || len(p.CheckDegrees) > 0 && rest < float64(p.CheckDegrees[0]) || float64(far) <= rest+1 {
		return nil
	}
	var terms []ensembles.Term
	for _, t := range p.rhoAt(rest) {
		if t.Degree == far {
			return nil
		}
		terms = append(terms, ensembles.Term{Degree: t.Degree, Fraction: t.Fraction * (1 - awayEdges)})
	}
	return ensembles.Normalize(append(terms, ensembles.Term{Degree: far, Fraction: awayEdges}))
}

// climb improves a candidate as long as steps gain.
func climb(ctx context.Context, p Problem, r *run, d designer, c *candidate, from, to float64) (stop bool, err error) {
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
		r.report(from + (to-from)*float64(round+1)/freeRounds)
		if stop || err != nil {
			return stop, err
		}
		old := c.value
		next := radii[len(radii)-1] / freeShrink
		for i, f := range found {
			if f != nil && f.value > c.value && (r.distinct == 0 || len(f.lambda) <= r.distinct) {
				c, next = f, radii[i]
				if i == 0 {
					next *= freeShrink
				}
			}
		}
		radius = min(next, firstRadius)
		if c.value > old && c.value < old*(1+freeGain) {
			break
		}
		if round >= freeTrial && r.limit-c.value > freePromise*(r.limit-r.best.value) {
			break
		}
	}
	r.report(to)
	return false, nil
}

// freeStep solves the linearised programme and returns its ρ.
func freeStep(p Problem, d *design, c *candidate, radius float64) (ensembles.Distribution, error) {
	checks := freeChecks(p, d, c)
	degrees := freeDegrees(d.degrees, c.working.degrees)
	old := make([]float64, len(checks))
	var down []int // the check degrees in use, as indices of checks
	program := linprog.Program{Goal: linprog.Minimize}
	program.AddColumn(1)
	for range degrees {
		program.AddColumn(0)
	}
	for k, j := range checks {
		if old[k] = c.rho.Fraction(j); old[k] > 0 {
			down = append(down, k)
		}
		program.AddColumn(0)
	}
	for _, k := range down {
		column, err := program.AddColumn(0)
		if err != nil {
			return nil, err
		}
		program.SetUpper(column, old[k])
	}
	// row adds Σ aᵢλᵢ + Σ bⱼρⱼ + e·t rel rhs, where ρⱼ is its old value plus a
	// column and, for degrees in use, less another.
	row := func(relation linprog.Relation, rhs float64, e float64, a, b func(k int) float64) {
		entries := []float64{e}
		for k := range degrees {
			entries = append(entries, a(k))
		}
		for k := range checks {
			entries = append(entries, b(k))
		}
		for _, k := range down {
			entries = append(entries, -b(k))
			rhs -= b(k) * old[k]
		}
		program.AddRow(relation, rhs, entries...)
	}
	region := make([]float64, program.Columns())
	for k := range checks {
		region[1+len(degrees)+k] = 1
	}
	program.AddRow(linprog.AtMost, radius, region...)
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
	for _, point := range freePoints(d, c) {
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
	rho := slices.Clone(old)
	for k := range checks {
		rho[k] += s.X[1+len(degrees)+k]
	}
	for e, k := range down {
		rho[k] -= s.X[1+len(degrees)+len(checks)+e]
	}
	var terms []ensembles.Term
	for k, j := range checks {
		if rho[k] > negligibleFraction {
			terms = append(terms, ensembles.Term{Degree: j, Fraction: rho[k]})
		}
	}
	return ensembles.Normalize(terms), nil
}

// freePoints returns the points that bind, and of the grid those where the
// constraint is within freeNear of t: others do not come to bind in a step.
func freePoints(d *design, c *candidate) []float64 {
	points := slices.Clone(c.points)
	grid := d.grid()
	height := make([]float64, len(grid))
	for _, t := range c.lambda {
		for k, v := range d.column(t.Degree) {
			height[k] += t.Fraction * v
		}
	}
	for k := 0; k < len(grid); k += freeStride {
		if height[k] > c.t*(1-freeNear) {
			points = append(points, grid[k])
		}
	}
	return points
}

func dot(v []float64, f func(k int) float64) float64 {
	sum := 0.
	for k, x := range v {
		sum += x * f(k)
	}
	return sum
}

// freeChecks returns the check degrees to try: all that are allowed if they
// are few, otherwise those in use, those near them, and of all others up to
// checkFar times the largest those that price out best by the gradient.
func freeChecks(p Problem, d *design, c *candidate) []int {
	allowed := p.CheckDegrees
	if len(allowed) > 0 && len(allowed) <= 4*checkReach {
		return allowed
	}
	if len(allowed) == 0 {
		for j := 2.; j <= checkFar/c.rho.Integral() && j <= ensembles.MaxDegree; j = math.Floor(max(j+1, j*checkRatio)) {
			allowed = append(allowed, int(j))
		}
	}
	low, high := c.rho.Min(), c.rho.Max()
	checks := degreesOf(c.rho)
	for j := max(low-checkReach, 2); j <= high+checkReach; j++ {
		if _, found := slices.BinarySearch(p.CheckDegrees, j); (found || len(p.CheckDegrees) == 0) && (j <= low || j >= high) {
			checks = append(checks, j)
		}
	}
	gradient := checkGradient(d, c, p.Rate, allowed)
	byGradient := make([]int, len(allowed))
	for k := range byGradient {
		byGradient[k] = k
	}
	slices.SortStableFunc(byGradient, func(a, b int) int { return cmp.Compare(gradient[a], gradient[b]) })
	for _, k := range byGradient[:min(len(byGradient), 2*checkReach)] {
		checks = append(checks, allowed[k])
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

package optimize

import (
	"context"
	"slices"

	"tannery/ensembles"
)

// At most k distinct variable degrees is not a limit that a linear programme
// can know. The sets of degrees are searched from that of the best λ without
// the limit: degrees are dropped one at a time, each time the one that costs
// least, until k are left; then one degree at a time is exchanged for another
// while that gains (a local search; the best set is not certain). The mean
// check degree is found anew for the set, and the exchange repeated.
const distinctRounds = 4

// exchangeSteps are the changes of a degree tried, as steps among the allowed
// ones.
var exchangeSteps = []int{-16, -8, -4, -2, -1, 1, 2, 4, 8, 16}

// searchDistinct returns the best candidate with at most r.distinct degrees.
func searchDistinct(ctx context.Context, m *means, c *candidate) (best *candidate, stop bool, err error) {
	for len(c.lambda) > m.r.distinct {
		var sets [][]int
		for i := range c.lambda {
			sets = append(sets, slices.Delete(degreesOf(c.lambda), i, i+1))
		}
		next, stop, err := m.bestOf(ctx, c, sets)
		if stop || err != nil {
			return nil, stop, err
		}
		if next == nil {
			return nil, false, nil
		}
		c = next
	}
	for round := range distinctRounds {
		from := c.value
		for {
			next, stop, err := m.bestOf(ctx, c, exchanges(m.p.VariableDegrees, degreesOf(c.lambda)))
			if stop || err != nil {
				return c, stop, err
			}
			if next == nil || next.value <= c.value*(1+gainTolerance) {
				break
			}
			c = next
		}
		m.r.report(doneBetween + (doneDist-doneBetween)*float64(round+1)/distinctRounds)
		// The best mean for this set, from the knots around the present one.
		local := &means{p: m.p, r: m.r, d: m.d, degrees: degreesOf(c.lambda), at: m.at, found: map[int]*candidate{}}
		mean := 1 / c.rho.Integral()
		local.top, _ = slices.BinarySearch(m.at, mean)
		local.top = min(local.top, len(m.at)-1)
		var knots []int
		for k := max(local.top-window, 0); k <= min(local.top+window, len(m.at)-1); k++ {
			knots = append(knots, k)
		}
		if stop, err := local.try(ctx, knots, doneBetween); stop || err != nil {
			return c, stop, err
		}
		next, stop, err := local.between(ctx, doneBetween, doneBetween)
		if next != nil && next.value > c.value {
			c = next
		}
		if stop || err != nil {
			return c, stop, err
		}
		if c.value <= from*(1+gainTolerance) {
			break
		}
	}
	return c, false, nil
}

// bestOf evaluates sets of degrees with the ρ of c.
func (m *means) bestOf(ctx context.Context, c *candidate, sets [][]int) (best *candidate, stop bool, err error) {
	var tasks []func() (*candidate, error)
	for _, set := range sets {
		tasks = append(tasks, func() (*candidate, error) { return m.d.best(ctx, c.rho, set, c) })
	}
	found, stop, err := m.r.batch(ctx, tasks)
	for _, f := range found {
		if f != nil && (best == nil || f.value > best.value) {
			best = f
		}
	}
	return best, stop, err
}

func degreesOf(d ensembles.Distribution) []int {
	var degrees []int
	for _, t := range d {
		degrees = append(degrees, t.Degree)
	}
	return degrees
}

// exchanges returns the sets that differ from the given one in one degree.
func exchanges(allowed, set []int) [][]int {
	var sets [][]int
	for i, degree := range set {
		at, _ := slices.BinarySearch(allowed, degree)
		for _, step := range exchangeSteps {
			k := at + step
			if k < 0 || k >= len(allowed) || slices.Contains(set, allowed[k]) {
				continue
			}
			next := slices.Clone(set)
			next[i] = allowed[k]
			slices.Sort(next)
			sets = append(sets, next)
		}
	}
	return sets
}

// searchRegular is for a single variable degree d: the mean check degree can
// only be d/(1-R).
func searchRegular(ctx context.Context, p Problem, r *run, d designer, m *means) error {
	r.enter(phaseDistinct)
	low, high := p.meanRange()
	var tasks []func() (*candidate, error)
	for _, degree := range p.VariableDegrees {
		if mean := float64(degree) / (1 - p.Rate); mean >= low*(1-pureTolerance) && mean <= high*(1+pureTolerance) {
			tasks = append(tasks, func() (*candidate, error) {
				return d.best(ctx, p.rhoAt(mean), []int{degree}, nil)
			})
		}
	}
	const atOnce = 32
	for n := 0; n < len(tasks); n += atOnce {
		_, stop, err := r.batch(ctx, tasks[n:min(n+atOnce, len(tasks))])
		r.report(float64(n+atOnce) / float64(len(tasks)))
		if stop || err != nil {
			return err
		}
	}
	return nil
}

package optimize

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"

	"tannery/ensembles"
)

// ErrCheckpoint is wrapped by the errors that refuse a checkpoint.
var ErrCheckpoint = errors.New("checkpoint cannot be resumed")

// restore reads what was written down, and refuses what no search of the
// problem writes: a state is a file, which anybody may have changed, and what
// follows relies on what is checked here.
func (j *journey) restore(saved []byte, p Problem) error {
	var old journey
	if json.Unmarshal(saved, &old) != nil {
		return fmt.Errorf("%w: it holds no state of a search", ErrCheckpoint)
	}
	switch {
	case old.Format != j.Format:
		return fmt.Errorf("%w: format %d: must be %d", ErrCheckpoint, old.Format, j.Format)
	case old.Problem != j.Problem:
		return fmt.Errorf("%w: it belongs to another problem or seed", ErrCheckpoint)
	}
	if err := old.check(p); err != nil {
		return fmt.Errorf("%w: %w", ErrCheckpoint, err)
	}
	if len(old.Population) == 0 {
		old.Population = nil
	}
	*j = old
	return nil
}

// mostCounted bounds what is counted in a state, so that sums stay far from
// overflow.
const mostCounted = 1 << 50

// check returns an error unless a search of the problem may have come here.
func (j *journey) check(p Problem) error {
	limit := p.Limits.DistinctDegrees
	fewer := j.Phase >= dropping && j.Phase <= settling // only with such a limit
	switch {
	case j.Phase < beginning || j.Phase > arrived, fewer && limit == 0:
		return fmt.Errorf("phase %d: must be one of this search", j.Phase)
	case j.Phase > refining && j.Best == nil:
		return fmt.Errorf("no best ensemble in phase %d", j.Phase)
	}
	for _, count := range []struct {
		name        string
		found, most int
	}{
		{"points", len(j.Points), j.mostPoints(p)},
		{"points done", j.At, len(j.Points)},
		{"evaluations", j.Evolved, mostCounted},
		{"linear programmes", j.Solved, mostCounted},
		{"exchanges", j.Improved, exchangeCap},
		{"generations", j.Generation, generationCap},
		{"idle generations", j.Idle, min(j.Generation, idleGenerations)},
	} {
		if count.found < 0 || count.found > count.most {
			return fmt.Errorf("%d %s: must be from 0 to %d", count.found, count.name, count.most)
		}
	}
	for _, at := range j.Points {
		if err := at.check(p); err != nil {
			return err
		}
	}
	if b := j.Best; b != nil {
		if err := b.check(p); err != nil {
			return err
		}
		if b.Thresholds == nil || j.Phase > dropping && fewer && len(b.Ensemble.Lambda) > limit {
			return errors.New("the best ensemble is not measured or breaks a limit")
		}
	}
	if !(j.Unlimited >= 0) || math.IsInf(j.Unlimited, 0) {
		return fmt.Errorf("threshold %v without the limit on degrees", j.Unlimited)
	}
	return j.checkPopulation(limit)
}

// mostPoints is the largest number of points in the present phase.
func (j *journey) mostPoints(p Problem) int {
	switch j.Phase {
	case beginning, evolving:
		return 0
	case refining:
		return len(startFactors)
	case dropping:
		return len(p.VariableDegrees)
	case exchanging:
		return len(exchangeSteps) * p.Limits.DistinctDegrees
	}
	return 1
}

// checkPopulation returns an error unless the population is that of a search
// with this limit on distinct degrees.
func (j *journey) checkPopulation(limit int) error {
	size := 0
	if j.Phase == evolving && j.Generation > 0 {
		size = populationPerDegree * limit
	}
	if len(j.Population) != size {
		return fmt.Errorf("%d individuals: must be %d", len(j.Population), size)
	}
	for _, v := range j.Population {
		if len(v.Genes) != 2*limit {
			return fmt.Errorf("an individual of %d genes: must be %d", len(v.Genes), 2*limit)
		}
		for _, g := range v.Genes {
			if !(g >= 0 && g <= 1) {
				return fmt.Errorf("gene %v: must be from 0 to 1", g)
			}
		}
	}
	return nil
}

// gapSlack is how far the gap of a state may be from that of its thresholds:
// not all processors round alike.
const gapSlack = 1e-9

// rateSlack is how far the design rates of points may be off.
const rateSlack = 1e-9

// check returns an error unless a search of the problem may have written the
// point.
func (at *point) check(p Problem) error {
	foreign := errors.New("it holds a point that no search wrote")
	if at == nil || len(at.Degrees) == 0 || !subset(at.Degrees, p.VariableDegrees) {
		return foreign
	}
	lambda, rho := at.Ensemble.Lambda, at.Ensemble.Rho
	for _, d := range []ensembles.Distribution{lambda, rho} {
		if whole, err := ensembles.NewDistribution(d...); err != nil || !slices.Equal(whole, d) {
			return foreign
		}
	}
	if _, err := ensembles.New(lambda, rho); err != nil {
		return foreign
	}
	switch {
	case !subset(degreesOf(lambda), at.Degrees),
		len(p.CheckDegrees) > 0 && !subset(degreesOf(rho), p.CheckDegrees),
		!(math.Abs(at.Ensemble.DesignRate()-p.Rate) <= rateSlack),
		!(at.Radius > 0 && at.Radius <= widestRadius),
		at.Rounds < 0 || at.Rounds > roundCap,
		!(at.Tolerance <= coarsestTolerance), // negative where a loss was predicted
		(at.Guess == nil) != (at.Distance == nil):
		return foreign
	}
	channels := p.channels()
	for _, list := range [][]float64{at.Guess, at.Distance, at.Thresholds} {
		if list != nil && len(list) != len(channels) {
			return foreign
		}
	}
	gap := math.Inf(-1)
	for y, f := range channels {
		limit, err := f.Inverse(p.Rate)
		if err != nil {
			return err
		}
		if at.Guess != nil {
			guess, distance := at.Guess[y], at.Distance[y]
			if _, worst := f.Range(); !(guess >= leastGuess*limit && guess <= min(mostGuess*limit, worst) && distance == startBelow*guess) {
				return foreign
			}
		}
		if at.Thresholds != nil {
			if t := at.Thresholds[y]; !(t > 0 && t <= limit*(1+thresholdSlack)) {
				return foreign
			}
			gap = max(gap, f.Capacity(at.Thresholds[y])-p.Rate)
		}
	}
	if at.Thresholds != nil && !(math.Abs(at.Gap-gap) <= gapSlack) {
		return foreign
	}
	return nil
}

const (
	// leastGuess and mostGuess are the ends of guesses, relative to the Shannon
	// limit. Those of searches lie within some hundredths of thresholds, which
	// few iterations may make small.
	leastGuess, mostGuess = 1e-9, 2
	// thresholdSlack is by how much, relative, a coarse grid may take a
	// threshold to be beyond the Shannon limit.
	thresholdSlack = 0.05
)

// subset tells whether the degrees are in increasing order and all in the
// sorted list.
func subset(degrees, list []int) bool {
	for i, d := range degrees {
		if _, found := slices.BinarySearch(list, d); !found || i > 0 && d <= degrees[i-1] {
			return false
		}
	}
	return true
}

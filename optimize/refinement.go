package optimize

import (
	"context"
	"math"
	"slices"

	"tannery/ensembles"
)

// refinement improves an ensemble judged by density evolution, by sequential
// linear programming in a trust region (Fletcher & Sainz de la Maza, Math.
// Prog. 43, 1989): the margins near the threshold are linearised in λ, ρ and
// the channel parameters together, a linear programme proposes the best
// ensemble within the trust radius, and it is taken if its measured gap is
// smaller. Every place of the tunnel is a row, so it does not matter which
// ones are tight, and the design rate is a row, so it never changes.
type refinement struct {
	problem     Problem
	by          []yardstick
	workers     int
	gain        float64 // of a round in worst gap, at which a point has settled
	tolerance   float64 // of thresholds, relative, in the end
	free        bool    // whether ρ may leave two neighbouring degrees
	evaluations int
	programmes  int
	pivots      int
}

// point is an ensemble in the course of refinement, with all that the next
// round depends on.
type point struct {
	Ensemble ensembles.Ensemble
	Degrees  []int // the variable degrees it may use
	// Guess, Distance and Tolerance are what its thresholds were looked for
	// with.
	Guess, Distance []float64
	Tolerance       float64
	Thresholds      []float64
	// Gap is the worst over the channels of capacity at the threshold less
	// rate.
	Gap     float64
	Radius  float64
	Rounds  int
	Settled bool

	readings []reading // nil if they are to be taken again
}

const (
	startRadius     = 0.05
	widestRadius    = 0.2
	narrowestRadius = 5e-4
	// shrink is the factor of the trust radius after a step that was no good.
	shrink = 0.3
	// A step whose gain is at least wellPredicted of the prediction widens
	// the radius, one below illPredicted narrows it.
	wellPredicted = 0.7
	illPredicted  = 0.3
	// startBelow is how far below the predicted threshold a measurement
	// begins, relative to it.
	startBelow = 0.006
	// A threshold is measured to a tolerance of accuracy times the gain in
	// rate that is predicted, relative, but at least to coarsestTolerance.
	accuracy          = 0.05
	coarsestTolerance = 1e-4
	// roundCap ends the refinement of one point.
	roundCap = 60
)

// measure takes the readings of a point.
func (f *refinement) measure(ctx context.Context, at *point) error {
	again := at.Thresholds != nil // after a search was resumed: counted then
	at.readings = make([]reading, len(f.by))
	failures := make([]error, len(f.by))
	tasks := make([]func(), len(f.by))
	for y, stick := range f.by {
		tasks[y] = func() {
			var guess, distance float64
			if at.Guess != nil {
				guess, distance = at.Guess[y], at.Distance[y]
			}
			at.readings[y], failures[y] = stick.read(ctx, at.Ensemble, guess, distance, max(at.Tolerance, f.tolerance))
		}
	}
	parallel(f.workers, tasks)
	at.Thresholds, at.Gap = nil, 0
	for y, r := range at.readings {
		if !again {
			f.evaluations += r.evaluations
		}
		if failures[y] != nil {
			at.readings = nil
			return failures[y]
		}
		at.Thresholds = append(at.Thresholds, r.threshold)
	}
	at.Gap = f.worstGap(at.Thresholds)
	return nil
}

func (f *refinement) worstGap(thresholds []float64) float64 {
	gap := math.Inf(-1)
	for y, t := range thresholds {
		gap = max(gap, f.by[y].family().Capacity(t)-f.problem.Rate)
	}
	return gap
}

// round does one round of refinement. When it returns an error the point is
// as before.
func (f *refinement) round(ctx context.Context, at *point) error {
	if at.readings == nil {
		if err := f.measure(ctx, at); err != nil {
			return err
		}
	}
	variables := nearDegrees(at.Ensemble.Lambda, at.Degrees)
	checks := nearChecks(at.Ensemble.Rho, f.problem.CheckDegrees, f.free)
	s, n, err := sense(ctx, at.Ensemble, at.readings, f.by, variables, checks, f.workers)
	f.evaluations += n
	if err != nil {
		return err
	}
	radius := at.Radius
	for ; radius > narrowestRadius; radius *= shrink {
		lp := step{problem: f.problem, e: at.Ensemble, readings: at.readings, by: f.by, sensitivity: s, radius: radius}
		next, ok, err := lp.solve()
		f.programmes++
		if err != nil || !ok {
			continue // a smaller programme may be better conditioned
		}
		to := &point{Ensemble: next.ensemble, Degrees: at.Degrees, Rounds: at.Rounds + 1}
		for _, t := range next.thresholds {
			to.Guess = append(to.Guess, t)
			to.Distance = append(to.Distance, startBelow*t)
		}
		predicted := at.Gap - f.worstGap(next.thresholds)
		to.Tolerance = min(accuracy*predicted, coarsestTolerance)
		if err := f.measure(ctx, to); err != nil {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			continue
		}
		gain := at.Gap - to.Gap
		if gain <= 0 {
			continue
		}
		to.Radius = radius
		switch {
		case gain > wellPredicted*predicted:
			to.Radius = min(2*radius, widestRadius)
		case gain < illPredicted*predicted:
			to.Radius = radius / 2
		}
		to.Settled = gain < f.gain || to.Rounds >= roundCap
		*at = *to
		return nil
	}
	at.Settled = true
	at.Radius = radius
	return nil
}

// parallel runs tasks, as many at once as there are workers.
func parallel(workers int, tasks []func()) {
	tokens := make(chan struct{}, max(workers, 1))
	done := make(chan struct{})
	for _, task := range tasks {
		go func() {
			tokens <- struct{}{}
			task()
			<-tokens
			done <- struct{}{}
		}()
	}
	for range tasks {
		<-done
	}
}

// nearby are the steps, among the allowed degrees, from those in use to the
// others that a round considers.
var nearby = []int{-2, -1, 1, 2}

// everyDegree is up to which degree all are considered, and degreeRatio how
// far apart those considered beyond are at most, unless they are near one in
// use: the effect of a degree changes slowly with it.
const (
	everyDegree = 10
	degreeRatio = 1.2
)

// nearDegrees chooses the variable degrees that a round considers.
func nearDegrees(lambda ensembles.Distribution, allowed []int) []int {
	var chosen []int
	last := 0.0
	for _, d := range allowed {
		if d <= everyDegree || float64(d) >= last*degreeRatio {
			chosen = append(chosen, d)
			last = float64(d)
		}
	}
	chosen = append(chosen, allowed[len(allowed)-1])
	for _, t := range lambda {
		chosen = append(chosen, t.Degree)
		if at, found := slices.BinarySearch(allowed, t.Degree); found {
			for _, n := range nearby {
				if k := at + n; k >= 0 && k < len(allowed) {
					chosen = append(chosen, allowed[k])
				}
			}
		}
	}
	return slices.Compact(slices.Sorted(slices.Values(chosen)))
}

// nearChecks chooses the check degrees that a round considers, among the
// allowed ones if they are given: for free ρ those in use and two on either
// side of each, otherwise two neighbouring ones, or three about a single one.
func nearChecks(rho ensembles.Distribution, allowed []int, free bool) []int {
	var chosen []int
	for _, t := range rho {
		steps := nearby
		if !free {
			steps = []int{-1, 1}
			if len(rho) > 1 {
				steps = nil
			}
		}
		chosen = append(chosen, t.Degree)
		at, _ := slices.BinarySearch(allowed, t.Degree)
		for _, n := range steps {
			switch d := t.Degree + n; {
			case allowed == nil && d >= 2 && d <= ensembles.MaxDegree:
				chosen = append(chosen, d)
			case allowed != nil && at+n >= 0 && at+n < len(allowed):
				chosen = append(chosen, allowed[at+n])
			}
		}
	}
	return slices.Compact(slices.Sorted(slices.Values(chosen)))
}

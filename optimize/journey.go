package optimize

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"
)

// journey is the state of a search: all that its continuation depends on, so
// that it can be written down between rounds and taken up again.
type journey struct {
	Format   int    // journeyFormat
	Problem  string // digest of the problem and the seed
	Phase    phase
	Points   []*point // to be refined in this phase
	At       int      // the one in work
	Best     *point   // of the phases before
	Evolved  int      // evolutions so far
	Solved   int      // linear programmes
	Improved int      // exchanges made

	// The population of the phase evolving, how often it was renewed, and for
	// how many generations its best has not improved.
	Population       []individual
	Generation, Idle int

	// Unlimited is the threshold on the first channel before degrees were
	// dropped, 0 if none were.
	Unlimited float64
}

// journeyFormat is the version of what is written down.
const journeyFormat = 1

// phase is a part of the search.
type phase int

const (
	beginning  phase = iota
	refining         // the starts, on the coarse grid
	dropping         // variable degrees, down to the number allowed
	exchanging       // variable degrees
	evolving         // a population
	settling         // its fittest
	freeing          // ρ, of the best
	polishing        // the best, on the fine grid
	arrived
)

var phaseNames = map[phase]string{
	beginning:  "designs for the BEC",
	refining:   "two check degrees",
	dropping:   "fewer distinct degrees",
	exchanging: "exchange of degrees",
	evolving:   "differential evolution",
	settling:   "refinement of the fittest",
	freeing:    "free check degrees",
	polishing:  "refinement on the fine grid",
}

// phaseDone is the fraction of the work that is done before each phase.
var phaseDone = map[phase]float64{refining: 0.05, dropping: 0.4, exchanging: 0.45, evolving: 0.55, settling: 0.63, freeing: 0.65, polishing: 0.75, arrived: 1}

// digest identifies a problem and a seed.
func (p Problem) digest(seed uint64) string {
	h := sha256.New()
	fmt.Fprintln(h, seed, p.Rate, p.VariableDegrees, p.CheckDegrees, p.Limits)
	for _, f := range p.channels() {
		fmt.Fprintln(h, f.Name(), f.Parameter())
		for _, rate := range []float64{p.Rate, p.Rate / 2, (1 + p.Rate) / 2} {
			parameter, err := f.Inverse(rate)
			fmt.Fprintln(h, parameter, err)
		}
	}
	return hex.EncodeToString(h.Sum(nil))
}

// advance does one piece of work: a round of one point, or the passage to the
// next phase.
func (j *journey) advance(ctx context.Context, p Problem, r *run) error {
	if j.Phase == beginning {
		first, err := starts(ctx, p)
		if err != nil {
			return err
		}
		for _, e := range first {
			j.Points = append(j.Points, &point{Ensemble: e, Degrees: p.VariableDegrees, Radius: startRadius})
		}
		j.enter(refining, r)
		return nil
	}
	if j.At < len(j.Points) {
		return j.round(ctx, p, r)
	}
	if j.Phase == evolving {
		return j.evolve(ctx, p, r)
	}
	best := j.bestPoint()
	switch j.Phase {
	case refining:
		if best == nil {
			return fmt.Errorf("rate %v: none of the starts could be measured: %w", p.Rate, ErrUnreachable)
		}
		j.Best = best
		j.choose(ctx, p, r)
	case dropping:
		if best == nil {
			return fmt.Errorf("%d distinct variable degrees: %w", p.Limits.DistinctDegrees, ErrUnreachable)
		}
		j.Best = best
		j.choose(ctx, p, r)
	case exchanging:
		if best != nil && best.Gap < j.Best.Gap-coarseGain && j.Improved < exchangeCap {
			j.Best = best
			j.Improved++
			j.choose(ctx, p, r)
			break
		}
		j.Points = nil
		j.enter(evolving, r)
	case settling:
		if best != nil && best.Gap < j.Best.Gap {
			j.Best = best
		}
		j.again(freeing, r)
	case freeing:
		if best != nil {
			j.Best = best
		}
		j.again(polishing, r)
	case polishing:
		if best != nil {
			j.Best = best
		}
		j.enter(arrived, r)
	}
	return nil
}

// evolve renews the population, or ends its evolution: the fittest is refined
// if that may beat the best.
func (j *journey) evolve(ctx context.Context, p Problem, r *run) error {
	if j.Generation == generationCap || j.Idle == idleGenerations {
		fittest := fittest(j.Population)
		j.Population = nil
		e, ok := fittest.ensemble(p)
		if !ok || fittest.Gap > j.Best.Gap*fitHope {
			j.again(freeing, r)
			return nil
		}
		j.Points = []*point{{Ensemble: e, Degrees: degreesOf(e.Lambda), Radius: startRadius}}
		j.enter(settling, r)
		return nil
	}
	f, err := j.refinement(p, r)
	if err != nil {
		return err
	}
	next, err := f.generation(ctx, j.Population, j.Generation, r.settings.Seed, j.Best.Ensemble)
	if ctx.Err() != nil {
		return nil
	}
	if err != nil {
		return err
	}
	j.Idle++
	if j.Population == nil || fittest(next).Gap < fittest(j.Population).Gap-coarseGain {
		j.Idle = 0
	}
	j.Population = next
	j.Generation++
	j.count(f, r)
	j.report(r)
	j.keep(r)
	return nil
}

// fitHope is how much larger than the best gap that of the fittest may be for
// its refinement to be tried: a population comes near an optimum slowly.
const fitHope = 1.5

// exchangeCap bounds the exchanges of degrees.
const exchangeCap = 12

// choose sets up the points of the phase that follows: sets with a degree
// less, sets with a degree exchanged, or the best on the fine grid.
func (j *journey) choose(ctx context.Context, p Problem, r *run) {
	limit := p.Limits.DistinctDegrees
	used := degreesOf(j.Best.Ensemble.Lambda)
	var sets [][]int
	next := exchanging
	switch {
	case limit == 0:
		j.again(freeing, r)
		return
	case len(used) > limit:
		next = dropping
		if j.Phase == refining {
			j.Unlimited = j.Best.Thresholds[0]
			r.unlimited = j.Unlimited
		}
		for i := range used {
			sets = append(sets, slices.Delete(slices.Clone(used), i, i+1))
		}
	default:
		sets = exchanges(p.VariableDegrees, used)
	}
	designs := newErasureDesigner(onBEC(p))
	j.Points = nil
	for _, set := range sets {
		c, err := designs.best(ctx, j.Best.Ensemble.Rho, set, nil)
		if err != nil {
			continue
		}
		j.Points = append(j.Points, &point{Ensemble: c.ensemble(), Degrees: set, Radius: startRadius})
	}
	j.enter(next, r)
}

// again sets up a phase in which the best is refined further.
func (j *journey) again(next phase, r *run) {
	b := *j.Best
	b.readings, b.Settled, b.Rounds, b.Tolerance = nil, false, 0, 0
	b.Radius = startRadius / 2
	b.Guess, b.Distance = slices.Clone(b.Thresholds), nil
	for _, t := range b.Thresholds {
		b.Distance = append(b.Distance, startBelow*t)
	}
	b.Thresholds = nil
	j.Points = []*point{&b}
	j.enter(next, r)
}

func (j *journey) enter(next phase, r *run) {
	j.Phase, j.At = next, 0
	j.report(r)
	j.keep(r)
}

// refinement returns that of the present phase.
func (j *journey) refinement(p Problem, r *run) (*refinement, error) {
	points, tolerance, gain := coarsePoints, coarseTolerance, coarseGain
	if j.Phase == polishing {
		points, tolerance, gain = finePoints, fineTolerance, fineGain
	}
	by, err := p.yardsticks(points)
	return &refinement{
		problem:   p,
		by:        by,
		workers:   r.settings.Workers,
		gain:      gain,
		tolerance: tolerance,
		free:      j.Phase >= freeing,
	}, err
}

// count adds what was done to the sums.
func (j *journey) count(f *refinement, r *run) {
	j.Evolved += f.evaluations
	j.Solved += f.programmes
	r.stats.Evaluations, r.stats.Programmes = j.Evolved, j.Solved
}

// round refines the point in work by one round, and passes on to the next when
// it has settled or cannot be measured.
func (j *journey) round(ctx context.Context, p Problem, r *run) error {
	f, err := j.refinement(p, r)
	if err != nil {
		return err
	}
	at := *j.Points[j.At]
	err = f.round(ctx, &at)
	if ctx.Err() != nil {
		return nil
	}
	j.count(f, r)
	switch {
	case errors.Is(err, errNoTunnel):
		at.Settled = true
	case err != nil:
		return err
	}
	j.Points[j.At] = &at
	j.adopt(p, r, &at)
	if at.Settled || j.hopeless(&at) {
		j.At++
	}
	j.report(r)
	j.keep(r)
	return nil
}

// adopt makes a measured point the best so far if it is. What was measured on
// the fine grid comes before what was not, from which it was made.
func (j *journey) adopt(p Problem, r *run, at *point) {
	if at == nil || at.Thresholds == nil {
		return
	}
	c := &candidate{
		rho:     at.Ensemble.Rho,
		degrees: at.Degrees,
		value:   at.Thresholds[0],
		optimum: optimum{lambda: at.Ensemble.Lambda},
		gap:     at.Gap,
		polish:  j.Phase == polishing && at != j.Best,
	}
	old := r.best
	switch {
	case p.Limits.DistinctDegrees > 0 && len(c.lambda) > p.Limits.DistinctDegrees:
	case old == nil, c.polish && !old.polish, c.polish == old.polish && c.gap < old.gap:
		r.best = c
		if r.settings.Recorder != nil {
			r.settings.Recorder.Improved(Improvement{c.ensemble(), c.value, r.stats.Evaluations})
		}
	}
}

// trialRounds is after how many rounds a point must be on its way to beating
// the best: a start must have a smaller gap than the starts before it, for
// starts that end in the same optimum are the rule, and a set of degrees must
// come within a factor trialHope of the best set.
const (
	trialRounds = 3
	trialHope   = 1.02
)

// hopeless tells whether a point may be given up.
func (j *journey) hopeless(at *point) bool {
	if at.Rounds < trialRounds {
		return false
	}
	switch j.Phase {
	case refining:
		for _, earlier := range j.Points[:j.At] {
			if earlier.Thresholds != nil && at.Gap > earlier.Gap-coarseGain {
				return true
			}
		}
	case dropping:
		for _, earlier := range j.Points[:j.At] {
			if earlier.Thresholds != nil && at.Gap > earlier.Gap*trialHope {
				return true
			}
		}
	case exchanging:
		return at.Gap > j.Best.Gap*trialHope
	}
	return false
}

// bestPoint returns the measured point of this phase with the least gap.
func (j *journey) bestPoint() *point {
	var best *point
	for _, at := range j.Points {
		if at.Thresholds != nil && (best == nil || at.Gap < best.Gap) {
			best = at
		}
	}
	return best
}

func (j *journey) report(r *run) {
	from, to := phaseDone[j.Phase], 1.
	for next := j.Phase + 1; next <= arrived; next++ {
		if done, ok := phaseDone[next]; ok {
			to = done
			break
		}
	}
	done := float64(j.At) / math.Max(1, float64(len(j.Points)))
	if j.Phase == evolving {
		done = float64(j.Generation) / generationCap
	}
	r.report(from + (to-from)*done)
}

// keep hands out the state to be written down.
func (j *journey) keep(r *run) {
	if r.settings.Checkpoint == nil {
		return
	}
	state, err := json.Marshal(j)
	if err != nil {
		panic("optimize: state of a search cannot be written: " + err.Error())
	}
	r.settings.Checkpoint(state)
}

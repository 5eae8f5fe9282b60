package optimize

import (
	"context"
	"errors"
	"fmt"
	"time"

	"tannery/de"
	"tannery/ensembles"
)

// ErrSpent is returned by Search when nothing was found in the evaluations
// allowed.
var ErrSpent = errors.New("nothing was found in the evaluations allowed")

// Search looks for the best ensemble. When ctx ends, or a limit of the
// settings is reached, it returns the best found so far, and Result.Status
// tells; if nothing was found until then, the error is that of ctx, or ErrSpent.
func Search(ctx context.Context, problem Problem, settings Settings) (Result, error) {
	p, err := problem.sorted()
	if err != nil {
		return Result{}, err
	}
	m := settings.Method
	if m == nil {
		if m, err = DefaultMethod(p); err != nil {
			return Result{}, err
		}
	}
	if err := m.check(p); err != nil {
		return Result{}, err
	}
	limit, err := p.Channel.Inverse(p.Rate)
	if err != nil {
		return Result{}, err
	}
	if settings.Time > 0 {
		var cancel context.CancelFunc
		ctx, cancel = context.WithTimeout(ctx, settings.Time)
		defer cancel()
	}
	r := &run{settings: settings, limit: limit}
	err = m.search(ctx, p, r)
	r.enter("")
	if r.best == nil {
		if err == nil {
			err = ctx.Err()
		}
		if err == nil && r.spent() {
			err = ErrSpent
		}
		if err == nil {
			err = fmt.Errorf("rate %v: %w", p.Rate, ErrUnreachable)
		}
		return Result{}, err
	}
	if err != nil && ctx.Err() == nil {
		return Result{}, err
	}
	result, err := m.finish(p, r)
	if err != nil {
		return Result{}, err
	}
	result.Limit = limit
	if result.Thresholds == nil {
		result.Thresholds = []de.Threshold{result.Threshold}
	}
	result.Stats = r.stats
	switch {
	case errors.Is(ctx.Err(), context.DeadlineExceeded):
		result.Status = TimeLimit
	case ctx.Err() != nil:
		result.Status = Interrupted
	case r.spent():
		result.Status = EvaluationLimit
	}
	return result, nil
}

// DefaultMethod returns the method that fits the channel.
func DefaultMethod(p Problem) (Method, error) {
	for _, m := range []Method{BECDesign{}, QuantizedDesign{}} {
		if m.check(Problem{Channel: p.Channel}) == nil {
			return m, nil
		}
	}
	return nil, fmt.Errorf("channel %s: %w", p.Channel.Name(), ErrUnsupported)
}

// run is the state of a search: the best found, the budget and the recorder.
type run struct {
	settings Settings
	limit    float64
	distinct int // candidates with more variable degrees do not count; 0 for no limit
	best     *candidate
	stats    Stats

	unlimited float64 // threshold found without the limit on distinct degrees

	phase    string
	since    time.Time
	fraction float64
}

// candidate is a ρ with its best λ.
type candidate struct {
	rho     ensembles.Distribution
	degrees []int   // variable degrees that λ was chosen from
	value   float64 // threshold as a channel parameter
	optimum         // the linear programme's answer

	// Of QuantizedDesign only.
	gap    float64 // worst over the channels, in rate
	polish bool    // measured on the fine grid
}

func (c *candidate) ensemble() ensembles.Ensemble {
	return ensembles.Ensemble{Lambda: c.lambda, Rho: c.rho}
}

// enter starts a phase.
func (r *run) enter(phase string) {
	now := time.Now()
	if r.phase != "" {
		seconds := now.Sub(r.since).Seconds()
		if n := len(r.stats.Seconds); n > 0 && r.stats.Seconds[n-1].Phase == r.phase {
			r.stats.Seconds[n-1].Seconds += seconds
		} else {
			r.stats.Seconds = append(r.stats.Seconds, PhaseTime{r.phase, seconds})
		}
	}
	r.phase, r.since = phase, now
}

// spent tells whether the evaluations allowed are used up.
func (r *run) spent() bool {
	return r.settings.Evaluations > 0 && r.stats.Evaluations >= r.settings.Evaluations
}

// report tells the recorder that a batch is done; fraction is the part of the
// whole search done by then.
func (r *run) report(fraction float64) {
	r.fraction = max(r.fraction, min(fraction, 1))
	if r.settings.Recorder == nil {
		return
	}
	p := Progress{Phase: r.phase, Fraction: r.fraction, Evaluations: r.stats.Evaluations}
	if r.best != nil {
		p.Threshold, p.Gap = r.best.value, r.limit-r.best.value
	}
	r.settings.Recorder.Progress(p)
}

// offer takes a candidate and tells whether it is the best so far.
func (r *run) offer(c *candidate) bool {
	if r.distinct > 0 && len(c.lambda) > r.distinct || r.best != nil && !(c.value > r.best.value) {
		return false
	}
	r.best = c
	if r.settings.Recorder != nil {
		r.settings.Recorder.Improved(Improvement{c.ensemble(), c.value, r.stats.Evaluations})
	}
	return true
}

// batch runs tasks, as many at once as there are workers, and returns their
// candidates in the order of the tasks, nil for those that have none. What a
// task does must not depend on other tasks of the batch. The batch is cut
// short where the evaluations allowed end; stop tells that the search must.
func (r *run) batch(ctx context.Context, tasks []func() (*candidate, error)) (found []*candidate, stop bool, err error) {
	if left := r.settings.Evaluations - r.stats.Evaluations; r.settings.Evaluations > 0 && left < len(tasks) {
		tasks = tasks[:max(left, 0)]
		stop = true
	}
	found = make([]*candidate, len(tasks))
	failed := make([]error, len(tasks))
	tokens := make(chan struct{}, max(r.settings.Workers, 1))
	done := make(chan struct{})
	for i, task := range tasks {
		go func() {
			tokens <- struct{}{}
			if ctx.Err() == nil {
				found[i], failed[i] = task()
			}
			<-tokens
			done <- struct{}{}
		}()
	}
	for range tasks {
		<-done
	}
	for i, c := range found {
		if ctx.Err() != nil && c == nil {
			continue
		}
		r.stats.Evaluations++
		switch {
		case failed[i] != nil && !errors.Is(failed[i], ErrUnreachable):
			err = failed[i]
		case c != nil:
			r.stats.Programmes += c.programmes
			r.stats.Pivots += c.pivots
			r.offer(c)
		}
	}
	return found, stop || ctx.Err() != nil, err
}

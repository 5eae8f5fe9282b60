package optimize

import (
	"context"
	"time"

	"tannery/de"
	"tannery/ensembles"
)

// Method is a way to search. The zero values of the methods in this package
// work; the choice matters to how good the result is, not to its form.
type Method interface {
	// Name is the name used in reports.
	Name() string
	// check returns an error wrapping ErrUnsupported if the method cannot do
	// what the problem, already sorted, asks.
	check(p Problem) error
	// search looks for the best ensemble, hands each improvement to r, and
	// ends when nothing improves any more or r.stopped says so.
	search(ctx context.Context, p Problem, r *run) error
	// finish measures and certifies the best ensemble found.
	finish(p Problem, r *run) (Result, error)
}

// Settings say how to search. The zero value searches to the end by the method
// that fits the channel, on one worker.
type Settings struct {
	// Method is the way to search; nil for DefaultMethod.
	Method Method
	// Seed starts the random numbers of methods that use them. With the same
	// seed a search that ends by itself or by Evaluations gives the same
	// result to the bit, for any number of workers.
	Seed uint64
	// Time after which to stop; 0 for no limit.
	Time time.Duration
	// Evaluations (of a ρ, by its best λ) after which to stop; 0 for no limit.
	Evaluations int
	// Workers is the number of evaluations to run at once; below 1 counts as 1.
	Workers int
	// Recorder is told how the search goes; nil for nobody.
	Recorder Recorder
	// Checkpoint is called, from the goroutine that called Search, with the
	// state of the search after each piece of work; nil for nobody. Resume is
	// such a state to continue from: the search then ends in the same result,
	// to the bit, as one that was not interrupted. A state of another problem
	// or seed is refused with ErrCheckpoint. The designs that end within
	// seconds (BECDesign, GaussianDesign) have no state and start anew.
	Checkpoint func(state []byte)
	Resume     []byte
}

// Recorder is told how a search goes. Its methods are called one at a time,
// from the goroutine that called Search, and should return soon.
type Recorder interface {
	// Progress is called after each batch of evaluations.
	Progress(Progress)
	// Improved is called with each ensemble better than all before.
	Improved(Improvement)
}

// Progress is the state of a search.
type Progress struct {
	// Phase is what the search does now, in words.
	Phase string
	// Fraction of the work done, an estimate from 0 to 1; it never falls.
	Fraction float64
	// Evaluations done.
	Evaluations int
	// Threshold is the best so far as a channel parameter, 0 if none.
	Threshold float64
	// Gap is the Shannon limit less Threshold.
	Gap float64
}

// Improvement is an ensemble better than those before.
type Improvement struct {
	Ensemble    ensembles.Ensemble
	Threshold   float64 // as a channel parameter
	Evaluations int     // done until then
}

// Status is how a search ended.
type Status int

// The statuses.
const (
	Settled         Status = iota // nothing improved any more
	EvaluationLimit               // Settings.Evaluations were spent
	TimeLimit                     // Settings.Time, or the context's deadline, was reached
	Interrupted                   // the context was cancelled
)

// String returns the status in words.
func (s Status) String() string {
	return [...]string{"settled", "evaluation limit", "time limit", "interrupted"}[s]
}

// Result is the outcome of Search.
type Result struct {
	// Ensemble is the best found. It is whole and valid however the search
	// ended, with the problem's design rate up to rounding.
	Ensemble ensembles.Ensemble
	// Threshold is that of Ensemble, measured by the engine of the method and
	// not taken from the search.
	Threshold de.Threshold
	// Thresholds are those on all channels of the problem, that of
	// Problem.Channel first.
	Thresholds []de.Threshold
	// Limit is the Shannon limit at the rate, as a channel parameter.
	Limit float64
	// Certificate proves how much better any λ could be with the same ρ; nil
	// where the method has none (only BECDesign has).
	Certificate *Certificate
	// Binding names the limits that keep the threshold down: by the
	// multipliers of the last linear programme, relaxing one of them gains.
	Binding []string
	// Relaxations says of limits that bind what relaxing them a little would
	// gain; only of QuantizedDesign.
	Relaxations []Relaxation
	Status      Status
	Stats       Stats
}

// Stats tells what a search cost.
type Stats struct {
	Evaluations int // check degree distributions for which the best λ was found
	Programmes  int // linear programmes solved
	Pivots      int // of the simplex method
	// Seconds of wall time by phase, in order.
	Seconds []PhaseTime
}

// PhaseTime is the time spent in a phase.
type PhaseTime struct {
	Phase   string
	Seconds float64
}

package montecarlo

import (
	"cmp"
	"context"
	"fmt"
	"math/rand/v2"
	"runtime"
	"sync"
	"time"

	"tannery/de/channel"
	"tannery/ensembles/tanner"
)

// DefaultIterations is how many iterations sum-product gets unless told
// otherwise; frames that need more are rare except next to the threshold.
const DefaultIterations = 100

// Trials says what is tried: a graph, a channel and a decoder.
type Trials struct {
	Graph  *tanner.Graph
	Family channel.Family // one of the built-in families
	// Parameter of the channel, within the range of the family.
	Parameter float64
	// Iterations is the most a frame gets, at least 1; 0 means
	// DefaultIterations for sum-product and no limit for peeling.
	Iterations int
	// Schedule of sum-product, Flooding if empty; without meaning on the
	// BEC.
	Schedule Schedule
	// Seed and the number of a trial determine it, whatever the number of
	// workers and the other parameters measured.
	Seed uint64
}

// Limits say when to stop; what comes first counts, 0 is no limit.
type Limits struct {
	Frames      int64 // in all, those of an earlier run included
	FrameErrors int64 // likewise
	Time        time.Duration
	// Workers is the number of goroutines, 0 for as many as there are
	// processors. It does not change the counts.
	Workers int
}

// Status tells how a run ended.
type Status string

// The ways in which a run ends.
const (
	EnoughErrors Status = "frame errors" // Limits.FrameErrors reached
	EnoughFrames Status = "frames"       // Limits.Frames reached
	TimeUp       Status = "time"         // Limits.Time over
	Interrupted  Status = "interrupted"  // ctx ended
)

// Run makes trials, beginning after those of from, until a limit is reached
// or ctx ends, and returns all counts. Frames are counted in order, so that a
// stop at a number of frames or frame errors falls on the same frame for any
// number of workers; frames in work at the end of the time or of ctx are
// forgotten. A zero from begins anew; record, if not nil, is called by the
// goroutine of Run as counts come in. It returns an error if settings are out
// of range or from was measured under other settings.
func (t Trials) Run(ctx context.Context, from Measurement, limits Limits, record func(Measurement)) (Measurement, Status, error) {
	m, err := t.begin(from)
	if err != nil {
		return from, "", err
	}
	if limits.Frames < 0 || limits.FrameErrors < 0 || limits.Time < 0 || limits.Workers < 0 {
		return from, "", fmt.Errorf("limits %+v: must not be negative", limits)
	}
	inner, cancel := context.WithCancel(ctx)
	defer cancel()
	if limits.Time > 0 {
		timer := time.AfterFunc(limits.Time, cancel)
		defer timer.Stop()
	}
	batches, err := t.start(inner, m, limits)
	if err != nil {
		return from, "", err
	}
	defer batches.finish(cancel)
	for {
		switch {
		case limits.FrameErrors > 0 && m.Counts.FrameErrors >= limits.FrameErrors:
			return m, EnoughErrors, nil
		case limits.Frames > 0 && m.Counts.Frames >= limits.Frames:
			return m, EnoughFrames, nil
		}
		outcomes, complete := batches.next()
		for _, o := range outcomes {
			m.Counts.add(o)
			if m.Counts.FrameErrors == limits.FrameErrors && limits.FrameErrors > 0 {
				break
			}
		}
		if record != nil {
			record(m)
		}
		switch {
		case complete || limits.FrameErrors > 0 && m.Counts.FrameErrors == limits.FrameErrors:
		case ctx.Err() != nil:
			return m, Interrupted, nil
		default:
			return m, TimeUp, nil
		}
	}
}

// Continues returns an error unless Run takes the measurement to continue
// from: one of the same settings, whose counts trials can give.
func (t Trials) Continues(from Measurement) error {
	_, err := t.begin(from)
	return err
}

// begin returns the measurement to be continued.
func (t *Trials) begin(from Measurement) (Measurement, error) {
	erasures := isBEC(t.Family)
	switch {
	case t.Iterations < 0:
		return from, fmt.Errorf("iterations %d: must be at least 1", t.Iterations)
	case erasures:
		t.Schedule = ""
	case t.Schedule == "":
		t.Schedule = Flooding
	case t.Schedule != Flooding && t.Schedule != Layered:
		return from, fmt.Errorf("schedule %q: must be %q or %q", t.Schedule, Flooding, Layered)
	}
	if t.Iterations == 0 && !erasures {
		t.Iterations = DefaultIterations
	}
	m := Measurement{
		Channel: t.Family.Name(), Parameter: t.Parameter, Seed: t.Seed, Iterations: t.Iterations,
		Schedule: t.Schedule, Matrix: t.Graph.Digest(), Length: t.Graph.Variables(),
	}
	if from == (Measurement{}) {
		return m, nil
	}
	m.Counts = from.Counts
	if m != from {
		return from, fmt.Errorf("the earlier run was made with %s: must be %s", from.settings(), m.settings())
	}
	return m, from.Counts.check(m.Length)
}

func isBEC(f channel.Family) bool { return f.Name() == channel.BEC{}.Name() }

// settings describes everything but the counts.
func (m Measurement) settings() string {
	return fmt.Sprintf("channel %s at %v, seed %d, %d iterations, schedule %q, matrix %s of length %d",
		m.Channel, m.Parameter, m.Seed, m.Iterations, m.Schedule, m.Matrix, m.Length)
}

// batchEdges is how many edges a batch of frames has at least, so that
// handing it over costs nothing beside decoding it.
const batchEdges = 100_000

// batchesAhead is how many batches per worker may be in work or wait for an
// earlier one.
const batchesAhead = 3

// batches are the outcomes of trials in order, made by several workers.
type batches struct {
	trials  Trials
	done    <-chan struct{}
	issued  int64 // trials handed out
	last    int64 // trial to stop before, 0 if there is none
	size    int64
	jobs    chan batch
	waiting []batch // handed out and not yet taken, in order
	workers sync.WaitGroup
}

// batch is a number of consecutive trials. The result has fewer outcomes if
// the run ended meanwhile.
type batch struct {
	first, count int64
	result       chan []outcome
}

func (t Trials) start(ctx context.Context, m Measurement, limits Limits) (*batches, error) {
	b := &batches{trials: t, done: ctx.Done(), issued: m.Counts.Frames, last: limits.Frames}
	b.size = int64(1 + batchEdges/(1+t.Graph.Edges()))
	workers := cmp.Or(limits.Workers, runtime.GOMAXPROCS(0))
	b.jobs = make(chan batch, workers*batchesAhead)
	for range workers {
		d, err := t.newDecoder()
		if err != nil {
			close(b.jobs)
			return nil, err
		}
		b.workers.Go(func() { b.work(d) })
	}
	for range cap(b.jobs) {
		b.issue()
	}
	return b, nil
}

// issue hands out the next batch, unless all have been.
func (b *batches) issue() {
	count := b.size
	if b.last > 0 {
		count = min(count, b.last-b.issued)
	}
	if count > 0 {
		j := batch{b.issued, count, make(chan []outcome, 1)}
		b.issued += count
		b.waiting = append(b.waiting, j)
		b.jobs <- j
	}
}

// next returns the outcomes that follow, and whether none is missing.
func (b *batches) next() (outcomes []outcome, complete bool) {
	if len(b.waiting) == 0 {
		return nil, true
	}
	j := b.waiting[0]
	b.waiting = b.waiting[1:]
	outcomes = <-j.result
	b.issue()
	return outcomes, int64(len(outcomes)) == j.count
}

// finish ends the workers and waits for them.
func (b *batches) finish(cancel func()) {
	cancel()
	close(b.jobs)
	b.workers.Wait()
}

// work makes trials until there are no more jobs.
func (b *batches) work(d decoder) {
	pcg := new(rand.PCG)
	random := rand.New(pcg)
	stop := func() bool {
		select {
		case <-b.done:
			return true
		default:
			return false
		}
	}
	for j := range b.jobs {
		outcomes := make([]outcome, 0, j.count)
		for i := range j.count {
			if stop() {
				break
			}
			reseed(pcg, b.trials.Seed, b.trials.Parameter, j.first+i)
			o, ok := d.trial(random, b.trials.Iterations, stop)
			if !ok {
				break
			}
			outcomes = append(outcomes, o)
		}
		j.result <- outcomes
	}
}

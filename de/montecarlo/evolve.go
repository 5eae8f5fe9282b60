package montecarlo

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"sync"
	"sync/atomic"
)

// Point is the state of the messages after an iteration, to be held against
// the point of a density evolution trace of the same iteration. Errors are
// fractions with the standard error of their mean between frames; an LLR of
// zero counts as half an error.
type Point struct {
	Iteration    int // 0: the channel
	MessageError Mean
	BitError     Mean
}

// Mean is a mean with its standard error, which is NaN for a single frame.
type Mean struct{ Value, StandardError float64 }

// Evolve runs the given number of frames through exactly the given number of
// iterations of sum-product with the flooding schedule, on any channel, and
// returns the error of the messages from variable to check nodes, and of the
// decisions on bits, after each. Frames are the trials of the same numbers as
// in Run, and the result does not depend on the number of workers (0: all
// processors). It returns an error if settings are out of range, and
// ctx.Err() when ctx ends.
func (t Trials) Evolve(ctx context.Context, iterations, frames, workers int) ([]Point, error) {
	if iterations < 0 || frames < 1 || workers < 0 {
		return nil, fmt.Errorf("%d iterations of %d frames by %d workers: there must be at least one frame, the others not negative", iterations, frames, workers)
	}
	draw, err := newSource(t.Family, t.Parameter)
	if err != nil {
		return nil, err
	}
	halves := make([][]halfErrors, frames)
	var next atomic.Int64
	var group sync.WaitGroup
	for range min(frames, cmp.Or(workers, runtime.GOMAXPROCS(0))) {
		group.Go(func() {
			s := newSumProduct(t.Graph, Flooding)
			pcg := new(rand.PCG)
			random := rand.New(pcg)
			for k := next.Add(1) - 1; k < int64(frames); k = next.Add(1) - 1 {
				reseed(pcg, t.Seed, t.Parameter, k)
				s.reset(func() float64 { return draw(random) })
				for i := 0; ctx.Err() == nil; i++ {
					halves[k] = append(halves[k], s.halfErrors())
					if i == iterations {
						break
					}
					s.iterate()
				}
			}
		})
	}
	group.Wait()
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	points := make([]Point, iterations+1)
	for i := range points {
		points[i] = Point{
			Iteration:    i,
			MessageError: meanOf(halves, t.Graph.Edges(), func(f []halfErrors) int64 { return f[i].messages }),
			BitError:     meanOf(halves, t.Graph.Variables(), func(f []halfErrors) int64 { return f[i].bits }),
		}
	}
	return points, nil
}

// halfErrors are errors of a frame in halves: 2 for a wrong sign, 1 for zero.
type halfErrors struct{ messages, bits int64 }

func (s *sumProduct) halfErrors() (h halfErrors) {
	for _, b := range s.bits {
		h.bits += halves(b[s.current])
	}
	for i, v := range s.variables {
		h.messages += halves(s.bits[v][s.current] - s.messages[i])
	}
	return h
}

func halves(llr float32) int64 {
	switch {
	case llr > 0:
		return 0
	case llr < 0:
		return 2
	}
	return 1
}

// meanOf returns the mean over frames of a number of half errors among n.
func meanOf(frames [][]halfErrors, n int, of func([]halfErrors) int64) Mean {
	count := float64(len(frames))
	var sum float64
	for _, f := range frames {
		sum += float64(of(f))
	}
	mean := sum / count
	var squares float64
	for _, f := range frames {
		d := float64(of(f)) - mean
		squares += d * d
	}
	scale := 1 / (2 * float64(n))
	return Mean{mean * scale, math.Sqrt(squares/(count-1)/count) * scale}
}

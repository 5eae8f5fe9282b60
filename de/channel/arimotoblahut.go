package channel

import (
	"context"
	"math"
)

const (
	// CapacityTolerance is the distance in bits between the bounds of the
	// capacity of a DMC below which they count as closed.
	CapacityTolerance = 1e-9
	// capacityAim is the distance at which the search for closer bounds ends.
	capacityAim = 1e-12
	// arimotoBlahutSteps bounds the plain iteration. Where it converges
	// geometrically this is plenty; where it does not, more would not help.
	arimotoBlahutSteps = 300
	// leastProbability keeps inputs from being lost to underflow.
	leastProbability = 1e-30
)

// DMCCapacity is the capacity of a DMC between bounds, in bits per symbol.
type DMCCapacity struct {
	// Lower is the mutual information that Distribution reaches; no
	// distribution reaches more than Upper. Both hold to within the rounding
	// of the sums, about 1e-14.
	Lower, Upper float64
	// Distribution is over the inputs.
	Distribution []float64
	// Iterations counts the steps of both methods.
	Iterations int
	Status     DMCStatus
}

// DMCStatus tells how the search for a DMC's capacity ended.
type DMCStatus string

// The statuses. The bounds hold in each case; Closed says that they are
// within CapacityTolerance of each other.
const (
	BoundsClosed DMCStatus = "closed"
	BoundsOpen   DMCStatus = "open"
	Interrupted  DMCStatus = "interrupted"
)

// Capacity finds the capacity by the iteration of Arimoto and Blahut
//
//	p(x) ← p(x)·2^D(x) / Σ p(x')·2^D(x'),  D(x) = Σ W(y|x) log₂(W(y|x)/q(y)),
//
// with q the distribution of the output under p, between the bounds
// Σp(x)D(x) ≤ C ≤ max D(x) (Blahut, Computation of channel capacity and
// rate-distortion functions, IEEE Trans. Inf. Theory 18(4), 1972; Arimoto,
// An algorithm for computing the capacity of arbitrary discrete memoryless
// channels, IEEE Trans. Inf. Theory 18(1), 1972). The iteration is slow where
// an input is useless by a narrow margin or rows are almost equal; after some
// hundred steps an interior-point method takes over, whose points get the
// same bounds. The closest pair of bounds seen is returned.
func (c DMC) Capacity(ctx context.Context) DMCCapacity {
	s := newInputSearch(c.Transitions)
	p := make([]float64, len(s.rows))
	for x := range p {
		p[x] = 1 / float64(len(p))
	}
	for step := 0; step < arimotoBlahutSteps && ctx.Err() == nil; step++ {
		if s.visit(p); s.closed() {
			break
		}
		s.result.Iterations++
		total := 0.0
		for x, d := range s.divergence {
			p[x] = math.Max(p[x]*math.Exp(d-s.mean), leastProbability)
			total += p[x]
		}
		for x := range p {
			p[x] /= total
		}
	}
	if !s.closed() && ctx.Err() == nil {
		s.interiorPoint(ctx)
	}
	s.dropUnused()
	r := s.result
	// The two ends of the search can cross by rounding.
	r.Lower = math.Max(0, r.Lower/math.Ln2)
	r.Upper = math.Max(r.Lower, r.Upper/math.Ln2)
	switch {
	case r.Upper-r.Lower <= CapacityTolerance:
		r.Status = BoundsClosed
	case ctx.Err() != nil:
		r.Status = Interrupted
	default:
		r.Status = BoundsOpen
	}
	return r
}

// inputSearch holds a channel and the best bounds found so far, in nats.
type inputSearch struct {
	rows, logs [][]float64 // W and ln W, of the outputs that occur

	// About the point visited last.
	output     []float64 // q
	logOutput  []float64 // ln q
	divergence []float64 // D
	mean, most float64   // Σ p·D and max D

	result DMCCapacity
}

func newInputSearch(transitions [][]float64) *inputSearch {
	s := &inputSearch{
		rows:       make([][]float64, len(transitions)),
		logs:       make([][]float64, len(transitions)),
		divergence: make([]float64, len(transitions)),
		result:     DMCCapacity{Upper: math.Inf(1)},
	}
	s.result.Distribution = make([]float64, len(transitions))
	for y := range transitions[0] {
		occurs := false
		for _, row := range transitions {
			occurs = occurs || row[y] > 0
		}
		if !occurs {
			continue
		}
		for x, row := range transitions {
			s.rows[x] = append(s.rows[x], row[y])
			s.logs[x] = append(s.logs[x], math.Log(row[y]))
		}
	}
	s.output = make([]float64, len(s.rows[0]))
	s.logOutput = make([]float64, len(s.rows[0]))
	return s
}

// visit works out the bounds at p, a distribution over the inputs, and keeps
// them if they are the closest so far.
func (s *inputSearch) visit(p []float64) {
	clear(s.output)
	for x, row := range s.rows {
		for y, w := range row {
			s.output[y] += p[x] * w
		}
	}
	for y, q := range s.output {
		s.logOutput[y] = math.Log(q)
	}
	s.mean, s.most = 0, math.Inf(-1)
	for x, row := range s.rows {
		d := 0.0
		for y, w := range row {
			if w > 0 {
				d += w * (s.logs[x][y] - s.logOutput[y])
			}
		}
		s.divergence[x] = d
		if p[x] > 0 {
			s.mean += p[x] * d
		}
		s.most = math.Max(s.most, d)
	}
	if s.most-s.mean < s.result.Upper-s.result.Lower {
		s.result.Lower, s.result.Upper = s.mean, s.most
		copy(s.result.Distribution, p)
	}
}

func (s *inputSearch) closed() bool {
	return s.result.Upper-s.result.Lower <= capacityAim*math.Ln2
}

// dropUnused sets to zero the probabilities of inputs that are useless by
// their divergence, if the bounds bear it: what is left of them is an
// artefact of the methods, which keep all probabilities positive.
func (s *inputSearch) dropUnused() {
	p := append([]float64(nil), s.result.Distribution...)
	s.visit(p)
	total := 0.0
	for x := range p {
		if p[x] < s.most-s.divergence[x] {
			p[x] = 0
		}
		total += p[x]
	}
	for x := range p {
		p[x] /= total
	}
	s.visit(p)
	if gap := s.most - s.mean; gap <= math.Max(s.result.Upper-s.result.Lower, CapacityTolerance/10) {
		s.result.Lower, s.result.Upper = s.mean, s.most
		copy(s.result.Distribution, p)
	}
}

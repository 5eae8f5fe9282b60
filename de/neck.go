package de

import (
	"math"

	"tannery/de/density"
)

// stand is a fixed point.
type stand struct {
	log       float64 // ln B
	parameter float64 // of the channel
	error     float64 // of parameter
	messages  *density.Density
}

// neck is where a tunnel closes first as the channel gets worse: the least
// parameter, over B, of a channel with a fixed point of that B.
type neck struct{ stand }

const (
	// wideSpan is the first stride along ln B from where the neck is expected,
	// and neckReach how far from there it is sought. narrowSpan is that of the
	// last parabola: rounding is far below its height, as are its cubic terms.
	wideSpan   = 0.02
	narrowSpan = 0.004
	neckReach  = 1.5
	// neckError is the relative error of a neck, or noisyError where rounding
	// does not let it become that small; neckTolerance is that of the fixed
	// points in its parabola, strideError that of those on the way there;
	// strideTries is how often a stride is shortened that does not settle, and
	// neckTries how often the parabola is moved.
	neckError     = 3e-9
	noisyError    = noiseLevel
	neckTolerance = 3e-10
	strideError   = 1e-7
	strideTries   = 3
	neckTries     = 6
)

func (p *fixedPoints) stand(messages *density.Density, log, tolerance float64) stand {
	s := stand{log: log, messages: messages.Clone()}
	s.parameter, s.error = p.settle(s.messages, math.Exp(log), tolerance)
	return s
}

// stride takes the fixed point at a distance in ln B from another, or nearer
// where the iteration does not settle that far.
func (p *fixedPoints) stride(from stand, distance, tolerance float64) stand {
	for try := 0; ; try++ {
		s := p.stand(from.messages, from.log+distance, tolerance)
		if s.error <= strideError*s.parameter || try == strideTries {
			return s
		}
		distance /= 4
	}
}

// neck finds the neck near the messages by parabolas through three fixed
// points, the first ones a span apart along ln B. It returns false if there is
// none within reach.
func (p *fixedPoints) neck(messages *density.Density, span, tolerance float64) (neck, bool) {
	start := math.Log(messages.Bhattacharyya())
	middle := p.stand(messages, start, tolerance)
	left, right := p.stride(middle, -span, tolerance), p.stride(middle, span, tolerance)
	for bracketed := false; !bracketed; {
		switch {
		case math.IsInf(left.parameter+middle.parameter+right.parameter, 1) || math.Abs(middle.log-start) > neckReach:
			return neck{}, false
		case left.parameter < middle.parameter && left.parameter < right.parameter:
			left, middle, right = p.stride(left, 1.5*(left.log-middle.log), tolerance), left, middle
		case right.parameter < middle.parameter:
			left, middle, right = middle, right, p.stride(right, 1.5*(right.log-middle.log), tolerance)
		default:
			bracketed = true
		}
	}
	for try := 1; try <= neckTries; try++ {
		around := func(log float64) stand {
			return p.stand(between(left, middle, right, log), log, neckTolerance)
		}
		lowest, least := vertex(left, middle, right)
		n := around(lowest)
		n.error += math.Abs(n.parameter-least) + neckTolerance*least
		if n.error <= neckError*least || try == neckTries && n.error <= noisyError*least {
			return neck{n}, true
		}
		left, middle, right = around(lowest-narrowSpan), n, around(lowest+narrowSpan)
	}
	return neck{}, false
}

// vertex returns where the parabola through three fixed points is lowest, and
// how low.
func vertex(left, middle, right stand) (log, parameter float64) {
	toLeft := (middle.parameter - left.parameter) / (middle.log - left.log)
	toRight := (right.parameter - middle.parameter) / (right.log - middle.log)
	bend := (toRight - toLeft) / (right.log - left.log)
	slope := toLeft + bend*(middle.log-left.log) // at the middle
	step := -slope / (2 * bend)
	return middle.log + step, middle.parameter + slope*step/2
}

// between interpolates the messages between fixed points.
func between(left, middle, right stand, log float64) *density.Density {
	b := []float64{math.Exp(left.log), math.Exp(middle.log), math.Exp(right.log)}
	d := middle.messages.Clone()
	d.Combine(lagrange(math.Exp(log), b), []*density.Density{left.messages, middle.messages, right.messages})
	return d
}

package picture

import (
	"fmt"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg/draw"
)

// Errors is the error probability of messages and of decided bits, iteration
// by iteration.
type Errors struct {
	Subject string
	// States after each iteration, the channel first.
	States []ErrorState
	// Narrowest indexes the state of least progress; -1 if there is none.
	Narrowest int
}

// ErrorState is a pair of probabilities; those that are 0 end their curve.
type ErrorState struct {
	Iteration    int
	Message, Bit float64
}

// leastDrawn is the lowest error probability that a picture shows: nobody
// measures or asks for less, and what is above would be squeezed.
const leastDrawn = 1e-15

// Picture draws the probabilities on a logarithmic axis.
func (e Errors) Picture() Picture {
	messageLine, bitLine := stroke(deep, 1.5), stroke(rust, 1.5, 5, 2.5)
	legend := []key{{text: "messages from variable nodes", line: &messageLine}, {text: "decided bits", line: &bitLine}}
	p := newPlot("iterations")
	last := e.States[len(e.States)-1]
	p.Y.Scale, p.Y.Tick.Marker = plot.LogScale{}, decades{}
	low, high := math.Inf(1), 0.
	for _, s := range e.States {
		for _, v := range []float64{s.Message, s.Bit} {
			high = math.Max(high, v)
			if v > 0 {
				low = math.Min(low, math.Max(v, leastDrawn))
			}
		}
	}
	if high <= 0 { // a channel without errors
		low, high = 0.1, 1
	}
	p.Y.Min, p.Y.Max = math.Pow(10, math.Floor(math.Log10(low))), math.Pow(10, math.Ceil(math.Log10(high)))
	if p.Y.Min >= p.Y.Max {
		p.Y.Max = 10 * p.Y.Min
	}
	messages := e.curve(p.Y.Min, func(s ErrorState) float64 { return s.Message })
	bits := e.curve(p.Y.Min, func(s ErrorState) float64 { return s.Bit })
	p.X.Min, p.X.Max = 0, 1
	for _, q := range append(append([]point{}, messages...), bits...) {
		p.X.Max = math.Max(p.X.Max, math.Ceil(q.x))
	}
	if p.X.Max < 12 {
		p.X.Tick.Marker = whole{}
	}
	alt := fmt.Sprintf("Error probability of %s: messages from %s to %s after %d iterations", e.Subject, short(e.States[0].Message), short(last.Message), last.Iteration)
	if e.Narrowest >= 0 && e.Narrowest < len(e.States) {
		s := e.States[e.Narrowest]
		line := stroke(muted, 0.8, 1.5, 2)
		words := fmt.Sprintf("tunnel narrowest: iteration %d", s.Iteration)
		legend = append(legend, key{text: words, line: &line})
		alt += "; " + words
		p.Add(polyline([]point{{float64(s.Iteration), p.Y.Min}, {float64(s.Iteration), p.Y.Max}}, line))
	}
	p.Add(polyline(bits, bitLine), polyline(messages, messageLine))
	return Picture{
		title: "Error probability against iterations", subject: e.Subject, alt: alt, legend: legend,
		width: defaultWidth, height: 340,
		contents: func(c draw.Canvas) { drawPlot(c, p, "error probability") },
	}
}

// curve follows one probability down to the floor, where it is cut: on a
// logarithmic axis nothing is below.
func (e Errors) curve(floor float64, of func(ErrorState) float64) []point {
	var points []point
	for i, s := range e.States {
		v, x := of(s), float64(s.Iteration)
		if v >= floor {
			points = append(points, point{x, v})
			continue
		}
		if before := of(e.States[max(0, i-1)]); i > 0 && before > floor {
			// Straight on the logarithmic axis; a zero is taken for a fall
			// of many decades.
			to := math.Max(v, leastDrawn*leastDrawn)
			share := math.Log(before/floor) / math.Log(before/to)
			x0 := float64(e.States[i-1].Iteration)
			points = append(points, point{x0 + share*(x-x0), floor})
		}
		break
	}
	return points
}

// whole marks an axis at every whole number.
type whole struct{}

// Ticks implements plot.Ticker.
func (whole) Ticks(low, high float64) []plot.Tick {
	var ticks []plot.Tick
	for v := math.Ceil(low); v <= high; v++ {
		ticks = append(ticks, plot.Tick{Value: v, Label: fmt.Sprintf("%.0f", v)})
	}
	return ticks
}

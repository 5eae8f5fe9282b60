package picture

import (
	"fmt"
	"strconv"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Tunnel is an evolution as an EXIT chart in entropies: the messages from
// variable nodes across, those from check nodes up (ten Brink, IEEE Trans.
// Commun. 49(10), 2001, with entropy in place of mutual information). The
// curve of the check nodes joins the states before and after a check node
// step, that of the variable nodes those before and after a variable node
// step; the trajectory runs between them as a staircase.
type Tunnel struct {
	// Subject says of what profile, on what channel and by what method.
	Subject string
	// States after each iteration, the channel first.
	States []TunnelState
	// Narrowest indexes the state of least progress; -1 if there is none.
	Narrowest int
	// Stalled tells that the evolution ended at a fixed point, the last state.
	Stalled bool
}

// TunnelState is a pair of entropies in bits.
type TunnelState struct {
	Variable float64 // of messages from variable nodes to check nodes
	Check    float64 // of messages from check nodes that these caused
}

// Picture draws the tunnel.
func (t Tunnel) Picture() Picture {
	variable, check := t.curves()
	stairs := t.stairs(0, len(t.States)-1)
	variableLine, checkLine, stairLine := stroke(deep, 1.5), stroke(rust, 1.5, 5, 2.5), stroke(ink, 0.5)
	legend := []key{
		{text: "variable nodes with the channel", line: &variableLine},
		{text: "check nodes", line: &checkLine},
		{text: "trajectory", line: &stairLine},
	}
	p := newPlot("entropy of messages from variable nodes, bit")
	p.X.Min, p.X.Max = 0, 1.04*t.States[0].Variable
	p.Y.Min, p.Y.Max = 0, tunnelTop(t.States[0].Check)
	if end := t.States[len(t.States)-1]; t.Stalled {
		// Nothing happens below the fixed point.
		p.X.Min = max(0, end.Variable-(t.States[0].Variable-end.Variable)/3)
		p.Y.Min = max(0, end.Check-(t.States[0].Check-end.Check)/3)
	}
	walls := func(p *plot.Plot) {
		p.Add(area(append(append([]point{}, variable...), reversed(check)...), fog))
		p.Add(polyline(stairs, stairLine), polyline(variable, variableLine), polyline(check, checkLine))
	}
	walls(p)
	alt := fmt.Sprintf("EXIT chart of %s: %d iterations from message entropy %s bit", t.Subject, len(t.States)-1, short(t.States[0].Variable))
	place, words := t.place()
	var inset *plot.Plot
	if place >= 0 {
		at := []point{t.middle(place)}
		circle := ring(5)
		legend = append(legend, key{text: words, glyph: &circle})
		alt += "; " + words
		p.Add(markers(at, circle))
		if inset = t.inset(place); inset != nil {
			walls(inset)
			inset.Add(markers(at, circle))
		}
	}
	return Picture{
		title: "Decoding tunnel", subject: t.Subject, alt: alt, legend: legend,
		width: defaultWidth, height: 430,
		contents: func(c draw.Canvas) {
			data := drawPlot(c, p, "entropy of messages from check nodes, bit")
			if inset != nil {
				drawInset(data, inset)
			}
		},
	}
}

// tunnelTop is the end of the axis upwards: 1, if the curves come near.
func tunnelTop(highest float64) float64 {
	if highest > 0.8 {
		return 1.02
	}
	return 1.06 * highest
}

// curves returns the two walls, each from the channel to the end.
func (t Tunnel) curves() (variable, check []point) {
	for i, s := range t.States {
		check = append(check, point{s.Variable, s.Check})
		if i > 0 {
			variable = append(variable, point{s.Variable, t.States[i-1].Check})
		}
	}
	if len(variable) == 0 { // a channel without any iteration
		variable = check
	}
	return variable, check
}

// stairs returns the trajectory between two states.
func (t Tunnel) stairs(from, to int) []point {
	var points []point
	for i := from; i <= to; i++ {
		if i > from {
			points = append(points, point{t.States[i].Variable, t.States[i-1].Check})
		}
		points = append(points, point{t.States[i].Variable, t.States[i].Check})
	}
	return points
}

// place returns the state to mark, with words for it; -1 if there is none.
func (t Tunnel) place() (index int, words string) {
	switch {
	case t.Stalled:
		index = len(t.States) - 1
		return index, fmt.Sprintf("closed: fixed point at %s bit", short(t.States[index].Variable))
	case t.Narrowest >= 0 && t.Narrowest < len(t.States):
		return t.Narrowest, fmt.Sprintf("narrowest: iteration %d, %s bit", t.Narrowest, short(t.States[t.Narrowest].Variable))
	}
	return -1, ""
}

// middle returns the middle of the tunnel at a state.
func (t Tunnel) middle(i int) point {
	if i == 0 || t.Stalled && i == len(t.States)-1 {
		return point{t.States[i].Variable, t.States[i].Check}
	}
	return point{t.States[i].Variable, (t.States[i].Check + t.States[i-1].Check) / 2}
}

const (
	// insetSteps is how many steps of the staircase the inset shows.
	insetSteps = 8
	// insetBelow is the length of a step, as a share of the axis, below which
	// the staircase needs an inset to be seen.
	insetBelow = 0.02
)

// inset returns a plot around a place whose stairs are too small to be seen.
func (t Tunnel) inset(place int) *plot.Plot {
	from, to := max(0, place-insetSteps/2), min(len(t.States)-1, place+insetSteps/2)
	if t.Stalled {
		return nil // the walls meet in a point, at any magnification
	}
	a, b := t.States[from], t.States[to]
	step := (a.Variable - b.Variable) / float64(to-from)
	if to-from < 3 || step > insetBelow*t.States[0].Variable || !(a.Variable > b.Variable) || !(a.Check > b.Check) {
		return nil
	}
	p := newPlot("")
	dx, dy := 0.1*(a.Variable-b.Variable), 0.1*(a.Check-b.Check)
	p.X.Min, p.X.Max, p.Y.Min, p.Y.Max = b.Variable-dx, a.Variable+dx, b.Check-dy, a.Check+dy
	p.X.Tick.Marker, p.Y.Tick.Marker = ends{}, ends{}
	for _, axis := range []*plot.Axis{&p.X, &p.Y} {
		axis.Tick.Label.Font.Size = 7.5
		axis.Tick.Length = 3
	}
	return p
}

// drawInset draws into the lower right quarter, below the check node curve.
func drawInset(data draw.Canvas, p *plot.Plot) {
	size := data.Size()
	box := draw.Crop(data, size.X*0.5, -size.X*0.03, size.Y*0.05, -size.Y*0.5)
	c := box
	c.SetColor(paper)
	c.Fill(c.Rectangle.Path())
	title := sized(regular, tickSize, muted)
	title.YAlign = text.YTop
	c.FillText(title, vg.Point{X: c.Min.X + 8, Y: c.Max.Y - 2}, "the same, around the mark")
	p.Draw(draw.Crop(c, 4, -14, 4, -16))
	frame := stroke(muted, 0.6)
	c.StrokeLines(frame, []vg.Point{c.Min, {X: c.Max.X, Y: c.Min.Y}, c.Max, {X: c.Min.X, Y: c.Max.Y}, c.Min})
}

// ends marks an axis near its two ends only.
type ends struct{}

// Ticks implements plot.Ticker.
func (ends) Ticks(low, high float64) []plot.Tick {
	all := linear{}.Ticks(low, high)
	if len(all) > 2 {
		all = []plot.Tick{all[0], all[len(all)-1]}
	}
	return all
}

func reversed(points []point) []point {
	out := make([]point, len(points))
	for i, p := range points {
		out[len(points)-1-i] = p
	}
	return out
}

// short writes a figure for a legend.
func short(v float64) string { return strconv.FormatFloat(v, 'g', 4, 64) }

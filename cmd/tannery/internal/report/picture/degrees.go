package picture

import (
	"fmt"
	"image/color"
	"math"
	"strconv"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Degrees is a degree profile: for each degree the fraction of edges and the
// fraction of nodes that have it.
type Degrees struct {
	Subject         string
	Variable, Check []DegreeShare // in increasing order of degree
}

// DegreeShare is one degree with its fractions, from 0 to 1.
type DegreeShare struct {
	Degree       int
	Edges, Nodes float64
}

// Picture draws bars for variable nodes, and beside them for check nodes.
func (d Degrees) Picture() Picture {
	variable, check := bars(d.Variable, "variable node degree"), bars(d.Check, "check node degree")
	top := math.Max(variable.Y.Max, check.Y.Max)
	variable.Y.Max, check.Y.Max = top, top
	return Picture{
		title:   "Degree profile",
		subject: d.Subject,
		alt:     fmt.Sprintf("Degree profile of %s: %s; %s", d.Subject, largest("variable node", d.Variable), largest("check node", d.Check)),
		legend:  []key{{text: "of edges (λ, ρ)", fill: deep}, {text: "of nodes", fill: reed}},
		width:   defaultWidth, height: 300,
		contents: func(c draw.Canvas) {
			// The panels share the width by their numbers of bars, within limits.
			share := float64(len(d.Variable)) / float64(len(d.Variable)+len(d.Check))
			share = math.Min(0.75, math.Max(0.45, share))
			split := c.Size().X * vg.Length(share)
			left, right := draw.Crop(c, 0, split-c.Size().X-8, 0, 0), draw.Crop(c, split+8, 0, 0, 0)
			variable.X.Tick.Marker = named{d.Variable, left.Size().X - 40}
			check.X.Tick.Marker = named{d.Check, right.Size().X - 25}
			drawPlot(left, variable, "fraction")
			check.Draw(right)
		},
	}
}

// largest tells the degrees for those who cannot see the bars.
func largest(kind string, shares []DegreeShare) string {
	best := shares[0]
	for _, s := range shares {
		if s.Edges > best.Edges {
			best = s
		}
	}
	return fmt.Sprintf("%s degrees %d to %d, most edges (%.1f %%) at degree %d", kind, shares[0].Degree, shares[len(shares)-1].Degree, 100*best.Edges, best.Degree)
}

// bars returns a panel, one pair of bars for each degree at equal distances:
// degrees that are far apart need no room between them.
func bars(shares []DegreeShare, x string) *plot.Plot {
	p := newPlot(x)
	p.X.Min, p.X.Max = -0.6, float64(len(shares))-0.4
	p.X.Tick.Marker = named{shares, defaultWidth}
	p.X.Tick.Length = 3
	p.Y.Min = 0
	highest := 0.
	for i, s := range shares {
		at := float64(i)
		p.Add(bar(at-0.38, at, s.Edges, deep), bar(at, at+0.38, s.Nodes, reed))
		highest = math.Max(highest, math.Max(s.Edges, s.Nodes))
	}
	p.Y.Max = math.Min(1.0001, 1.08*highest)
	return p
}

func bar(left, right, height float64, fill color.Color) plot.Plotter {
	return area([]point{{left, 0}, {right, 0}, {right, height}, {left, height}}, fill)
}

// named marks the bars with their degrees; where there are more bars than
// names fit into the width, only some of them.
type named struct {
	shares []DegreeShare
	width  vg.Length
}

// Ticks implements plot.Ticker.
func (n named) Ticks(_, _ float64) []plot.Tick {
	last := len(n.shares) - 1
	widest := sized(regular, tickSize, ink).Width(strconv.Itoa(n.shares[last].Degree)) + 6
	every := max(1, int(math.Ceil(float64(len(n.shares))*float64(widest/n.width))))
	var ticks []plot.Tick
	for i, s := range n.shares {
		// The last one is named rather than its neighbour.
		if i == last || i%every == 0 && last-i >= every {
			ticks = append(ticks, plot.Tick{Value: float64(i), Label: strconv.Itoa(s.Degree)})
		}
	}
	return ticks
}

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
	variable, check := bars(d.Variable, "variable node degree", "fraction"), bars(d.Check, "check node degree", "")
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
			variable.Draw(draw.Crop(c, 0, split-c.Size().X-8, 0, 0))
			check.Draw(draw.Crop(c, split+8, 0, 0, 0))
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
func bars(shares []DegreeShare, x, y string) *plot.Plot {
	p := newPlot(x, y)
	p.X.Min, p.X.Max = -0.6, float64(len(shares))-0.4
	p.X.Tick.Marker = named(shares)
	p.X.Tick.Length = 0
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

// maxNames is how many degrees can be written under an axis of its width.
const maxNames = 16

// named marks the bars with their degrees; with many bars only some of them.
type named []DegreeShare

// Ticks implements plot.Ticker.
func (n named) Ticks(_, _ float64) []plot.Tick {
	every := (len(n) + maxNames - 1) / maxNames
	var ticks []plot.Tick
	for i, s := range n {
		label := strconv.Itoa(s.Degree)
		if i%every != 0 && (i != len(n)-1 || i%every < every/2+1) {
			continue
		}
		ticks = append(ticks, plot.Tick{Value: float64(i), Label: label})
	}
	return ticks
}

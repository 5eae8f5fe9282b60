package picture

import (
	"fmt"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg/draw"
)

// Gaps sets the gap to the Shannon limit against the largest variable degree.
type Gaps struct {
	Subject string
	Unit    string // of the gaps: dB, or the symbol of the channel parameter
	Points  []GapPoint
}

// GapPoint is a profile.
type GapPoint struct {
	Name          string
	Own           bool // the profile that the others are set beside
	LargestDegree int
	Gap           float64
}

// wideGaps is the ratio of the largest gap to the least above which they are
// drawn on a logarithmic axis.
const wideGaps = 20

// Picture draws the gaps, from 0 unless they are very different.
func (g Gaps) Picture() Picture {
	p := newPlot("largest variable degree")
	dot := dotOf(false)
	names := make([]string, len(g.Points))
	var x, y span
	for i, q := range g.Points {
		names[i] = q.Name
		x.hold(float64(q.LargestDegree))
		y.hold(q.Gap)
	}
	short, pattern := shortNames(names)
	if y.low > 0 && y.high > wideGaps*y.low {
		p.Y.Scale, p.Y.Tick.Marker = plot.LogScale{}, decades{plain: true}
		p.Y.Min, p.Y.Max = y.low/1.4, y.high*1.4
	} else {
		y.hold(0)
		p.Y.Min, p.Y.Max = y.padded(0.1)
		if y.low == 0 {
			p.Y.Min = 0
		}
	}
	if x.high >= 10*x.low || x.high > 40 {
		p.X.Scale, p.X.Tick.Marker = plot.LogScale{}, decades{plain: true}
		p.X.Min, p.X.Max = x.low*0.75, x.high*1.6
	} else {
		p.X.Min, p.X.Max = x.low-1, x.high+1
		if p.X.Max-p.X.Min <= 16 {
			p.X.Tick.Marker = whole{}
		}
	}
	var marks []labelled
	for i, q := range g.Points {
		at := point{float64(q.LargestDegree), q.Gap}
		p.Add(markers([]point{at}, dotOf(q.Own)))
		marks = append(marks, labelled{at, short[i]})
	}
	p.Add(labels(marks, nil))
	legend := []key{{text: "gap of a profile", glyph: &dot}}
	if slices.ContainsFunc(g.Points, func(q GapPoint) bool { return q.Own }) {
		legend = append(legend, ownKey())
	}
	return Picture{
		title: "Gap against the largest degree", subject: g.Subject + pattern,
		alt:    fmt.Sprintf("Gaps of %d profiles to the Shannon limit in %s against their largest variable degree; %s", len(g.Points), g.Unit, g.Subject),
		legend: legend,
		width:  defaultWidth, height: defaultHeight,
		contents: func(c draw.Canvas) { drawPlot(c, p, "gap to the Shannon limit, "+g.Unit) },
	}
}

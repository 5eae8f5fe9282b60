package picture

import (
	"fmt"
	"math"

	"gonum.org/v1/plot/vg/draw"
)

// Cost sets thresholds against the edges per code bit, which are a decoder's
// work in an iteration.
type Cost struct {
	Subject string
	Symbol  string // of the channel parameter
	Points  []CostPoint
}

// CostPoint is a profile.
type CostPoint struct {
	Name        string
	Own         bool // the profile that the others are set beside
	EdgesPerBit float64
	Threshold   float64
	Limit       float64 // Shannon limit at its rate; NaN if there is none
}

// Picture draws each threshold below its Shannon limit, so that the gap is the
// line between them.
func (o Cost) Picture() Picture {
	p := newPlot("edges per code bit")
	limit, gap, dot := stroke(rust, 1.3), stroke(muted, 0.6, 1.5, 2), dotOf(false)
	names := make([]string, len(o.Points))
	var x, y span
	for i, q := range o.Points {
		names[i] = q.Name
		x.hold(q.EdgesPerBit)
		y.hold(q.Threshold)
		if !math.IsNaN(q.Limit) {
			y.hold(q.Limit)
		}
	}
	short, pattern := shortNames(names)
	p.X.Min, p.X.Max = x.padded(0.1)
	p.Y.Min, p.Y.Max = y.padded(0.08)
	common, same := o.commonLimit()
	var guides [][2]point
	if same {
		line := [2]point{{p.X.Min, common}, {p.X.Max, common}}
		guides = append(guides, line)
		p.Add(polyline(line[:], limit))
	}
	var marks []labelled
	width := (p.X.Max - p.X.Min) / 60
	for i, q := range o.Points {
		if !math.IsNaN(q.Limit) && !same {
			up := [2]point{{q.EdgesPerBit, q.Threshold}, {q.EdgesPerBit, q.Limit}}
			end := [2]point{{q.EdgesPerBit - width, q.Limit}, {q.EdgesPerBit + width, q.Limit}}
			p.Add(polyline(up[:], gap), polyline(end[:], limit))
			guides = append(guides, up, end)
		}
		p.Add(markers([]point{{q.EdgesPerBit, q.Threshold}}, dotOf(q.Own)))
		marks = append(marks, labelled{point{q.EdgesPerBit, q.Threshold}, short[i]})
	}
	p.Add(labels(marks, guides))
	return Picture{
		title: "Threshold against edges per code bit", subject: o.Subject + pattern,
		alt:    fmt.Sprintf("Thresholds of %d profiles against their edges per code bit, with the Shannon limit; %s", len(o.Points), o.Subject),
		legend: []key{{text: "threshold of a profile", glyph: &dot}, {text: "Shannon limit at its rate", line: &limit}},
		width:  defaultWidth, height: defaultHeight,
		contents: func(c draw.Canvas) { drawPlot(c, p, "threshold "+o.Symbol) },
	}
}

// sameLimit is the relative difference below which limits are drawn as one:
// less than the width of a line.
const sameLimit = 1e-3

func (o Cost) commonLimit() (limit float64, same bool) {
	var s span
	for _, q := range o.Points {
		if math.IsNaN(q.Limit) {
			return 0, false
		}
		s.hold(q.Limit)
	}
	return (s.low + s.high) / 2, s.high-s.low <= sameLimit*s.high
}

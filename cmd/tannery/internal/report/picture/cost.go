package picture

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/plot"
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
	EdgesPerBit float64
	Threshold   float64
	Limit       float64 // Shannon limit at its rate; NaN if there is none
}

// Picture draws each threshold below its Shannon limit, so that the gap is the
// line between them.
func (o Cost) Picture() Picture {
	p := newPlot("edges per code bit", "threshold "+o.Symbol)
	limit, gap, dot := stroke(rust, 1.3, 5, 2.5), stroke(muted, 0.6, 1.5, 2), glyph(deep, 3, draw.CircleGlyph{})
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
	prefix := commonPrefix(names)
	p.X.Min, p.X.Max = x.padded(0.1)
	p.Y.Min, p.Y.Max = y.padded(0.08)
	common, same := o.commonLimit()
	var guides []float64
	if same {
		guides = []float64{common}
		p.Add(polyline([]point{{p.X.Min, common}, {p.X.Max, common}}, limit))
	}
	var marks []labelled
	width := (p.X.Max - p.X.Min) / 60
	for _, q := range o.Points {
		if !math.IsNaN(q.Limit) && !same {
			p.Add(polyline([]point{{q.EdgesPerBit, q.Threshold}, {q.EdgesPerBit, q.Limit}}, gap))
			p.Add(polyline([]point{{q.EdgesPerBit - width, q.Limit}, {q.EdgesPerBit + width, q.Limit}}, stroke(rust, 1.3)))
		}
		p.Add(markers([]point{{q.EdgesPerBit, q.Threshold}}, dot))
		marks = append(marks, labelled{point{q.EdgesPerBit, q.Threshold}, strings.TrimPrefix(q.Name, prefix)})
	}
	p.Add(labels(marks, guides))
	return Picture{
		title: "Threshold against edges per code bit", subject: o.Subject + namesStart(prefix),
		alt:    fmt.Sprintf("Thresholds of %d profiles against their edges per code bit, with the Shannon limit; %s", len(o.Points), o.Subject),
		legend: []key{{text: "threshold of a profile", glyph: &dot}, {text: "Shannon limit at its rate", line: &limit}},
		width:  defaultWidth, height: defaultHeight,
		contents: func(c draw.Canvas) { p.Draw(c) },
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

// Gaps sets the gap to the Shannon limit against the largest variable degree.
type Gaps struct {
	Subject string
	Unit    string // of the gaps: dB, or the symbol of the channel parameter
	Points  []GapPoint
}

// GapPoint is a profile.
type GapPoint struct {
	Name          string
	LargestDegree int
	Gap           float64
}

// Picture draws the gaps from 0.
func (g Gaps) Picture() Picture {
	p := newPlot("largest variable degree", "gap to the Shannon limit, "+g.Unit)
	dot := glyph(deep, 3, draw.CircleGlyph{})
	names := make([]string, len(g.Points))
	var x, y span
	for i, q := range g.Points {
		names[i] = q.Name
		x.hold(float64(q.LargestDegree))
		y.hold(q.Gap)
	}
	prefix := commonPrefix(names)
	y.hold(0)
	p.Y.Min, p.Y.Max = y.low, y.high+0.12*(y.high-y.low)
	if y.low < 0 {
		p.Y.Min, _ = y.padded(0.08)
	}
	if p.Y.Max <= p.Y.Min {
		p.Y.Max = p.Y.Min + 1
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
	for _, q := range g.Points {
		at := point{float64(q.LargestDegree), q.Gap}
		p.Add(markers([]point{at}, dot))
		marks = append(marks, labelled{at, strings.TrimPrefix(q.Name, prefix)})
	}
	p.Add(labels(marks, nil))
	return Picture{
		title: "Gap against the largest degree", subject: g.Subject + namesStart(prefix),
		alt:    fmt.Sprintf("Gaps of %d profiles to the Shannon limit in %s against their largest variable degree; %s", len(g.Points), g.Unit, g.Subject),
		legend: []key{{text: "gap of a profile", glyph: &dot}},
		width:  defaultWidth, height: defaultHeight,
		contents: func(c draw.Canvas) { p.Draw(c) },
	}
}

// span is a range of values.
type span struct {
	low, high float64
	any       bool
}

func (s *span) hold(v float64) {
	if !s.any {
		s.low, s.high, s.any = v, v, true
	}
	s.low, s.high = math.Min(s.low, v), math.Max(s.high, v)
}

// padded returns the range with a share of it added on both sides; a single
// value gets a tenth of itself.
func (s span) padded(share float64) (low, high float64) {
	pad := share * (s.high - s.low)
	if pad <= 1e-9*math.Abs(s.high) {
		pad = math.Max(math.Abs(s.high)/10, 1e-9)
	}
	return s.low - pad, s.high + pad
}

// commonPrefix returns the beginning that all names share, up to a hyphen, so
// that labels need not repeat it; nothing for less than three names.
func commonPrefix(names []string) string {
	if len(names) < 3 {
		return ""
	}
	prefix := names[0]
	for _, n := range names[1:] {
		for !strings.HasPrefix(n, prefix) {
			prefix = prefix[:len(prefix)-1]
		}
	}
	return prefix[:strings.LastIndexByte(prefix, '-')+1]
}

func namesStart(prefix string) string {
	if prefix == "" {
		return ""
	}
	return "; names begin with " + prefix
}

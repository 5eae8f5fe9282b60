package picture

import (
	"fmt"
	"image/color"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Curves are measured error rates with their confidence intervals, beside the
// limits that theory sets.
type Curves struct {
	Subject    string
	Axis       string // what goes across, with its unit
	Confidence float64
	Series     []Curve
	Limits     []CurveLimit
}

// Curve is one measured rate.
type Curve struct {
	Name   string
	Points []CurvePoint // in increasing order of X
}

// CurvePoint is a measured rate with its confidence interval. A rate of 0, no
// error seen, is drawn as an arrow at its upper bound. A rate without an
// interval, High 0, is theory's: drawn as far down as what is measured.
type CurvePoint struct{ X, Rate, Low, High float64 }

// CurveLimit is a place on the axis across.
type CurveLimit struct {
	Name string
	X    float64
}

// styles of series: colour, dashes and marker all differ.
var styles = []struct {
	colour color.NRGBA
	dashes []vg.Length
	shape  draw.GlyphDrawer
}{
	{deep, nil, draw.CircleGlyph{}},
	{rust, []vg.Length{5, 2.5}, draw.SquareGlyph{}},
	{reed, []vg.Length{2, 2}, draw.PyramidGlyph{}},
	{ink, []vg.Length{7, 2, 1.5, 2}, draw.BoxGlyph{}},
}

// limitStyles tell the limits apart.
var limitStyles = []draw.LineStyle{
	stroke(ink, 1), stroke(ink, 1, 6, 3), stroke(ink, 1, 1.5, 2), stroke(muted, 1, 8, 2, 2, 2),
}

// Picture draws the curves.
func (k Curves) Picture() Picture {
	p := newPlot(k.Axis)
	p.Y.Scale, p.Y.Tick.Marker = plot.LogScale{}, decades{}
	var x, y span
	for _, s := range k.Series {
		for _, q := range s.Points {
			x.hold(q.X)
			if !(q.High > 0) {
				continue // theory knows no floor
			}
			for _, v := range []float64{q.Rate, q.High} {
				if v > 0 {
					y.hold(v)
				}
			}
		}
	}
	for _, l := range k.Limits {
		x.hold(l.X)
	}
	if !y.any {
		y = span{1e-6, 1, true}
	}
	p.X.Min, p.X.Max = x.padded(0.06)
	p.Y.Min, p.Y.Max = math.Pow(10, math.Floor(math.Log10(y.low/1.2))), 1
	var legend []key
	var bounds []plot.Plotter
	alt := fmt.Sprintf("Measured error rates; %s", k.Subject)
	for i, s := range k.Series {
		style := styles[i%len(styles)]
		line, dot := stroke(style.colour, 1.4, style.dashes...), glyph(style.colour, 2.8, style.shape)
		for _, outline := range bands(s.Points, p.Y.Min) {
			if len(outline) == 2 { // a point alone
				p.Add(polyline(outline, stroke(veiled(style.colour), 4)))
			}
			p.Add(area(outline, veiled(style.colour)))
		}
		var course, seen, unseen []point
		for _, q := range s.Points {
			switch {
			case q.Rate > 0:
				course = append(course, point{q.X, q.Rate})
				if q.Rate >= p.Y.Min {
					seen = append(seen, point{q.X, q.Rate})
				}
			case q.High > 0:
				unseen = append(unseen, point{q.X, math.Min(q.High, 1)})
			}
		}
		p.Add(polyline(course, line), markers(seen, dot))
		// Where bits have the bound of frames, that of frames is seen.
		bounds = append([]plot.Plotter{arrows(unseen, style.colour)}, bounds...)
		legend = append(legend, key{text: s.Name, line: &line, glyph: &dot})
		if len(seen) > 0 {
			last := seen[len(seen)-1]
			alt += fmt.Sprintf("; %s: %s at %s", s.Name, short(last.y), short(last.x))
		}
	}
	if len(k.Series) > 0 {
		legend = append(legend, key{text: fmt.Sprintf("%g %% confidence", 100*k.Confidence), fill: veiled(styles[0].colour)})
	}
	p.Add(bounds...)
	for i, l := range k.Limits {
		line := limitStyles[i%len(limitStyles)]
		p.Add(polyline([]point{{l.X, p.Y.Min}, {l.X, p.Y.Max}}, line))
		legend = append(legend, key{text: fmt.Sprintf("%s, %s", l.Name, short(l.X)), line: &line})
		alt += fmt.Sprintf("; %s at %s", l.Name, short(l.X))
	}
	return Picture{
		title: "Measured error rates beside the limits", subject: k.Subject, alt: alt, legend: legend,
		width: defaultWidth, height: 430,
		contents: func(c draw.Canvas) { drawPlot(c, p, "error rate") },
	}
}

// bands returns the outlines of the confidence intervals, cut at the floor. They
// are interrupted where no error was seen: the arrow says what is known there,
// and the bound is far above what neighbours with errors speak for.
func bands(points []CurvePoint, floor float64) [][]point {
	var outlines [][]point
	var upper, lower []point
	end := func() {
		if len(upper) > 0 {
			outlines = append(outlines, append(upper, reversed(lower)...))
		}
		upper, lower = nil, nil
	}
	for _, q := range points {
		if !(q.Rate > 0 && q.High > 0) {
			end()
			continue
		}
		upper = append(upper, point{q.X, math.Max(floor, math.Min(1, q.High))})
		lower = append(lower, point{q.X, math.Max(floor, math.Min(1, q.Low))})
	}
	end()
	return outlines
}

// arrows point down from upper bounds: the rate is somewhere below.
func arrows(points []point, c color.Color) plot.Plotter {
	return drawn(func(canvas draw.Canvas, p *plot.Plot) {
		line := stroke(c, 1)
		for _, at := range placed(canvas, p, points) {
			tip := at.Y - 14
			canvas.StrokeLine2(line, at.X-3, at.Y, at.X+3, at.Y)
			canvas.StrokeLine2(line, at.X, at.Y, at.X, tip)
			canvas.StrokeLines(line, []vg.Point{{X: at.X - 2.5, Y: tip + 4}, {X: at.X, Y: tip}, {X: at.X + 2.5, Y: tip + 4}})
		}
	})
}

package picture

import (
	"gonum.org/v1/plot"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// labelled is a point with its name.
type labelled struct {
	point
	name string
}

// labels writes names beside their points so that no two overlap, none covers
// a point or one of the guides, and none leaves the plot: for each point, in
// order, the first of several places that is free. A name for which there is
// no room is left out.
func labels(points []labelled, guides []float64) plot.Plotter {
	return drawn(func(c draw.Canvas, p *plot.Plot) {
		style := sized(regular, tickSize, ink)
		style.YAlign = text.YCenter
		x, y := p.Transforms(&c)
		var taken []vg.Rectangle
		for _, l := range points {
			at := vg.Point{X: x(l.x), Y: y(l.y)}
			taken = append(taken, around(at, 4, 4))
		}
		for _, g := range guides {
			taken = append(taken, vg.Rectangle{Min: vg.Point{X: c.Min.X, Y: y(g) - 1}, Max: vg.Point{X: c.Max.X, Y: y(g) + 1}})
		}
		for _, l := range points {
			at := vg.Point{X: x(l.x), Y: y(l.y)}
			half := style.Width(l.name) / 2
			for _, offset := range labelPlaces(half) {
				box := around(at.Add(offset), half+1, tickSize*0.55)
				if inside(c.Rectangle, box) && !overlapsAny(box, taken) {
					c.FillText(style, vg.Point{X: box.Min.X + 1, Y: at.Y + offset.Y}, l.name)
					taken = append(taken, box)
					break
				}
			}
		}
	})
}

// labelPlaces are offsets of the middle of a label of a half width from its
// point, the best first.
func labelPlaces(half vg.Length) []vg.Point {
	const near, far = 7, 12
	return []vg.Point{
		{X: half + near}, {X: -half - near}, {Y: far}, {Y: -far},
		{X: half + near, Y: far - 3}, {X: half + near, Y: 3 - far},
		{X: -half - near, Y: far - 3}, {X: -half - near, Y: 3 - far},
		{Y: 2 * far}, {Y: -2 * far}, {X: half + near, Y: 2 * far}, {X: -half - near, Y: 2 * far},
		{X: half + near, Y: -2 * far}, {X: -half - near, Y: -2 * far},
	}
}

func around(at vg.Point, halfWidth, halfHeight vg.Length) vg.Rectangle {
	d := vg.Point{X: halfWidth, Y: halfHeight}
	return vg.Rectangle{Min: at.Sub(d), Max: at.Add(d)}
}

func inside(outer, r vg.Rectangle) bool {
	return r.Min.X >= outer.Min.X && r.Max.X <= outer.Max.X && r.Min.Y >= outer.Min.Y && r.Max.Y <= outer.Max.Y
}

func overlapsAny(r vg.Rectangle, others []vg.Rectangle) bool {
	for _, o := range others {
		if r.Min.X < o.Max.X && o.Min.X < r.Max.X && r.Min.Y < o.Max.Y && o.Min.Y < r.Max.Y {
			return true
		}
	}
	return false
}

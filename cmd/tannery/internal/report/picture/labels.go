package picture

import (
	"math"

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
// order, the first of several places that is free. From the places farther
// away a thin line leads to the point. A name without room is left out.
func labels(points []labelled, guides [][2]point) plot.Plotter {
	return drawn(func(c draw.Canvas, p *plot.Plot) {
		style := sized(regular, tickSize, ink)
		style.YAlign = text.YCenter
		x, y := p.Transforms(&c)
		at := func(q point) vg.Point { return vg.Point{X: x(q.x), Y: y(q.y)} }
		var taken []vg.Rectangle
		for _, l := range points {
			taken = append(taken, around(at(l.point), 3.5, 3.5))
		}
		for _, g := range guides {
			from, to := at(g[0]), at(g[1])
			taken = append(taken, vg.Rectangle{
				Min: vg.Point{X: min(from.X, to.X) - 1, Y: min(from.Y, to.Y) - 1},
				Max: vg.Point{X: max(from.X, to.X) + 1, Y: max(from.Y, to.Y) + 1},
			})
		}
		leader := stroke(muted, 0.4)
		for _, l := range points {
			from := at(l.point)
			half := style.Width(l.name)/2 + 1
			for _, place := range labelPlaces(half) {
				box := around(from.Add(place.offset), half, tickSize*0.55)
				end := edge(from, box)
				if !inside(c.Rectangle, box) || overlapsAny(box, taken) || place.far && crosses(from, end, taken) {
					continue
				}
				if place.far {
					c.StrokeLine2(leader, from.X, from.Y, end.X, end.Y)
					taken = append(taken, steps(from, end)...)
				}
				c.FillText(style, vg.Point{X: box.Min.X + 1, Y: box.Min.Y + tickSize*0.6}, l.name)
				taken = append(taken, box)
				break
			}
		}
	})
}

// labelPlace is an offset of the middle of a label from its point.
type labelPlace struct {
	offset vg.Point
	far    bool // needs a line to the point
}

// labelPlaces lists places for a label of a half width, the best first.
func labelPlaces(half vg.Length) []labelPlace {
	const near, above = 6, 11
	places := []labelPlace{
		{offset: vg.Point{X: half + near}}, {offset: vg.Point{X: -half - near}},
		{offset: vg.Point{Y: above}}, {offset: vg.Point{Y: -above}},
		{offset: vg.Point{X: half + near - 2, Y: above - 4}}, {offset: vg.Point{X: half + near - 2, Y: 4 - above}},
		{offset: vg.Point{X: 2 - half - near, Y: above - 4}}, {offset: vg.Point{X: 2 - half - near, Y: 4 - above}},
	}
	for _, distance := range []float64{20, 30, 42, 56, 72} {
		for _, degrees := range []float64{-45, 135, -90, 90, -25, 155, 25, -155, 45, -135, 65, -65, 115, -115} {
			sin, cos := math.Sincos(degrees * math.Pi / 180)
			places = append(places, labelPlace{vg.Point{
				X: vg.Length(distance*cos) + half*vg.Length(math.Copysign(math.Min(1, 2*math.Abs(cos)), cos)),
				Y: vg.Length(distance * sin),
			}, true})
		}
	}
	return places
}

// edge returns the place of the box nearest to the point.
func edge(from vg.Point, box vg.Rectangle) vg.Point {
	return vg.Point{
		X: min(max(from.X, box.Min.X), box.Max.X),
		Y: min(max(from.Y, box.Min.Y+2), box.Max.Y-2),
	}
}

// steps covers a line by small boxes, but for its beginning, where the point
// itself is.
func steps(from, to vg.Point) []vg.Rectangle {
	const size = 2
	length := vg.Length(math.Hypot(float64(to.X-from.X), float64(to.Y-from.Y)))
	var boxes []vg.Rectangle
	for d := vg.Length(6); d <= length; d += size {
		share := d / length
		boxes = append(boxes, around(vg.Point{X: from.X + share*(to.X-from.X), Y: from.Y + share*(to.Y-from.Y)}, size/2, size/2))
	}
	return boxes
}

func crosses(from, to vg.Point, taken []vg.Rectangle) bool {
	for _, box := range steps(from, to) {
		if overlapsAny(box, taken) {
			return true
		}
	}
	return false
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

package picture

import (
	"image/color"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// point is a place in the coordinates of the data.
type point struct{ x, y float64 }

// polyline draws a line through points, clipped to the plot.
func polyline(points []point, style draw.LineStyle) plot.Plotter {
	return drawn(func(c draw.Canvas, p *plot.Plot) {
		c.StrokeLines(style, c.ClipLinesXY(placed(c, p, points))...)
	})
}

// area fills a polygon, clipped to the plot.
func area(points []point, fill color.Color) plot.Plotter {
	return drawn(func(c draw.Canvas, p *plot.Plot) {
		c.FillPolygon(fill, c.ClipPolygonXY(placed(c, p, points)))
	})
}

// markers draws a glyph at each point.
func markers(points []point, glyph draw.GlyphStyle) plot.Plotter {
	return drawn(func(c draw.Canvas, p *plot.Plot) {
		for _, at := range placed(c, p, points) {
			c.DrawGlyphNoClip(glyph, at)
		}
	})
}

func placed(c draw.Canvas, p *plot.Plot, points []point) []vg.Point {
	x, y := p.Transforms(&c)
	all := make([]vg.Point, len(points))
	for i, at := range points {
		all[i] = vg.Point{X: x(at.x), Y: y(at.y)}
	}
	return all
}

// glyph returns a marker of a shape.
func glyph(c color.Color, radius float64, shape draw.GlyphDrawer) draw.GlyphStyle {
	return draw.GlyphStyle{Color: c, Radius: vg.Length(radius), Shape: shape}
}

// ring is a marker through which the data stay visible.
func ring(radius float64) draw.GlyphStyle {
	return glyph(ink, radius, draw.RingGlyph{})
}

// dotOf is the marker of a profile, or of the one that the others are set
// beside.
func dotOf(own bool) draw.GlyphStyle {
	if own {
		return glyph(rust, 4.5, draw.PyramidGlyph{})
	}
	return glyph(deep, 3, draw.CircleGlyph{})
}

// ownKey explains that marker.
func ownKey() key {
	own := dotOf(true)
	return key{text: "this profile", glyph: &own}
}

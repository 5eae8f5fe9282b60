package picture

import (
	"image/color"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// key explains one kind of mark: a line, a glyph on it, a filled area, or
// several of these.
type key struct {
	text  string
	line  *draw.LineStyle
	glyph *draw.GlyphStyle
	fill  color.Color
}

const (
	keyWidth = 24 // of the sample
	keyGap   = 5  // between sample and text
	keySpace = 16 // between keys
)

// legendStrip writes the keys in rows at the top, outside of the plot where
// they hide nothing, and returns the height used.
func legendStrip(c draw.Canvas, keys []key) vg.Length {
	if len(keys) == 0 {
		return 0
	}
	style := sized(regular, textSize, ink)
	x, y := c.Min.X, c.Max.Y-lineHeight
	for _, k := range keys {
		width := keyWidth + keyGap + style.Width(k.text)
		if x > c.Min.X && x+width > c.Max.X {
			x, y = c.Min.X, y-lineHeight-2
		}
		middle := y + textSize*0.32
		if k.fill != nil {
			c.FillPolygon(k.fill, []vg.Point{{X: x, Y: middle - 4}, {X: x + keyWidth, Y: middle - 4}, {X: x + keyWidth, Y: middle + 4}, {X: x, Y: middle + 4}})
		}
		if k.line != nil {
			c.StrokeLine2(*k.line, x, middle, x+keyWidth, middle)
		}
		if k.glyph != nil {
			c.DrawGlyphNoClip(*k.glyph, vg.Point{X: x + keyWidth/2, Y: middle})
		}
		c.FillText(style, vg.Point{X: x + keyWidth + keyGap, Y: y}, k.text)
		x += width + keySpace
	}
	return c.Max.Y - y + 8
}

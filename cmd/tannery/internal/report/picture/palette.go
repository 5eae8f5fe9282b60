package picture

import (
	"fmt"
	"image/color"
	"strings"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// The colours. The three of series have the relative luminances 0.06, 0.21
// and 0.47, so that they stay apart in grey and to colour-blind eyes.
var (
	paper = color.NRGBA{0xFF, 0xFF, 0xFF, 0xFF}
	ink   = color.NRGBA{0x20, 0x26, 0x2E, 0xFF} // text, frames, trajectories
	muted = color.NRGBA{0x5C, 0x66, 0x70, 0xFF} // captions and guides
	rule  = color.NRGBA{0xDF, 0xE3, 0xE6, 0xFF} // grid
	deep  = color.NRGBA{0x1F, 0x46, 0x70, 0xFF} // first series
	rust  = color.NRGBA{0xC0, 0x5F, 0x2E, 0xFF} // second series
	reed  = color.NRGBA{0x93, 0xBB, 0xA4, 0xFF} // third series
	fog   = color.NRGBA{0xEE, 0xF3, 0xF0, 0xFF} // the room within a tunnel
)

// Colour is a colour of pictures with its CSS variable.
type Colour struct {
	Variable    string // such as --ink
	Light, Dark string // hexadecimal, for light and for dark pages
}

// Colours lists the variables that Inline uses. A page must define them.
func Colours() []Colour {
	colours := make([]Colour, len(roles))
	for i, r := range roles {
		colours[i] = Colour{r.variable, hex(r.light), r.dark}
	}
	return colours
}

var roles = []struct {
	variable string
	light    color.NRGBA
	dark     string
}{
	{"--paper", paper, "#14181C"},
	{"--ink", ink, "#E4E8EB"},
	{"--muted", muted, "#9AA5AE"},
	{"--rule", rule, "#2E363D"},
	{"--deep", deep, "#8FB9E6"},
	{"--rust", rust, "#CC7440"},
	{"--reed", reed, "#456857"},
	{"--fog", fog, "#1C2420"},
}

// variables replaces colours by their variables.
func variables(svg string) string {
	pairs := make([]string, 0, 4*len(roles))
	for _, r := range roles {
		pairs = append(pairs, ":"+hex(r.light), ":var("+r.variable+")")
		veiled := r.light
		veiled.A = veil
		if h := hex(veiled); h != hex(r.light) {
			pairs = append(pairs, ":"+h, ":var("+r.variable+")")
		}
	}
	return strings.NewReplacer(pairs...).Replace(svg)
}

// veil is the opacity of confidence bands, from 0 to 255.
const veil = 0x40

// hex writes a colour as the SVG canvas does, with its rounding.
func hex(c color.NRGBA) string {
	r, g, b, a := c.RGBA()
	scale := 255 / float64(a)
	return fmt.Sprintf("#%02X%02X%02X", int(float64(r)*scale), int(float64(g)*scale), int(float64(b)*scale))
}

func veiled(c color.NRGBA) color.NRGBA {
	c.A = veil
	return c
}

// Sizes of text in points.
const (
	headingSize = 12
	textSize    = 9
	tickSize    = 8.5
)

var (
	sans    = font.NewCache(liberation.Collection())
	handler = text.Plain{Fonts: sans}
	regular = font.Font{Typeface: "Liberation", Variant: "Sans"}
	bold    = font.Font{Typeface: "Liberation", Variant: "Sans", Weight: xfont.WeightBold}
)

// sized returns a style, aligned to the left on its baseline.
func sized(f font.Font, size vg.Length, c color.Color) text.Style {
	return text.Style{Color: c, Font: font.From(f, size), Handler: handler, XAlign: text.XLeft, YAlign: text.YBottom}
}

// stroke returns a solid line, or a dashed one.
func stroke(c color.Color, width float64, dashes ...vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: c, Width: vg.Length(width), Dashes: dashes}
}

// newPlot returns a plot in the style of the house, ranges to be set. The
// label of the axis upwards is drawn by drawPlot.
func newPlot(x string) *plot.Plot {
	p := plot.New()
	p.BackgroundColor = nil
	p.TextHandler = handler
	for _, a := range []*plot.Axis{&p.X, &p.Y} {
		a.LineStyle = stroke(muted, 0.6)
		a.Padding = 0
		a.Label.Padding = 4
		a.Label.TextStyle.Font, a.Label.TextStyle.Handler, a.Label.TextStyle.Color = font.From(regular, textSize+0.5), handler, ink
		a.Tick.Label.Font, a.Tick.Label.Handler, a.Tick.Label.Color = font.From(regular, tickSize), handler, ink
		a.Tick.LineStyle = stroke(muted, 0.6)
		a.Tick.Length = 4
		a.Tick.Marker = linear{}
	}
	p.X.Label.Text = x
	p.Add(grid{})
	return p
}

package picture

import (
	"fmt"
	"math"
	"strconv"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// linear marks an axis at round steps, at most seven of them.
type linear struct{}

// wantedSteps is the most steps that an axis has room for, with their labels.
const wantedSteps = 7

// Ticks implements plot.Ticker.
func (linear) Ticks(low, high float64) []plot.Tick {
	step, decimals := roundStep((high - low) / wantedSteps)
	var ticks []plot.Tick
	first := math.Ceil(low/step - 1e-9)
	for i := first; i*step <= high+1e-9*step; i++ {
		label := strconv.FormatFloat(i*step, 'f', decimals, 64)
		if i == 0 {
			label = "0"
		}
		ticks = append(ticks, plot.Tick{Value: i * step, Label: label})
	}
	return ticks
}

// roundStep returns the next larger 1, 2 or 5 times a power of ten, with the
// decimals that its multiples need.
func roundStep(raw float64) (step float64, decimals int) {
	power := int(math.Floor(math.Log10(raw)))
	for _, digit := range []float64{1, 2, 5, 10} {
		step = digit * math.Pow10(power)
		if step >= raw*(1-1e-9) {
			if digit == 10 {
				power++
			}
			break
		}
	}
	return step, max(0, -power)
}

// decades marks a logarithmic axis at powers of ten, at every second or third
// if there are many, and at 2 and 5 between if there are few.
type decades struct{ plain bool }

// Ticks implements plot.Ticker; low must be positive.
func (d decades) Ticks(low, high float64) []plot.Tick {
	first, last := int(math.Floor(math.Log10(low))), int(math.Ceil(math.Log10(high)))
	span := math.Log10(high / low)
	every := max(1, int(math.Ceil(span/8)))
	var ticks []plot.Tick
	for e := first; e <= last; e++ {
		for digit := 1; digit <= 9; digit++ {
			v := float64(digit) * math.Pow10(e)
			if v < low*(1-1e-9) || v > high*(1+1e-9) {
				continue
			}
			labelled := digit == 1 && e%every == 0 || span < 2.2 && (digit == 2 || digit == 5) || span < 0.7
			switch {
			case labelled && d.plain:
				ticks = append(ticks, plot.Tick{Value: v, Label: strconv.FormatFloat(v, 'f', max(0, -e), 64)})
			case labelled:
				ticks = append(ticks, plot.Tick{Value: v, Label: powerLabel(digit, e)})
			case every == 1 || digit == 1:
				ticks = append(ticks, plot.Tick{Value: v})
			}
		}
	}
	return ticks
}

// powerLabel writes a number as answers in text do.
func powerLabel(digit, exponent int) string {
	if exponent >= -1 && exponent <= 3 {
		return strconv.FormatFloat(float64(digit)*math.Pow10(exponent), 'f', max(0, -exponent), 64)
	}
	return fmt.Sprintf("%de%d", digit, exponent)
}

// drawPlot draws a plot with the label of its axis upwards, in the middle of
// the axis. The library would centre it by its values, which leaves a gap
// above logarithmic axes. It returns where the data are.
func drawPlot(c draw.Canvas, p *plot.Plot, label string) (data draw.Canvas) {
	style := sized(regular, textSize+0.5, ink)
	style.XAlign, style.YAlign, style.Rotation = text.XCenter, text.YTop, math.Pi/2
	room := style.FontExtents().Height + 4
	inner := draw.Crop(c, room, 0, 0, 0)
	data = p.DataCanvas(inner)
	c.FillText(style, vg.Point{X: c.Min.X, Y: data.Center().Y}, label)
	p.Draw(inner)
	return data
}

// grid draws faint lines at the labelled ticks, behind everything else.
type grid struct{}

// Plot implements plot.Plotter.
func (grid) Plot(c draw.Canvas, p *plot.Plot) {
	x, y := p.Transforms(&c)
	line := stroke(rule, 0.5)
	for _, t := range p.X.Tick.Marker.Ticks(p.X.Min, p.X.Max) {
		if at := x(t.Value); !t.IsMinor() && !namesBars(p) && c.ContainsX(at) {
			c.StrokeLine2(line, at, c.Min.Y, at, c.Max.Y)
		}
	}
	for _, t := range p.Y.Tick.Marker.Ticks(p.Y.Min, p.Y.Max) {
		if at := y(t.Value); !t.IsMinor() && c.ContainsY(at) {
			c.StrokeLine2(line, c.Min.X, at, c.Max.X, at)
		}
	}
}

// namesBars tells whether the axis across has bars, which need no lines.
func namesBars(p *plot.Plot) bool {
	_, ok := p.X.Tick.Marker.(named)
	return ok
}

// drawn makes a plotter of a function.
type drawn func(c draw.Canvas, p *plot.Plot)

// Plot implements plot.Plotter.
func (d drawn) Plot(c draw.Canvas, p *plot.Plot) { d(c, p) }

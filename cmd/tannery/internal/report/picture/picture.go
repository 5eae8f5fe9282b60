package picture

import (
	"bytes"
	"fmt"
	"html"
	"io"
	"regexp"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Picture is a drawing that is ready to be rendered.
type Picture struct {
	title    string // what it shows, in a few words
	subject  string // of what: profile, channel, method
	alt      string // the same for those who cannot see it, with the main figures
	legend   []key
	width    vg.Length
	height   vg.Length
	contents func(c draw.Canvas) // below title and legend
}

// Sizes in points. A picture fills the width of a column of text.
const (
	defaultWidth  = 540
	defaultHeight = 400
	margin        = 12
)

// dotsPerInch of PNG files: sharp on screens of today and in print.
const dotsPerInch = 144

// Formats are the endings of files that Render knows, without their dots.
var Formats = []string{"svg", "png"}

// Title returns what the picture shows.
func (p Picture) Title() string { return p.title }

// Alt returns the text for those who cannot see the picture.
func (p Picture) Alt() string { return p.alt }

// Render returns the file in the format, one of Formats.
func (p Picture) Render(format string) ([]byte, error) {
	var b bytes.Buffer
	switch format {
	case "svg":
		c := vgsvg.New(p.width, p.height)
		p.draw(draw.New(c), true)
		if _, err := c.WriteTo(&b); err != nil {
			return nil, err
		}
		return p.accessible(b.Bytes(), xmlHeader), nil
	case "png":
		c := vgimg.PngCanvas{Canvas: vgimg.NewWith(vgimg.UseWH(p.width, p.height), vgimg.UseDPI(dotsPerInch))}
		p.draw(draw.New(c), true)
		_, err := c.WriteTo(&b)
		return b.Bytes(), err
	}
	return nil, fmt.Errorf("picture format %q: must be one of %s", format, strings.Join(Formats, ", "))
}

// Inline returns an SVG element for an HTML page that draws title and caption
// itself. It has no background, takes the width of its surroundings, and its
// colours are the CSS variables of Colours, so that they follow the page from
// light to dark.
func (p Picture) Inline() (string, error) {
	c := vgsvg.New(p.width, p.height-p.headHeight())
	p.drawBody(draw.New(c))
	var b bytes.Buffer
	if _, err := c.WriteTo(&b); err != nil {
		return "", err
	}
	svg := sizes.ReplaceAllString(string(p.accessible(b.Bytes(), "")), "<svg$1")
	return variables(svg), nil
}

const xmlHeader = `<?xml version="1.0" encoding="UTF-8"?>` + "\n"

var (
	// prelude is what the SVG canvas writes before its first element.
	prelude = regexp.MustCompile(`(?s)^<\?xml.*?-->\s*<svg`)
	sizes   = regexp.MustCompile(`<svg( role="img" aria-label="[^"]*")? width="[^"]*" height="[^"]*"`)
	// families makes browsers without the font fall back to one like it.
	families = strings.NewReplacer("font-family:Liberation Sans", "font-family:'Liberation Sans',Arial,Helvetica,sans-serif")
)

// accessible gives the document a role, a label and a title.
func (p Picture) accessible(svg []byte, header string) []byte {
	label := html.EscapeString(p.alt)
	text := prelude.ReplaceAllLiteralString(string(svg), header+`<svg role="img" aria-label="`+label+`"`)
	if header != "" {
		text = strings.Replace(text, `xlink">`, `xlink">`+"\n<title>"+html.EscapeString(p.title)+"</title>\n<desc>"+label+"</desc>", 1)
	}
	return []byte(families.Replace(text))
}

// draw draws the whole sheet.
func (p Picture) draw(c draw.Canvas, background bool) {
	if background {
		c.SetColor(paper)
		c.Fill(c.Rectangle.Path())
	}
	c = draw.Crop(c, margin, -margin, margin, -margin)
	y := c.Max.Y
	heading := sized(bold, headingSize, ink)
	y -= heading.FontExtents().Ascent
	c.FillText(heading, vg.Point{X: c.Min.X, Y: y}, p.title)
	for _, line := range p.subjectLines() {
		y -= lineHeight
		c.FillText(sized(regular, textSize, muted), vg.Point{X: c.Min.X, Y: y}, line)
	}
	p.drawLegend(draw.Crop(c, 0, 0, 0, y-c.Max.Y-headGap))
}

// drawBody draws all but title and subject.
func (p Picture) drawBody(c draw.Canvas) {
	p.drawLegend(draw.Crop(c, 2, -2, 2, -2))
}

func (p Picture) drawLegend(c draw.Canvas) {
	used := legendStrip(c, p.legend)
	p.contents(draw.Crop(c, 0, 0, 0, -used))
}

const (
	lineHeight = textSize * 1.35
	headGap    = 4
)

// headHeight is the room that title, subject and margins take.
func (p Picture) headHeight() vg.Length {
	return vg.Length(headingSize) + vg.Length(len(p.subjectLines()))*lineHeight + headGap + margin
}

// subjectLines breaks the subject where it is wider than the sheet.
func (p Picture) subjectLines() []string {
	style := sized(regular, textSize, muted)
	var lines []string
	line := ""
	for _, word := range strings.Fields(p.subject) {
		longer := strings.TrimSpace(line + " " + word)
		if line != "" && style.Width(longer) > p.width-2*margin {
			lines, longer = append(lines, line), word
		}
		line = longer
	}
	if line != "" {
		lines = append(lines, line)
	}
	return lines
}

// WriteTo writes the SVG file.
func (p Picture) WriteTo(w io.Writer) (int64, error) {
	svg, err := p.Render("svg")
	if err != nil {
		return 0, err
	}
	n, err := w.Write(svg)
	return int64(n), err
}

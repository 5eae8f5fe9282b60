package picture

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image"
	"image/png"
	"io"
	"math"
	"regexp"
	"strings"
	"testing"
)

// becTunnel is the recursion of a (3,6)-regular ensemble on the BEC.
func becTunnel(epsilon float64, iterations int) (Tunnel, Errors) {
	t, e := Tunnel{Subject: "harbour link on bec", Narrowest: -1}, Errors{Subject: "harbour link on bec", Narrowest: -1}
	x := epsilon
	for i := 0; i <= iterations; i++ {
		y := 1 - math.Pow(1-x, 5)
		t.States = append(t.States, TunnelState{x, y})
		e.States = append(e.States, ErrorState{i, x / 2, x * x / 2})
		x = epsilon * y * y
	}
	return t, e
}

// samples are pictures of all kinds, usual ones and extreme ones.
func samples() map[string]Picture {
	all := map[string]Picture{}
	tight, tightErrors := becTunnel(0.4294, 480)
	tight.Narrowest, tightErrors.Narrowest = 232, 232
	wide, wideErrors := becTunnel(0.2, 9)
	stalled, stalledErrors := becTunnel(0.45, 80)
	stalled.Stalled = true
	perfect := Errors{Subject: "no noise", States: []ErrorState{{0, 0, 0}}, Narrowest: -1}
	one, oneErrors := becTunnel(0.4, 0)
	all["tight tunnel"], all["wide tunnel"], all["stalled tunnel"], all["tunnel of one state"] = tight.Picture(), wide.Picture(), stalled.Picture(), one.Picture()
	all["tight errors"], all["wide errors"], all["stalled errors"], all["errors of one state"] = tightErrors.Picture(), wideErrors.Picture(), stalledErrors.Picture(), oneErrors.Picture()
	all["no errors"] = perfect.Picture()
	all["vanishing errors"] = Errors{Subject: "exact", States: []ErrorState{{0, 0.2, 0.1}, {1, 1e-300, 0}, {2, 0, 0}}, Narrowest: -1}.Picture()

	all["regular"] = Degrees{Subject: "(3,6)", Variable: []DegreeShare{{3, 1, 1}}, Check: []DegreeShare{{6, 1, 1}}}.Picture()
	var many []DegreeShare
	for i := range 100 {
		many = append(many, DegreeShare{i + 2, 0.01, 0.01})
	}
	all["many degrees"] = Degrees{Subject: strings.Repeat("a long title of a harbour link ", 6), Variable: many, Check: many[3:]}.Picture()

	cost, gaps := Cost{Subject: "rate 1/2", Symbol: "σ"}, Gaps{Subject: "rate 1/2", Unit: "dB"}
	for i := range 20 {
		d := 3 + i
		cost.Points = append(cost.Points, CostPoint{fmt.Sprintf("quay-r50-d%d", d), i == 5, 3 + 0.01*float64(i), 0.97 - 0.1/float64(d), 0.9787})
		gaps.Points = append(gaps.Points, GapPoint{fmt.Sprintf("quay-r50-d%d", d), i == 5, d * d, 3 / float64(d*d)})
	}
	all["cost"], all["gaps"] = cost.Picture(), gaps.Picture()
	cost.Points[3].Limit = math.NaN()
	all["cost without a limit"] = cost.Picture()
	cost.Points, gaps.Points = cost.Points[:1], gaps.Points[:1]
	all["cost of one"], all["gap of one"] = cost.Picture(), gaps.Picture()
	gaps.Points = []GapPoint{{"a", false, 3, -0.01}, {"b", false, 3, 0.5}}
	all["gap beyond the limit"] = gaps.Picture()

	curves := Curves{Subject: "harbour link, 2048 code bits", Axis: "Eb/N0, dB", Confidence: 0.95, Limits: []CurveLimit{{"Shannon limit", 0.187}, {"threshold", 0.34}}}
	all["no curves"] = curves.Picture()
	frames := Curve{Name: "frames"}
	for i := range 6 {
		x, r := 0.5+0.2*float64(i), math.Pow(10, -float64(i))
		frames.Points = append(frames.Points, CurvePoint{x, r, r / 2, math.Min(1, 2*r)})
	}
	frames.Points = append(frames.Points, CurvePoint{1.7, 0, 0, 3e-7})
	curves.Series = []Curve{frames}
	all["curves"] = curves.Picture()
	curves.Series = []Curve{{Name: "frames", Points: []CurvePoint{{1, 0, 0, 0.01}}}}
	all["curve of one arrow"] = curves.Picture()
	curves.Series = []Curve{
		{Name: "frames", Points: []CurvePoint{{1, 0, 0, 0.01}, {2, 0.02, 0.01, 0.03}, {3, 0, 0, 0.01}, {4, 0.9, 0.8, 0.95}, {5, 1, 0.9, 1}}},
		{Name: "theory", Points: []CurvePoint{{X: 1, Rate: 1e-300}, {X: 2, Rate: 1e-37}, {X: 4, Rate: 0.5}, {X: 5, Rate: 1}}},
	}
	all["curves with gaps and deep theory"] = curves.Picture()
	return all
}

func TestPicturesAreWellFormedAndReproducible(t *testing.T) {
	again := samples()
	for name, p := range samples() {
		svg, err := p.Render("svg")
		if err != nil {
			t.Fatal(err)
		}
		second, err := again[name].Render("svg")
		if err != nil || !bytes.Equal(svg, second) {
			t.Errorf("%s: the same data gave other bytes", name)
		}
		checkXML(t, name, svg)
		inline, err := p.Inline()
		if err != nil {
			t.Fatal(err)
		}
		checkXML(t, name+" inline", []byte(inline))
		if left := regexp.MustCompile(`(fill|stroke):#[0-9A-F]{6}`).FindAllString(inline, -1); len(left) > 0 {
			t.Errorf("%s inline: colours %v are no variables", name, left)
		}
		if strings.Contains(inline, `<svg width`) || !strings.HasPrefix(inline, `<svg role="img" aria-label="`) || !strings.Contains(inline, "viewBox") {
			t.Errorf("%s inline: begins with %.120s", name, inline)
		}
		if p.Title() == "" || p.Alt() == "" {
			t.Errorf("%s: title %q, alt %q", name, p.Title(), p.Alt())
		}
	}
}

func checkXML(t *testing.T, name string, svg []byte) {
	t.Helper()
	decoder := xml.NewDecoder(bytes.NewReader(svg))
	for {
		_, err := decoder.Token()
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Errorf("%s: %v", name, err)
			return
		}
	}
	if bad := regexp.MustCompile(`NaN|Inf`).Find(svg); bad != nil {
		t.Errorf("%s: has %s", name, bad)
	}
}

// Nothing may touch the edge of the sheet: what does is clipped.
func TestNothingIsClipped(t *testing.T) {
	for name, p := range samples() {
		file, err := p.Render("png")
		if err != nil {
			t.Fatal(err)
		}
		img, err := png.Decode(bytes.NewReader(file))
		if err != nil {
			t.Fatal(err)
		}
		b := img.Bounds()
		const border = 4
		if dark := darkest(img, b, func(x, y int) bool {
			return x < b.Min.X+border || x >= b.Max.X-border || y < b.Min.Y+border || y >= b.Max.Y-border
		}); dark < 0xF000 {
			t.Errorf("%s: something touches the edge", name)
		}
		if darkest(img, b, func(int, int) bool { return true }) > 0x5000 {
			t.Errorf("%s: is empty", name)
		}
	}
}

func darkest(img image.Image, b image.Rectangle, where func(x, y int) bool) uint32 {
	least := uint32(0xFFFF)
	for y := b.Min.Y; y < b.Max.Y; y++ {
		for x := b.Min.X; x < b.Max.X; x++ {
			if where(x, y) {
				_, g, _, _ := img.At(x, y).RGBA()
				least = min(least, g)
			}
		}
	}
	return least
}

// Series stay apart in grey: their luminances (WCAG 2.2) differ by a contrast
// of 1.5 at least, and all but fills contrast with the paper.
func TestPaletteIsReadableInGrey(t *testing.T) {
	luminance := func(hex string) float64 {
		var r, g, b int
		if _, err := fmt.Sscanf(hex, "#%02X%02X%02X", &r, &g, &b); err != nil {
			t.Fatal(err)
		}
		linear := func(v int) float64 {
			c := float64(v) / 255
			if c <= 0.04045 {
				return c / 12.92
			}
			return math.Pow((c+0.055)/1.055, 2.4)
		}
		return 0.2126*linear(r) + 0.7152*linear(g) + 0.0722*linear(b)
	}
	contrast := func(a, b string) float64 {
		x, y := luminance(a)+0.05, luminance(b)+0.05
		return math.Max(x, y) / math.Min(x, y)
	}
	light, dark := map[string]string{}, map[string]string{}
	for _, c := range Colours() {
		light[c.Variable], dark[c.Variable] = c.Light, c.Dark
	}
	for _, theme := range []map[string]string{light, dark} {
		for _, pair := range [][2]string{{"--deep", "--rust"}, {"--rust", "--reed"}, {"--deep", "--reed"}} {
			if c := contrast(theme[pair[0]], theme[pair[1]]); c < 1.5 {
				t.Errorf("%v: contrast %.2f between series", pair, c)
			}
		}
		for name, least := range map[string]float64{"--ink": 7, "--muted": 4.5, "--deep": 3, "--rust": 3} {
			if c := contrast(theme[name], theme["--paper"]); c < least {
				t.Errorf("%s on paper: contrast %.2f, want %v", name, c, least)
			}
		}
	}
}

func TestTicks(t *testing.T) {
	texts := func(all []string) string { return strings.Join(all, " ") }
	for _, c := range []struct {
		low, high float64
		want      string
	}{
		{0, 1, "0 0.2 0.4 0.6 0.8 1.0"},
		{0, 487, "0 100 200 300 400"},
		{0.2604, 0.2608, "0.2604 0.2605 0.2606 0.2607 0.2608"},
		{-0.3, 0.3, "-0.3 -0.2 -0.1 0 0.1 0.2 0.3"},
	} {
		var got []string
		for _, tick := range (linear{}).Ticks(c.low, c.high) {
			got = append(got, tick.Label)
		}
		if texts(got) != c.want {
			t.Errorf("%v to %v: %s, want %s", c.low, c.high, texts(got), c.want)
		}
	}
	for _, c := range []struct {
		low, high float64
		want      string
	}{
		{1e-15, 1, "1e-14 1e-12 1e-10 1e-8 1e-6 1e-4 1e-2 1"},
		{0.01, 1, "1e-2 2e-2 5e-2 0.1 0.2 0.5 1"},
		{0.3, 0.9, "0.3 0.4 0.5 0.6 0.7 0.8 0.9"},
	} {
		var got []string
		for _, tick := range (decades{}).Ticks(c.low, c.high) {
			if tick.Label != "" {
				got = append(got, tick.Label)
			}
		}
		if texts(got) != c.want {
			t.Errorf("%v to %v: %s, want %s", c.low, c.high, texts(got), c.want)
		}
	}
}

func TestShortNames(t *testing.T) {
	for _, c := range []struct{ names, short, pattern string }{
		{"a-r50-d3 a-r50-d4 a-r50-d5", "d3,d4,d5", "; labels fill in a-r50-…"},
		{"a-r50-d3 b-r50-d4 a-r50-d5", "a d3,b d4,a d5", "; labels fill in …-r50-…"},
		{"a-r50-d3 b-r25-d4 c-r10-d5", "a-r50-d3,b-r25-d4,c-r10-d5", ""},
		{"a-r50-d3 a-r50-d4", "a-r50-d3,a-r50-d4", ""},
		{"a a a", "a,a,a", ""},
	} {
		short, pattern := shortNames(strings.Fields(c.names))
		if strings.Join(short, ",") != c.short || pattern != c.pattern {
			t.Errorf("%s: %v %q", c.names, short, pattern)
		}
	}
}

func TestUnknownFormat(t *testing.T) {
	if _, err := samples()["regular"].Render("pdf"); err == nil || !strings.Contains(err.Error(), "svg, png") {
		t.Errorf("%v", err)
	}
}

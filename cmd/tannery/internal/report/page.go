package report

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"slices"
	"strconv"
	"strings"

	"tannery/cmd/tannery/internal/report/picture"
	"tannery/ensembles"
)

// Page is the answer of the command report: all that is known about a
// profile, as one HTML file that needs nothing else.
type Page struct {
	Schema    string            `json:"schema"`
	Name      string            `json:"name"`
	Profile   ensembles.Profile `json:"profile"`
	Brief     []Asked           `json:"brief"` // what the profile was searched for, key by key
	Answer    string            `json:"answer"`
	Threshold *Threshold        `json:"threshold"`
	Trace     *Trace            `json:"trace"` // null without a threshold
	// Neighbours sets the profile beside ensembles of the catalogue at the
	// same rate; its first row, before sorting, is the profile.
	Neighbours   *Compare       `json:"neighbours"`
	Realizations []Sheet        `json:"realizations"`
	Simulations  []Simulation   `json:"simulations"`
	Provenance   PageProvenance `json:"provenance"`

	File     string             `json:"-"`
	Ensemble ensembles.Ensemble `json:"-"`
	Marks    [][]MarkValue      `json:"-"` // limits beside each of the simulations
}

// Asked is one line of a brief.
type Asked struct {
	Key   string `json:"key"` // dotted path
	Value string `json:"value"`
}

// Sheet is a realization with its threshold and with the best that any code
// of its length can do.
type Sheet struct {
	Length        int               `json:"length"`
	Checks        int               `json:"checks"`
	Edges         int               `json:"edges"`
	DesignRate    float64           `json:"design_rate"`
	VariableNodes []SheetCount      `json:"variable_nodes"`
	CheckNodes    []SheetCount      `json:"check_nodes"`
	Result        *ensembles.Result `json:"-"`
	Threshold     *float64          `json:"threshold"`
	FrameError    float64           `json:"frame_error"`
	FiniteLimit   *float64          `json:"finite_limit"` // channel parameter; null where not known
}

// SheetCount is a number of nodes of a degree.
type SheetCount struct {
	Degree int `json:"degree"`
	Nodes  int `json:"nodes"`
}

// PageProvenance tells how the report came about.
type PageProvenance struct {
	Program  string  `json:"program"`
	Created  string  `json:"created"`
	Command  string  `json:"command"` // that makes this report again
	Settings []Asked `json:"settings"`
	// Of the profile, as its file says; empty where it does not.
	ProfileProgram string  `json:"profile_program"`
	ProfileCreated string  `json:"profile_created"`
	Seed           *uint64 `json:"seed"`
}

//go:embed page.html
var pageText string

//go:embed page.css
var pageStyle string

var pageTemplate = template.Must(template.New("page").Funcs(template.FuncMap{
	"plain":   Plain,
	"trimmed": func(v float64, decimals int) string { return Trimmed(v, decimals) },
	"fixed":   func(v float64, decimals int) string { return Fixed(v, decimals) },
	"deref":   func(v *float64) float64 { return *v },
	"chance":  probability,
	"grouped": grouped,
}).Parse(pageText))

// WriteHTML writes the file.
func (p *Page) WriteHTML(w io.Writer) error {
	view, err := p.view()
	if err != nil {
		return err
	}
	var b bytes.Buffer
	if err := pageTemplate.Execute(&b, view); err != nil {
		return err
	}
	_, err = w.Write(b.Bytes())
	return err
}

// WriteText says for people what the file holds.
func (p *Page) WriteText(w io.Writer) error {
	var t Text
	t.Paragraph("%s", p.Answer)
	if p.File != "" {
		t.Row("written to", "%s", p.File)
	}
	_, err := t.WriteTo(w)
	return err
}

// pageView is what the template shows: the page with its pictures drawn and
// its figures rounded.
type pageView struct {
	*Page
	Style      template.CSS
	TraceValue string // of the channel parameter
	Facts      []Asked
	Tunnel     *figure
	Errors     *figure
	Degrees    *figure
	Gaps       *figure
	TraceRows  []traceRow
	Marked     bool // one of them is the narrowest place
	Comparison []compareCells
	Results    []resultView // simulations with their pictures
	YAML       string
}

// figure is a picture within the page.
type figure struct {
	ID      string
	SVG     template.HTML
	Caption string
}

type traceRow struct {
	TracePoint
	Narrowest bool
}

type compareCells struct {
	CompareRow
	ThresholdCell, Limit, GapDB, GapCell, GapRate    string
	MarginCell, IterationsCell, CheckMean, EdgesCell string
}

type resultView struct {
	Simulation
	Figure *figure
}

// geometric chooses indices at growing distances, and always the last one and
// the one to keep, so that a table of any length stays within half a page.
func geometric(n, keep int) []int {
	const growth = 1.4
	var chosen []int
	for i := 0; i < n-1; i = max(i+1, int(growth*float64(i))) {
		chosen = append(chosen, i)
	}
	chosen = append(chosen, n-1)
	if keep >= 0 && !slices.Contains(chosen, keep) {
		chosen = append(chosen, keep)
		slices.Sort(chosen)
	}
	return chosen
}

func (p *Page) view() (*pageView, error) {
	v := &pageView{Page: p, Style: template.CSS(pageColours() + pageStyle)}
	var err error
	draw := func(id, caption string, drawing picture.Picture) *figure {
		svg, drawError := drawing.Inline()
		if drawError != nil {
			err = drawError
		}
		return &figure{id, template.HTML(svg), caption}
	}
	v.Degrees = draw("degrees", "Degree profile: the fraction of edges and of nodes that have each degree.", DegreePicture(p.Name, p.Ensemble))
	if t := p.Trace; t != nil {
		v.TraceValue = short(t.Value)
		place := fmt.Sprintf("%s at %s = %s", t.Channel, t.Symbol, v.TraceValue)
		v.Tunnel = draw("tunnel", "Decoding tunnel on "+place+": the evolution as a staircase between the curves of variable and check nodes. Decoding succeeds while the tunnel is open.", t.TunnelPicture())
		v.Errors = draw("errors", "Error probability against iterations on "+place+".", t.ErrorPicture())
		for _, i := range geometric(len(t.Points), t.narrowestIndex()) {
			v.Marked = v.Marked || i == t.narrowestIndex()
			v.TraceRows = append(v.TraceRows, traceRow{t.Points[i], i == t.narrowestIndex()})
		}
	}
	if c := p.Neighbours; c != nil {
		for _, r := range c.Rows {
			v.Comparison = append(v.Comparison, compareCells{
				CompareRow:    r,
				ThresholdCell: WithUncertainty(r.Threshold, r.Uncertainty), Limit: r.limitCell(), GapDB: r.decibelCell(), GapCell: r.gapCell(), GapRate: r.rateCell(),
				MarginCell: r.marginCell(), IterationsCell: r.iterationsCell(), CheckMean: Fixed(r.MeanCheckDegree, 2), EdgesCell: Fixed(r.EdgesPerBit, 2),
			})
		}
		if drawing, ok := c.GapPicture(); ok && len(c.Rows) > 2 {
			v.Gaps = draw("gaps", "Gap to the Shannon limit against the largest variable degree, beside ensembles of the catalogue.", drawing)
		}
	}
	for i, s := range p.Simulations {
		drawing := s.Picture(p.Marks[i])
		v.Results = append(v.Results, resultView{s, draw("simulation-"+strconv.Itoa(i+1), "Measured error rates with their confidence intervals, beside the limits.", drawing)})
	}
	v.Facts = p.facts()
	yaml, encodeError := p.Profile.Encode()
	if encodeError != nil {
		return nil, encodeError
	}
	v.YAML = string(yaml)
	return v, err
}

// facts are the figures that the answer stands on.
func (p *Page) facts() []Asked {
	t := p.Threshold
	decimals := DecimalsAt(t.Uncertainty, 4, 7)
	facts := []Asked{{"threshold", t.Symbol + " = " + WithUncertainty(t.Threshold, t.Uncertainty)}}
	add := func(key, format string, args ...any) {
		facts = append(facts, Asked{key, fmt.Sprintf(format, args...)})
	}
	if t.EbN0DB != nil {
		add("Eb/N0 there", "%s dB", Fixed(*t.EbN0DB, 4))
	}
	if t.Limit != nil {
		add("Shannon limit", "%s = %s", t.Symbol, Fixed(*t.Limit, decimals))
	}
	if t.Gap != nil {
		if t.Gap.DB != nil {
			add("gap", "%s dB", Fixed(*t.Gap.DB, 4))
		}
		add("gap in "+t.Symbol, "%s", Fixed(t.Gap.Parameter, decimals))
		add("gap in rate", "%s bit per code bit", Fixed(t.Gap.Rate, 5))
	}
	add("stability", "%s", t.Stability.text(t.Symbol, decimals))
	if len(t.Critical) > 0 {
		where := "at message entropy " + Significant(t.Critical[0].Entropy, 4) + " bit"
		if t.Critical[0].Entropy == 0 {
			where = "at the end, by the stability condition"
		}
		add("tunnel tightest", "%s", where)
	}
	if t.MAPBound != nil {
		add("MAP decoding", "no threshold above %s = %s", t.Symbol, Fixed(*t.MAPBound, decimals))
	}
	add("design rate", "%s", Trimmed(t.DesignRate, 9))
	add("mean degrees", "variable %s, check %s", Trimmed(t.MeanVariableDegree, 4), Trimmed(t.MeanCheckDegree, 4))
	return facts
}

// AnswerOf says in one sentence how far a threshold is from the limit.
func AnswerOf(name string, t *Threshold) string {
	decimals := DecimalsAt(t.Uncertainty, 4, 6)
	begin := fmt.Sprintf("At its design rate of %s, %s decodes on %s up to %s = %s", Trimmed(t.DesignRate, 4), name, t.Channel, t.Symbol, Fixed(t.Threshold, decimals))
	switch {
	case t.Gap == nil || t.Limit == nil:
		return begin + "; there is no Shannon limit at this rate to compare with."
	case t.Stability.Margin == nil:
		return fmt.Sprintf("With variable nodes of degree 1, errors never vanish altogether: %s has no threshold on %s.", name, t.Channel)
	case t.Gap.Parameter < -t.Uncertainty:
		return begin + fmt.Sprintf(" by method %s, which is beyond the Shannon limit %s: the approximation does not hold for this profile.", t.Method, Fixed(*t.Limit, decimals))
	case t.Gap.DB != nil:
		return begin + fmt.Sprintf(", %s dB from the Shannon limit %s.", Fixed(*t.Gap.DB, 3), Fixed(*t.Limit, decimals))
	}
	return begin + fmt.Sprintf(", %s from the Shannon limit %s.", Fixed(t.Gap.Parameter, decimals), Fixed(*t.Limit, decimals))
}

// pageColours defines the variables of pictures for light and dark pages; on
// paper it is always light.
func pageColours() string {
	var light, dark strings.Builder
	for _, c := range picture.Colours() {
		fmt.Fprintf(&light, "%s:%s;", c.Variable, c.Light)
		fmt.Fprintf(&dark, "%s:%s;", c.Variable, c.Dark)
	}
	return fmt.Sprintf(":root{color-scheme:light dark;%s}\n@media screen and (prefers-color-scheme:dark){:root{%s}}\n", light.String(), dark.String())
}

// grouped writes a count with thin spaces between thousands.
func grouped(n int) string {
	s := strconv.Itoa(n)
	for i := len(s) - 3; i > 0 && s[i-1] != '-'; i -= 3 {
		s = s[:i] + "\u202f" + s[i:]
	}
	return s
}

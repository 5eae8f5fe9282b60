package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strconv"

	"tannery/cmd/tannery/internal/report/picture"
)

// Compare is the answer of the command compare: profiles side by side.
type Compare struct {
	Schema string `json:"schema"`
	// Distance is how far below its own threshold each profile's iterations
	// are counted, relative to the threshold.
	Distance    float64      `json:"distance"`
	TargetError float64      `json:"target_error"` // bit error probability to reach
	Sort        string       `json:"sort"`
	Rows        []CompareRow `json:"rows"` // by channel in the order asked for, then sorted
}

// CompareRow is one profile on one channel.
type CompareRow struct {
	Profile     string    `json:"profile"`
	Channel     string    `json:"channel"`
	Parameter   string    `json:"parameter"`
	Method      string    `json:"method"`
	Threshold   float64   `json:"threshold"`
	Uncertainty float64   `json:"uncertainty"`
	DesignRate  float64   `json:"design_rate"`
	Limit       *float64  `json:"limit"` // null if the design rate is not positive
	Gap         *Gap      `json:"gap"`
	EbN0DB      *float64  `json:"eb_n0_db"`
	EsN0DB      *float64  `json:"es_n0_db"`
	Stability   Stability `json:"stability"`

	MeanVariableDegree    float64 `json:"mean_variable_degree"`
	MeanCheckDegree       float64 `json:"mean_check_degree"`
	LargestVariableDegree int     `json:"largest_variable_degree"`
	EdgesPerBit           float64 `json:"edges_per_bit"`

	At         *float64 `json:"at"`         // the parameter at Distance below the threshold
	Iterations *int     `json:"iterations"` // there, to the target; null if it is not reached
	Warnings   []string `json:"warnings"`

	Symbol string `json:"-"`
	Own    bool   `json:"-"` // of the profile that the others are set beside
}

// WriteText writes for each channel a table of thresholds and gaps and one of
// the properties of the profiles, in the same order.
func (c *Compare) WriteText(w io.Writer) error {
	var t Text
	for first := 0; first < len(c.Rows); {
		last := first
		for last < len(c.Rows) && c.Rows[last].Channel == c.Rows[first].Channel {
			last++
		}
		c.channelText(&t, c.Rows[first:last])
		first = last
	}
	t.Gap()
	t.Paragraph("max: largest variable degree. checks: mean check degree. margin: of the stability condition. iter: iterations to bit error probability %s on a channel %s %% below the profile's own threshold.", Plain(c.TargetError), Plain(100*c.Distance))
	noted := map[string]bool{}
	for _, r := range c.Rows {
		for _, warning := range r.Warnings {
			if note := r.Profile + ": " + warning; !noted[note] {
				noted[note] = true
				t.Paragraph("note: %s", note)
			}
		}
	}
	_, err := t.WriteTo(w)
	return err
}

func (c *Compare) channelText(t *Text, rows []CompareRow) {
	symbol := rows[0].Symbol
	method, same := rows[0].Method, true
	for _, r := range rows {
		same = same && r.Method == method
	}
	if same {
		t.Heading("%s, method %s, sorted by %s", rows[0].Channel, method, c.Sort)
	} else {
		t.Heading("%s, sorted by %s", rows[0].Channel, c.Sort)
	}
	var gaps, properties [][]string
	for _, r := range rows {
		gaps = append(gaps, []string{r.Profile, WithUncertainty(r.Threshold, r.Uncertainty), r.limitCell(), r.gapCell(), r.decibelCell(), r.rateCell()})
		properties = append(properties, []string{r.Profile, Trimmed(r.DesignRate, 5), strconv.Itoa(r.LargestVariableDegree),
			Fixed(r.EdgesPerBit, 3), Fixed(r.MeanCheckDegree, 3), r.marginCell(), r.iterationsCell()})
	}
	t.Listing([]string{"profile", "threshold " + symbol, "limit", "gap " + symbol, "gap dB", "gap rate"}, gaps)
	t.Gap()
	t.Listing([]string{"profile", "rate", "max", "edges/bit", "checks", "margin", "iter"}, properties)
}

const unknown = "-"

func (r CompareRow) limitCell() string {
	if r.Limit == nil {
		return unknown
	}
	return Fixed(*r.Limit, 5)
}

func (r CompareRow) gapCell() string {
	if r.Gap == nil {
		return unknown
	}
	return Fixed(r.Gap.Parameter, 5)
}

func (r CompareRow) decibelCell() string {
	if r.Gap == nil || r.Gap.DB == nil {
		return unknown
	}
	return Fixed(*r.Gap.DB, 4)
}

func (r CompareRow) rateCell() string {
	if r.Gap == nil {
		return unknown
	}
	return Fixed(r.Gap.Rate, 5)
}

func (r CompareRow) marginCell() string {
	if r.Stability.Margin == nil {
		return "unstable"
	}
	return Fixed(100**r.Stability.Margin, 2) + " %"
}

func (r CompareRow) iterationsCell() string {
	if r.Iterations == nil {
		return unknown
	}
	return strconv.Itoa(*r.Iterations)
}

var compareColumns = []string{"profile", "channel", "parameter", "method", "threshold", "uncertainty", "design_rate", "limit",
	"gap_parameter", "gap_db", "gap_rate", "eb_n0_db", "es_n0_db", "stability_bound", "stability_margin",
	"mean_variable_degree", "mean_check_degree", "largest_variable_degree", "edges_per_bit", "at", "iterations"}

// WriteCSV writes one line per row with every digit; what is not known is
// empty.
func (c *Compare) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	if err := out.Write(compareColumns); err != nil {
		return err
	}
	number := func(v *float64) string {
		if v == nil {
			return ""
		}
		return strconv.FormatFloat(*v, 'g', -1, 64)
	}
	for _, r := range c.Rows {
		gap := Gap{}
		var inParameter, inRate *float64
		if r.Gap != nil {
			gap = *r.Gap
			inParameter, inRate = &gap.Parameter, &gap.Rate
		}
		iterations := ""
		if r.Iterations != nil {
			iterations = strconv.Itoa(*r.Iterations)
		}
		if err := out.Write([]string{r.Profile, r.Channel, r.Parameter, r.Method, number(&r.Threshold), number(&r.Uncertainty), number(&r.DesignRate), number(r.Limit),
			number(inParameter), number(gap.DB), number(inRate), number(r.EbN0DB), number(r.EsN0DB), number(r.Stability.Bound), number(r.Stability.Margin),
			number(&r.MeanVariableDegree), number(&r.MeanCheckDegree), strconv.Itoa(r.LargestVariableDegree), number(&r.EdgesPerBit), number(r.At), iterations}); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// subject says what the pictures of a comparison show.
func (c *Compare) subject() string {
	return fmt.Sprintf("%d profiles on %s", len(c.Rows), c.Rows[0].Channel)
}

// CostPicture sets the thresholds against the edges per code bit; all rows
// must be of one channel.
func (c *Compare) CostPicture() picture.Picture {
	cost := picture.Cost{Subject: c.subject(), Symbol: c.Rows[0].Symbol}
	for _, r := range c.Rows {
		limit := math.NaN()
		if r.Limit != nil {
			limit = *r.Limit
		}
		cost.Points = append(cost.Points, picture.CostPoint{Name: r.Profile, Own: r.Own, EdgesPerBit: r.EdgesPerBit, Threshold: r.Threshold, Limit: limit})
	}
	return cost.Picture()
}

// GapPicture sets the gaps against the largest degree, in dB where the
// channel has them; ok is false if no row has a gap.
func (c *Compare) GapPicture() (p picture.Picture, ok bool) {
	gaps := picture.Gaps{Subject: c.subject(), Unit: c.Rows[0].Symbol}
	for _, r := range c.Rows {
		if r.Gap == nil {
			continue
		}
		gap := r.Gap.Parameter
		if r.Gap.DB != nil {
			gap, gaps.Unit = *r.Gap.DB, "dB"
		}
		gaps.Points = append(gaps.Points, picture.GapPoint{Name: r.Profile, Own: r.Own, LargestDegree: r.LargestVariableDegree, Gap: gap})
	}
	if len(gaps.Points) == 0 {
		return picture.Picture{}, false
	}
	return gaps.Picture(), true
}

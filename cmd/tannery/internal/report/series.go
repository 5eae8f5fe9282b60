package report

import (
	"encoding/csv"
	"io"
	"math"
	"strconv"

	"tannery/cmd/tannery/internal/report/picture"
)

// Series is the answer of the commands sweep and tradeoff: several searches.
type Series struct {
	Schema  string      `json:"schema"`
	Against string      `json:"against,omitempty"` // of a trade-off: edges or iterations
	Rows    []SeriesRow `json:"rows"`
}

// SeriesRow is one search. Where nothing was found the threshold is 0 and the
// note says why.
type SeriesRow struct {
	Name              string  `json:"name"`
	Channel           string  `json:"channel"`
	Rate              float64 `json:"rate"`
	MaxVariableDegree int     `json:"max_variable_degree"`
	MaxEdgesPerBit    float64 `json:"max_edges_per_bit"` // 0 for no limit
	MaxIterations     int     `json:"max_iterations"`    // 0 for no limit
	Method            string  `json:"method"`
	Status            string  `json:"status"`
	Threshold         float64 `json:"threshold"`
	Uncertainty       float64 `json:"uncertainty"`
	Limit             float64 `json:"limit"`
	Gap               Gap     `json:"gap"`
	EdgesPerBit       float64 `json:"edges_per_bit"`
	DistinctDegrees   int     `json:"distinct_degrees"`
	Lambda            string  `json:"lambda"`
	Rho               string  `json:"rho"`
	Seconds           float64 `json:"seconds"`
	Note              string  `json:"note"`
	Symbol            string  `json:"symbol"`
}

func (r SeriesRow) found() bool { return r.Lambda != "" }

// WriteText writes a table, and the notes below it.
func (s *Series) WriteText(w io.Writer) error {
	var t Text
	header := []string{"search", "threshold", "limit", "gap", "gap dB", "gap rate", "edges", "s"}
	var rows [][]string
	for _, r := range s.Rows {
		if !r.found() {
			rows = append(rows, []string{r.Name, r.Status, unknown, unknown, unknown, unknown, unknown, Fixed(r.Seconds, 1)})
			continue
		}
		decibels := unknown
		if r.Gap.DB != nil {
			decibels = Fixed(*r.Gap.DB, 3)
		}
		rows = append(rows, []string{r.Name, Fixed(r.Threshold, 6), Fixed(r.Limit, 5), Fixed(r.Gap.Parameter, 5), decibels,
			Fixed(r.Gap.Rate, 5), Fixed(r.EdgesPerBit, 3), Fixed(r.Seconds, 1)})
	}
	t.Listing(header, rows)
	t.Gap()
	t.Paragraph("gap: Shannon limit less threshold, in the channel parameter. edges: per code bit.")
	for _, r := range s.Rows {
		if r.Note != "" {
			t.Paragraph("%s: %s", r.Name, r.Note)
		}
	}
	_, err := t.WriteTo(w)
	return err
}

var seriesColumns = []string{"name", "channel", "rate", "max_variable_degree", "max_edges_per_bit", "max_iterations", "method", "status",
	"threshold", "uncertainty", "limit", "gap_parameter", "gap_db", "gap_rate", "edges_per_bit", "distinct_degrees", "lambda", "rho", "seconds", "note"}

// WriteCSV writes one line per search with every digit; what is not known is
// empty.
func (s *Series) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	if err := out.Write(seriesColumns); err != nil {
		return err
	}
	for _, r := range s.Rows {
		number := func(v float64) string {
			if !r.found() {
				return ""
			}
			return strconv.FormatFloat(v, 'g', -1, 64)
		}
		limit := func(v float64) string {
			if v == 0 {
				return ""
			}
			return strconv.FormatFloat(v, 'g', -1, 64)
		}
		decibels := ""
		if r.Gap.DB != nil {
			decibels = number(*r.Gap.DB)
		}
		if err := out.Write([]string{r.Name, r.Channel, limit(r.Rate), strconv.Itoa(r.MaxVariableDegree), limit(r.MaxEdgesPerBit), limit(float64(r.MaxIterations)),
			r.Method, r.Status, number(r.Threshold), number(r.Uncertainty), number(r.Limit), number(r.Gap.Parameter), decibels, number(r.Gap.Rate),
			number(r.EdgesPerBit), number(float64(r.DistinctDegrees)), r.Lambda, r.Rho, strconv.FormatFloat(r.Seconds, 'f', 1, 64), r.Note}); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// Picture draws the gaps against the largest degree, or the thresholds
// against the edges per code bit, of the searches that found something; ok is
// false if none did.
func (s *Series) Picture(gaps bool) (p picture.Picture, ok bool) {
	var c Compare
	for _, r := range s.Rows {
		if !r.found() {
			continue
		}
		gap := r.Gap
		limit := r.Limit
		if math.IsNaN(limit) {
			continue
		}
		c.Rows = append(c.Rows, CompareRow{Profile: r.Name, Channel: r.Channel, Symbol: r.Symbol, Threshold: r.Threshold, Limit: &limit,
			Gap: &gap, LargestVariableDegree: r.MaxVariableDegree, EdgesPerBit: r.EdgesPerBit})
	}
	if len(c.Rows) == 0 {
		return p, false
	}
	if gaps {
		return c.GapPicture()
	}
	return c.CostPicture(), true
}

package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"
)

// Trace is the answer of the command trace: the evolution at one channel
// parameter, iteration by iteration.
type Trace struct {
	Schema    string       `json:"schema"`
	Channel   string       `json:"channel"`
	Parameter string       `json:"parameter"`
	Value     float64      `json:"value"`
	Method    string       `json:"method"`
	EbN0DB    *float64     `json:"eb_n0_db"`
	EsN0DB    *float64     `json:"es_n0_db"`
	Outcome   string       `json:"outcome"`
	Narrowest *int         `json:"narrowest"` // iteration of least progress, null if none
	Points    []TracePoint `json:"points"`
	Warnings  []string     `json:"warnings"`

	Symbol string `json:"-"`
	Name   string `json:"-"` // of the profile
	Draw   bool   `json:"-"` // the tunnel, below the table
}

// TracePoint is the state after an iteration; 0 is the channel.
type TracePoint struct {
	Iteration           int     `json:"iteration"`
	ErrorProbability    float64 `json:"error_probability"`
	Entropy             float64 `json:"entropy"`
	Bhattacharyya       float64 `json:"bhattacharyya"`
	CheckEntropy        float64 `json:"check_entropy"`
	BitErrorProbability float64 `json:"bit_error_probability"`
}

var traceColumns = []string{"iteration", "error_probability", "entropy", "bhattacharyya", "check_entropy", "bit_error_probability"}

// WriteCSV writes every point with every digit, under a header.
func (r *Trace) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	if err := out.Write(traceColumns); err != nil {
		return err
	}
	for _, p := range r.Points {
		record := []string{strconv.Itoa(p.Iteration)}
		for _, v := range []float64{p.ErrorProbability, p.Entropy, p.Bhattacharyya, p.CheckEntropy, p.BitErrorProbability} {
			record = append(record, strconv.FormatFloat(v, 'g', -1, 64))
		}
		if err := out.Write(record); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// maxRows is how many points a text shows: a screen and a half.
const maxRows = 40

// WriteText writes the table for people, thinned if it is long.
func (r *Trace) WriteText(w io.Writer) error {
	var t Text
	t.Heading("Evolution on %s at %s = %s, method %s", r.Channel, r.Symbol, short(r.Value), r.Method)
	ratioRows(&t, "Eb/N0", r.EbN0DB, r.EsN0DB)
	narrowest := r.Narrowest
	if r.Outcome == "stalled" {
		narrowest = nil // the tunnel is closed where the evolution ended
	}
	last := r.Points[len(r.Points)-1]
	t.Row("outcome", "%s", r.outcomeText(last))
	if narrowest != nil {
		p := r.Points[*narrowest]
		t.Row("tunnel narrowest", "at iteration %d, message entropy %s bit", p.Iteration, Significant(p.Entropy, 4))
	}
	for _, warning := range r.Warnings {
		t.Row("note", "%s", warning)
	}
	t.Gap()
	shown := thin(len(r.Points), narrowest, maxRows)
	rows := make([][]string, len(shown))
	for i, index := range shown {
		p := r.Points[index]
		mark := ""
		if narrowest != nil && index == *narrowest {
			mark = "narrowest"
		}
		rows[i] = []string{strconv.Itoa(p.Iteration), probability(p.ErrorProbability), probability(p.Entropy),
			probability(p.Bhattacharyya), probability(p.CheckEntropy), probability(p.BitErrorProbability), mark}
	}
	t.Table([]string{"iter", "error", "entropy", "Bhattacharyya", "from checks", "bit error", ""}, rows)
	if len(shown) < len(r.Points) {
		t.Gap()
		t.Paragraph("%d of %d iterations shown; --csv and --json give all.", len(shown), len(r.Points))
	}
	if r.Draw {
		r.Tunnel(&t)
	}
	_, err := t.WriteTo(w)
	return err
}

func (r *Trace) outcomeText(last TracePoint) string {
	switch r.Outcome {
	case "converged":
		return fmt.Sprintf("converged: errors vanish (%s followed)", iterationsInWords(last.Iteration))
	case "stalled":
		return fmt.Sprintf("stalled after %s: a fixed point at message entropy %s bit, bit error probability %s", iterationsInWords(last.Iteration), Significant(last.Entropy, 4), Significant(last.BitErrorProbability, 4))
	case "exhausted":
		return fmt.Sprintf("undecided: the %d iterations allowed came first", last.Iteration)
	}
	return r.Outcome
}

// probability renders small numbers with an exponent and large ones without.
func probability(v float64) string {
	if v == 0 {
		return "0"
	}
	if v < 1e-3 {
		return strconv.FormatFloat(v, 'e', 3, 64)
	}
	return Fixed(v, 6)
}

// short is a number given by the user as typed, or rounded if it followed
// from another and has too many digits.
func short(v float64) string {
	if s := Plain(v); len(s) <= valueDigits+2 {
		return s
	}
	return Significant(v, valueDigits)
}

// thin chooses at most about limit of n indices: the first and the last ones
// in full, those between evenly, and always the one to keep.
func thin(n int, keep *int, limit int) []int {
	const ends = 8
	stride := 1
	if n > limit {
		stride = (n - 2*ends + limit - 2*ends - 1) / (limit - 2*ends)
	}
	var shown []int
	for i := range n {
		if i < ends || i >= n-ends || (i-ends)%stride == 0 || keep != nil && i == *keep {
			shown = append(shown, i)
		}
	}
	return shown
}

func iterationsInWords(n int) string {
	if n == 1 {
		return "1 iteration"
	}
	return fmt.Sprintf("%d iterations", n)
}

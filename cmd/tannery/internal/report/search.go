package report

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"tannery/ensembles"
)

// Search is the answer of the command search.
type Search struct {
	Schema      string            `json:"schema"`
	Profile     ensembles.Profile `json:"profile"`
	Status      string            `json:"status"`
	Evaluations int               `json:"evaluations"`
	Seconds     float64           `json:"seconds"`

	Programmes  int          `json:"programmes"`
	EdgesPerBit float64      `json:"edges_per_bit"`
	Binding     []string     `json:"binding"`
	Certificate *Certificate `json:"certificate"`
	DegreeBound *DegreeBound `json:"degree_bound"`
	Link        *LinkMargin  `json:"link"`
	// Thresholds are those on all channels, as asked; Threshold is the first.
	Threshold  *Threshold   `json:"threshold"`
	Thresholds []*Threshold `json:"thresholds"`
	Phases     []PhaseTime  `json:"phases"`
	// Relaxations say of limits in Binding what relaxing them would gain.
	Relaxations []Relaxation `json:"relaxations"`
	Resumed     bool         `json:"resumed"` // from a checkpoint
	Warnings    []string     `json:"warnings"`

	// Tunnel is the evolution a little below the threshold; null if there is
	// none to show.
	Tunnel *Trace `json:"tunnel"`

	Draw       bool   `json:"-"` // the tunnel, at the end
	File       string `json:"-"` // where the profile went; "" for nowhere, "-" for standard output
	Checkpoint string `json:"-"` // from which the search continues; "" if it does not
}

// Relaxation is what a little more freedom in a limit would gain.
type Relaxation struct {
	Limit string  `json:"limit"`
	To    string  `json:"to"`   // what it is relaxed to, in words
	Gain  float64 `json:"gain"` // of the threshold on the first channel, as predicted
}

// PhaseTime is the time spent in a part of the search.
type PhaseTime struct {
	Phase   string  `json:"phase"`
	Seconds float64 `json:"seconds"`
}

// Certificate proves that no λ with the same degrees and ρ has a threshold
// beyond Bound.
type Certificate struct {
	Bound float64 `json:"bound"`
	Above float64 `json:"above"` // Bound minus the threshold
}

// DegreeBound limits any code with the same mean check degree.
type DegreeBound struct {
	MeanCheckDegree float64 `json:"mean_check_degree"`
	Threshold       float64 `json:"threshold"` // the most that any decoder reaches
}

// LinkMargin compares the threshold with the channel parameter of a link.
type LinkMargin struct {
	Parameter float64  `json:"parameter"`
	Reached   bool     `json:"reached"`
	Margin    float64  `json:"margin"`    // threshold minus Parameter
	MarginDB  *float64 `json:"margin_db"` // in signal-to-noise ratio
}

// WriteText writes the report for people.
func (r *Search) WriteText(w io.Writer) error {
	var t Text
	if r.Profile.Title != "" {
		t.Paragraph("%s", r.Profile.Title)
	}
	r.Threshold.profileRows(&t)
	t.Row("edges per code bit", "%s", Trimmed(r.EdgesPerBit, 4))
	worst := r.byGap()[0]
	r.channelTable(&t)
	worst.thresholdRows(&t)
	r.unlimitedRow(&t, worst)
	symbol, decimals := r.Threshold.Symbol, DecimalsAt(r.Threshold.Uncertainty, 4, 7)
	if b := r.DegreeBound; b != nil {
		t.Row("any code and decoder", "at most %s = %s with mean check degree %s", symbol, Fixed(b.Threshold, decimals), Trimmed(b.MeanCheckDegree, 4))
	}
	if l := r.Link; l != nil {
		verdict := "served"
		if !l.Reached {
			verdict = "not served"
		}
		margin := Fixed(l.Margin, 4) + " in " + symbol
		if l.MarginDB != nil {
			margin += ", " + Fixed(*l.MarginDB, 3) + " dB"
		}
		t.Row("link", "%s at its %s = %s, margin %s", verdict, symbol, short(l.Parameter), margin)
	}
	t.Heading("Search")
	evaluations := "evaluations"
	if r.Evaluations == 1 {
		evaluations = "evaluation"
	}
	t.Row("ended", "%s after %d %s, %s s", r.Status, r.Evaluations, evaluations, Fixed(r.Seconds, 1))
	if phases := r.phaseText(); phases != "" {
		t.Row("time went to", "%s", phases)
	}
	if c := r.Certificate; c != nil {
		t.Row("certificate", "no λ with these degrees and this ρ does better than %s = %s by more than %s",
			symbol, Fixed(r.Threshold.Threshold, maxDecimals), atMost(c.Above))
	}
	r.bindingRows(&t)
	if r.File != "" && r.File != "-" {
		t.Row("written to", "%s", r.File)
	}
	if r.Checkpoint != "" {
		t.Row("to be continued", "from %s, by the same command", r.Checkpoint)
	}
	for _, warning := range r.Warnings {
		t.Row("note", "%s", warning)
	}
	if r.Draw && r.Tunnel != nil {
		r.Tunnel.Tunnel(&t)
		t.Gap()
		t.Paragraph("at %s = %s; trace shows it at other places and as a picture.", symbol, short(r.Tunnel.Value))
	}
	_, err := t.WriteTo(w)
	return err
}

// byGap sorts the thresholds by their gap in rate, the worst first.
func (r *Search) byGap() []*Threshold {
	sorted := slices.Clone(r.Thresholds)
	rate := func(t *Threshold) float64 {
		if t.Gap == nil {
			return math.Inf(1)
		}
		return t.Gap.Rate
	}
	slices.SortStableFunc(sorted, func(a, b *Threshold) int { return cmp.Compare(rate(b), rate(a)) })
	return sorted
}

// channelTable sets the channels side by side, if there are several.
func (r *Search) channelTable(t *Text) {
	if len(r.Thresholds) < 2 {
		return
	}
	t.Heading("Channels, the worst gap in rate first")
	var rows [][]string
	for _, c := range r.byGap() {
		row := []string{c.Channel, c.Symbol, WithUncertainty(c.Threshold, c.Uncertainty), "", "", "", ""}
		if c.Limit != nil && c.Gap != nil {
			decimals := DecimalsAt(c.Uncertainty, 4, 7)
			row[3], row[4], row[6] = Fixed(*c.Limit, decimals), Fixed(c.Gap.Parameter, decimals), Fixed(c.Gap.Rate, max(4, decimals-1))
			if c.Gap.DB != nil {
				row[5] = Fixed(*c.Gap.DB, 4)
			}
		}
		rows = append(rows, row)
	}
	t.Table([]string{"channel", "", "threshold", "limit", "gap", "in dB", "in rate"}, rows)
}

// unlimitedRow tells the threshold of a decoder without a limit on iterations,
// which is the one in the profile.
func (r *Search) unlimitedRow(t *Text, worst *Threshold) {
	if worst.Limited == nil {
		return
	}
	for _, p := range r.Profile.Results {
		if p.Channel == worst.Channel {
			t.Row("without that limit", "%s = %s", worst.Symbol, WithUncertainty(p.Threshold, p.Uncertainty))
		}
	}
}

// leastPhase is the share of the time below which a phase is not worth a word.
const leastPhase = 0.02

// phaseText tells where the time went, for searches that took some.
func (r *Search) phaseText() string {
	var parts []string
	for _, p := range r.Phases {
		if r.Seconds >= 1 && p.Seconds >= leastPhase*r.Seconds {
			parts = append(parts, fmt.Sprintf("%s %s s", p.Phase, Fixed(p.Seconds, 1)))
		}
	}
	return strings.Join(parts, ", ")
}

// bindingRows names the limits that bind, each with what relaxing it would
// gain where that is known.
func (r *Search) bindingRows(t *Text) {
	var plain []string
	for _, limit := range r.Binding {
		if !slices.ContainsFunc(r.Relaxations, func(x Relaxation) bool { return x.Limit == limit }) {
			plain = append(plain, limit)
		}
	}
	label := "kept down by"
	if len(plain) > 0 {
		t.Row(label, "%s", strings.Join(plain, ", "))
		label = ""
	}
	for _, x := range r.Relaxations {
		t.Row(label, "%s: %s would gain about %s in %s", x.Limit, x.To, Significant(x.Gain, 2), r.Threshold.Symbol)
		label = ""
	}
}

package report

import (
	"io"
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
	Threshold   *Threshold   `json:"threshold"`

	// Tunnel is the evolution a little below the threshold; null if there is
	// none to show.
	Tunnel *Trace `json:"tunnel"`

	Draw bool   `json:"-"` // the tunnel, at the end
	File string `json:"-"` // where the profile went; "" for nowhere, "-" for standard output
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
	r.Threshold.thresholdRows(&t)
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
	if c := r.Certificate; c != nil {
		t.Row("certificate", "no λ with these degrees and this ρ does better than %s = %s by more than %s",
			symbol, Fixed(r.Threshold.Threshold, maxDecimals), atMost(c.Above))
	}
	if len(r.Binding) > 0 {
		t.Row("kept down by", "%s", strings.Join(r.Binding, ", "))
	}
	if r.File != "" && r.File != "-" {
		t.Row("written to", "%s", r.File)
	}
	if r.Draw && r.Tunnel != nil {
		r.Tunnel.Tunnel(&t)
		t.Gap()
		t.Paragraph("at %s = %s; trace shows it at other places and as a picture.", symbol, short(r.Tunnel.Value))
	}
	_, err := t.WriteTo(w)
	return err
}

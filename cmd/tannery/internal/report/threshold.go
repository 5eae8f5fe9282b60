package report

import (
	"fmt"
	"io"
	"strings"
)

// Threshold is the answer of the command threshold. What cannot be said is
// null in JSON: a stability bound where the whole family is stable, or ratios
// in dB on channels without noise power.
type Threshold struct {
	Schema      string    `json:"schema"`
	Channel     string    `json:"channel"`
	Parameter   string    `json:"parameter"` // key of the family's parameter
	Method      string    `json:"method"`
	Threshold   float64   `json:"threshold"`
	Uncertainty float64   `json:"uncertainty"`
	DesignRate  float64   `json:"design_rate"`
	Limit       *float64  `json:"limit"` // null if the design rate is not positive
	Gap         *Gap      `json:"gap"`
	EbN0DB      *float64  `json:"eb_n0_db"` // at the threshold
	EsN0DB      *float64  `json:"es_n0_db"`
	Stability   Stability `json:"stability"`
	Iterations  int       `json:"iterations"` // evolution steps spent
	Warnings    []string  `json:"warnings"`

	Title              string         `json:"title,omitempty"`
	Lambda             Degrees        `json:"lambda"`
	Rho                Degrees        `json:"rho"`
	MeanVariableDegree float64        `json:"mean_variable_degree"`
	MeanCheckDegree    float64        `json:"mean_check_degree"`
	Critical           []Critical     `json:"critical"`
	MAPBound           *float64       `json:"map_bound,omitempty"`
	Limited            *LimitedTarget `json:"limited,omitempty"`

	Symbol string `json:"-"`
}

// LimitedTarget is what a threshold with a limit on iterations was asked for.
type LimitedTarget struct {
	Iterations  int     `json:"iterations"`
	TargetError float64 `json:"target_error"`
}

// Gap is the distance of a threshold from the Shannon limit.
type Gap struct {
	Parameter float64  `json:"parameter"`
	DB        *float64 `json:"db"`
	Rate      float64  `json:"rate"`
}

// Stability is the bound of the stability condition and the margin at the
// threshold; null where infinite.
type Stability struct {
	Bound  *float64 `json:"bound"`
	Margin *float64 `json:"margin"`
}

// Critical is a place where the decoding tunnel is tightest.
type Critical struct {
	Entropy float64 `json:"entropy"`
	Slack   float64 `json:"slack"`
}

// WriteText writes the answer for people.
func (r *Threshold) WriteText(w io.Writer) error {
	var t Text
	if r.Title != "" {
		t.Paragraph("%s", r.Title)
	}
	r.profileRows(&t)
	r.thresholdRows(&t)
	_, err := t.WriteTo(w)
	return err
}

func (r *Threshold) profileRows(t *Text) {
	t.Heading("Profile, by edges")
	t.Row("λ", "%s", r.Lambda)
	t.Row("ρ", "%s", r.Rho)
	t.Row("design rate", "%s", Trimmed(r.DesignRate, 9))
	t.Row("mean degrees", "variable %s, check %s", Trimmed(r.MeanVariableDegree, 4), Trimmed(r.MeanCheckDegree, 4))
}

func (r *Threshold) thresholdRows(t *Text) {
	decimals := DecimalsAt(r.Uncertainty, 4, 7)
	t.Gap()
	t.Paragraph("Threshold on %s, method %s%s", r.Channel, r.Method, r.Limited.text())
	t.Row("threshold", "%s = %s", r.Symbol, WithUncertainty(r.Threshold, r.Uncertainty))
	ratioRows(t, "Eb/N0", r.EbN0DB, r.EsN0DB)
	if r.Limit != nil {
		t.Row("Shannon limit", "%s = %s at the design rate", r.Symbol, Fixed(*r.Limit, decimals))
	}
	if r.Gap != nil {
		t.Row("gap to it", "%s", r.Gap.text(r.Symbol, decimals))
	}
	if r.MAPBound != nil {
		t.Row("MAP decoding", "no threshold above %s = %s", r.Symbol, Fixed(*r.MAPBound, decimals))
	}
	t.Row("stability", "%s", r.Stability.text(r.Symbol, decimals))
	criticalRows(t, r.Critical)
	for i, warning := range r.Warnings {
		label := "note"
		if i > 0 {
			label = ""
		}
		t.Row(label, "%s", warning)
	}
}

func (l *LimitedTarget) text() string {
	if l == nil {
		return ""
	}
	return fmt.Sprintf(", bit error rate %s within %d iterations", Plain(l.TargetError), l.Iterations)
}

func (g *Gap) text(symbol string, decimals int) string {
	parts := []string{fmt.Sprintf("%s in %s", Fixed(g.Parameter, decimals), symbol)}
	if g.DB != nil {
		parts = append(parts, Fixed(*g.DB, 4)+" dB")
	}
	return strings.Join(append(parts, Fixed(g.Rate, max(4, decimals-1))+" in rate"), ", ")
}

func (s Stability) text(symbol string, decimals int) string {
	switch {
	case s.Margin == nil:
		return "unstable: with variable nodes of degree 1 errors never vanish"
	case s.Bound == nil:
		return "stable on every channel of the family"
	case *s.Margin < 0:
		return fmt.Sprintf("unstable above %s = %s", symbol, Fixed(*s.Bound, decimals))
	}
	return fmt.Sprintf("holds up to %s = %s, margin %s %%", symbol, Fixed(*s.Bound, decimals), Fixed(100**s.Margin, 3))
}

// closed is the slack below which a tunnel counts as closed: computations
// leave some.
const closed = 1e-6

// criticalRows tells where the tunnel closes at the threshold, and where it is
// nearly closed.
func criticalRows(t *Text, critical []Critical) {
	var shut, narrow []string
	for _, c := range critical {
		where := Significant(c.Entropy, 4)
		if c.Entropy == 0 {
			where = "0 (by the stability condition)"
		}
		if c.Slack > closed {
			narrow = append(narrow, fmt.Sprintf("%s (open by %s %%)", where, Significant(100*c.Slack, 2)))
		} else {
			shut = append(shut, where)
		}
	}
	if len(shut) > 0 {
		t.Row("tunnel closes", "at message entropy %s bit", strings.Join(shut, ", "))
	}
	if len(narrow) > 0 {
		t.Row("nearly closes", "at %s", strings.Join(narrow, ", "))
	}
}

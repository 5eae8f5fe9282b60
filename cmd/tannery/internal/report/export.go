package report

import (
	"io"
	"strconv"
	"strings"

	"tannery/ensembles"
)

// Export is the answer of the command export. The profile, with its
// realization, has the keys of a profile file.
type Export struct {
	Schema   string            `json:"schema"`
	Profile  ensembles.Profile `json:"profile"`
	Warnings []string          `json:"warnings"`
}

// WriteText writes the counts and thresholds for people.
func (r *Export) WriteText(w io.Writer) error {
	var t Text
	real := r.Profile.Realization
	t.Heading("Exact node counts for %d code bits", real.Length)
	t.Row("checks", "%d, design rate %s", real.Checks, Trimmed(real.DesignRate(), 9))
	t.Row("edges", "%d, %s per code bit", real.Edges, Trimmed(float64(real.Edges)/float64(real.Length), 4))
	t.Row("variable nodes", "%s", counts(real.VariableNodes))
	t.Row("check nodes", "%s", counts(real.CheckNodes))
	for _, result := range real.Results {
		ResultRows(&t, "Threshold of the integer profile", result)
	}
	_, err := t.WriteTo(w)
	return err
}

// counts renders node counts as degree×nodes.
func counts(c ensembles.Counts) string {
	items := make([]string, len(c))
	for i, n := range c {
		items[i] = strconv.Itoa(n.Degree) + ":" + strconv.Itoa(n.Nodes)
	}
	return strings.Join(items, " ")
}

// ResultRows writes a recorded threshold with its gap.
func ResultRows(t *Text, heading string, r ensembles.Result) {
	decimals := DecimalsAt(r.Uncertainty, 4, 7)
	symbol := symbolOf(r.Channel, r.Parameter)
	t.Heading("%s on %s, method %s", heading, r.Channel, r.Method)
	t.Row("threshold", "%s = %s", symbol, WithUncertainty(r.Threshold, r.Uncertainty))
	t.Row("Shannon limit", "%s = %s at the design rate", symbol, Fixed(r.Limit, decimals))
	gap := Gap(r.Gap)
	t.Row("gap to it", "%s", gap.text(symbol, decimals))
}

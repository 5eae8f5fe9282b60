package report

import (
	"fmt"
	"io"
)

// Matrix is the answer of the command limit for a transition matrix.
type Matrix struct {
	Schema       string       `json:"schema"`
	Channel      string       `json:"channel"`   // the file
	Parameter    *string      `json:"parameter"` // null, as the next: there is no family
	Value        *float64     `json:"value"`
	EbN0DB       *float64     `json:"eb_n0_db"`
	EsN0DB       *float64     `json:"es_n0_db"`
	Inputs       int          `json:"inputs"`
	Outputs      int          `json:"outputs"`
	Capacity     float64      `json:"capacity"` // bits per symbol
	Rate         float64      `json:"rate"`     // the same: the largest rate
	Lower        float64      `json:"lower"`
	Upper        float64      `json:"upper"`
	Distribution []InputShare `json:"distribution"`
	Iterations   int          `json:"iterations"`
	Warnings     []string     `json:"warnings"`
	Link         *LinkAnswer  `json:"link,omitempty"`
}

// InputShare is how often an input symbol is used.
type InputShare struct {
	Input       string  `json:"input"`
	Probability float64 `json:"probability"`
}

// maxInputs is how many input symbols a text lists.
const maxInputs = 40

// WriteText writes the answer for people.
func (m *Matrix) WriteText(w io.Writer) error {
	var t Text
	t.Heading("Capacity of %s, %d inputs and %d outputs", m.Channel, m.Inputs, m.Outputs)
	t.Row("capacity", "%s bits per symbol", Significant(m.Capacity, 9))
	t.Row("bounds", "%s to %s", Fixed(m.Lower, 10), Fixed(m.Upper, 10))
	t.Gap()
	var rows [][]string
	for _, share := range m.Distribution[:min(len(m.Distribution), maxInputs)] {
		rows = append(rows, []string{share.Input, Fixed(share.Probability, 6)})
	}
	if hidden := len(m.Distribution) - len(rows); hidden > 0 {
		rows = append(rows, []string{fmt.Sprintf("and %d more", hidden), ""})
	}
	t.Table([]string{"input", "probability"}, rows)
	if m.Link != nil {
		link := Limit{Link: m.Link, Channel: m.Channel, Capacity: &m.Capacity}
		link.linkText(&t)
	}
	_, err := t.WriteTo(w)
	return err
}

package report

import (
	"bytes"
	"encoding/json"
	"strconv"
	"strings"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Degrees renders a degree distribution: for people as 2:0.2444 3:0.7556
// with six digits, in JSON as an object with the degrees as its keys.
type Degrees ensembles.Distribution

// String returns the form for people.
func (d Degrees) String() string {
	items := make([]string, len(d))
	for i, t := range d {
		fraction := Trimmed(t.Fraction, 6)
		if t.Fraction < 1e-5 {
			fraction = strconv.FormatFloat(t.Fraction, 'e', 1, 64)
		}
		items[i] = strconv.Itoa(t.Degree) + ":" + fraction
	}
	return strings.Join(items, " ")
}

// MarshalJSON keeps the degrees in numeric order.
func (d Degrees) MarshalJSON() ([]byte, error) {
	var b bytes.Buffer
	b.WriteByte('{')
	for i, t := range d {
		if i > 0 {
			b.WriteByte(',')
		}
		fraction, err := json.Marshal(t.Fraction)
		if err != nil {
			return nil, err
		}
		b.WriteString(strconv.Quote(strconv.Itoa(t.Degree)) + ":")
		b.Write(fraction)
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// symbolOf returns the symbol of a channel's parameter, or its key if the
// channel is not one of ours.
func symbolOf(name, parameter string) string {
	if f, err := channel.ByName(name); err == nil {
		return f.Symbol()
	}
	return parameter
}

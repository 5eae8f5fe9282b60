package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"
	"strings"

	"tannery/ensembles"
)

// Catalog is the answer of the command catalog without a name: the entries.
type Catalog struct {
	Schema  string         `json:"schema"`
	Entries []CatalogEntry `json:"entries"`

	Only string `json:"-"` // the channel asked for; "" for all
}

// CatalogEntry is a published ensemble.
type CatalogEntry struct {
	Name          string               `json:"name"`
	Source        string               `json:"source"`
	Variant       string               `json:"variant,omitempty"`
	Trust         string               `json:"trust"` // read, recalled or computed
	DesignRate    float64              `json:"design_rate"`
	LargestDegree int                  `json:"largest_degree"`
	EdgesPerBit   float64              `json:"edges_per_bit"`
	Length        *int                 `json:"length"` // code bits of a standard
	Published     []PublishedThreshold `json:"published"`
}

// PublishedThreshold is a threshold as a source prints it.
type PublishedThreshold struct {
	Channel    string  `json:"channel"`
	Decoder    string  `json:"decoder"`
	Method     string  `json:"method"`
	Threshold  float64 `json:"threshold"`
	Resolution float64 `json:"resolution"` // half a unit of the last digit
	Trust      string  `json:"trust"`

	Plain bool `json:"-"` // of belief propagation itself
}

// value writes a published threshold with the digits of its source.
func (p PublishedThreshold) value() string {
	decimals := 0
	for unit := 2 * p.Resolution; unit < 0.9999 && decimals < maxDecimals; unit *= 10 {
		decimals++
	}
	return Fixed(p.Threshold, decimals)
}

// WriteText writes the entries for people, under their sources.
func (c *Catalog) WriteText(w io.Writer) error {
	var t Text
	if len(c.Entries) == 0 {
		t.Paragraph("No entries.")
	}
	for i := 0; i < len(c.Entries); {
		source := c.Entries[i].Source
		t.Gap()
		t.Paragraph("%s", source)
		var rows [][]string
		for ; i < len(c.Entries) && c.Entries[i].Source == source; i++ {
			e := c.Entries[i]
			rows = append(rows, []string{e.Name, Fixed(e.DesignRate, 4), Fixed(e.EdgesPerBit, 3), e.published(c.Only)})
		}
		t.Listing([]string{"name", "rate", "edges/bit", "threshold"}, rows)
	}
	_, err := t.WriteTo(w)
	return err
}

// published lists the thresholds of belief propagation, or on one channel
// all thresholds with their decoders.
func (e CatalogEntry) published(only string) string {
	var items []string
	for _, p := range e.Published {
		switch {
		case only == "" && p.Plain:
			items = append(items, p.Channel+" "+p.value())
		case only == p.Channel && p.Plain:
			items = append(items, p.value())
		case only == p.Channel && p.Method != "":
			items = append(items, p.Method+" "+p.value())
		case only == p.Channel:
			items = append(items, p.Decoder+" "+p.value())
		}
	}
	const most = 2
	if len(items) > most {
		items = append(items[:most], "…")
	}
	return strings.Join(items, ", ")
}

// WriteCSV writes one line per entry and threshold; entries without one have
// one line.
func (c *Catalog) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	if err := out.Write([]string{"name", "design_rate", "largest_degree", "edges_per_bit", "trust", "channel", "decoder", "method", "threshold", "threshold_trust", "source"}); err != nil {
		return err
	}
	number := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	for _, e := range c.Entries {
		published := e.Published
		if len(published) == 0 {
			published = []PublishedThreshold{{}}
		}
		for _, p := range published {
			value := ""
			if p.Channel != "" {
				value = number(p.Threshold)
			}
			if err := out.Write([]string{e.Name, number(e.DesignRate), strconv.Itoa(e.LargestDegree), number(e.EdgesPerBit), e.Trust, p.Channel, p.Decoder, p.Method, value, p.Trust, e.Source}); err != nil {
				return err
			}
		}
	}
	out.Flush()
	return out.Error()
}

// CatalogProfile is the answer of the command catalog with a name.
type CatalogProfile struct {
	Schema string `json:"schema"`
	CatalogEntry
	Profile ensembles.Profile `json:"profile"`
}

// WriteText writes the profile as YAML, with all published thresholds as a
// comment before it.
func (c *CatalogProfile) WriteText(w io.Writer) error {
	var b strings.Builder
	for _, p := range c.Published {
		how := p.Decoder
		if p.Method != "" {
			how += ", method " + p.Method
		}
		fmt.Fprintf(&b, "# published: %s on %s %s (%s)\n", how, p.Channel, p.value(), p.Trust)
	}
	if _, err := io.WriteString(w, b.String()); err != nil {
		return err
	}
	_, err := c.Profile.WriteTo(w)
	return err
}

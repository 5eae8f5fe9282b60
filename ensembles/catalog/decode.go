package catalog

import (
	_ "embed"
	"fmt"
	"math"
	"strings"
	"sync"

	"tannery/ensembles"
	"tannery/ensembles/document"
)

//go:embed ensembles.yaml
var data []byte

// entries decodes the data once. A fault in it is one of the program, which
// the tests of this package find.
var entries = sync.OnceValue(func() []Entry {
	all, err := decode(data)
	if err != nil {
		panic(fmt.Sprintf("catalogue: %v", err))
	}
	return all
})

// decoder collects the entries of a document.
type decoder struct {
	sources map[string]string
	entries []Entry
}

// decode reads the catalogue strictly, as all files are read.
func decode(text []byte) ([]Entry, error) {
	doc := document.Parse("ensembles.yaml", text)
	root := doc.Kind("ensembles", 1)
	d := decoder{sources: map[string]string{}}
	sources := root.Required("sources").Mapping()
	for _, key := range []string{"ru01", "rsu01", "cfru01", "elab09", "bru04", "s99", "lmss01", en302307, "80216e", "80211n"} {
		d.sources[key] = sources.Required(key).String()
	}
	for _, item := range root.Required("regular").List("regular ensembles") {
		m := item.Mapping()
		dv, dc := m.Required("variable").Int(2, ensembles.MaxDegree), m.Required("check").Int(2, ensembles.MaxDegree)
		d.add("ru01", Entry{Trust: Computed, Ensemble: ensembles.Regular(dv, dc), Thresholds: thresholds(m)})
	}
	for _, item := range root.Required("irregular").List("irregular ensembles") {
		m := item.Mapping()
		e := ensembles.Ensemble{Lambda: printed(m.Required("lambda")), Rho: printed(m.Required("rho"))}
		d.add(m.Required("source").Word(), Entry{Trust: trust(m), Ensemble: e, Thresholds: thresholds(m)})
	}
	for _, item := range root.Required("right_regular").List("right-regular sequences") {
		m := item.Mapping()
		e, _ := RightRegular(m.Required("check").Int(3, ensembles.MaxDegree), m.Required("terms").Int(2, ensembles.MaxDegree))
		value := m.Required("threshold")
		d.add("s99", Entry{Trust: Computed, Ensemble: e, Thresholds: []Threshold{{
			Channel: "bec", Decoder: BeliefPropagation, Value: value.Float(document.Between(0, 1)), Resolution: 5e-7, Trust: Computed,
		}}})
	}
	for _, item := range root.Required("heavy_tail").List("heavy-tail sequences") {
		m := item.Mapping()
		e := HeavyTail(m.Required("terms").Int(1, ensembles.MaxDegree-1), m.Required("rate").Float(document.Between(0, 1)))
		d.add("lmss01", Entry{Trust: Computed, Ensemble: e})
	}
	for _, item := range root.Required("standards").List("standards") {
		m := item.Mapping()
		r := realization(counts(m.Required("variable_nodes")), counts(m.Required("check_nodes")))
		source := m.Required("source").Word()
		d.addStandard(source, m.Optional("variant").String(), r)
		if source == en302307 {
			d.addStandard(source+"-closed", "chain of parity bits closed to a ring", closed(r))
		}
	}
	return d.entries, doc.Err()
}

const en302307 = "en302307"

func (d *decoder) add(source string, e Entry) {
	e.Source = d.sources[strings.TrimSuffix(source, "-closed")]
	e.Name = nameOf(source, e.Ensemble)
	d.entries = append(d.entries, e)
}

func (d *decoder) addStandard(source, variant string, r ensembles.Realization) {
	d.add(source, Entry{Variant: variant, Trust: Recalled, Ensemble: r.Ensemble(), Realization: &r})
}

// closed gives the bit of degree 1 at the end of the chain of parity bits, and
// the check at its beginning, the edge that closes the chain to a ring.
func closed(r ensembles.Realization) ensembles.Realization {
	variable, check := ensembles.Counts{}, ensembles.Counts{}
	for _, c := range r.VariableNodes {
		switch c.Degree {
		case 1:
			continue
		case 2:
			c.Nodes++
		}
		variable = append(variable, c)
	}
	for _, c := range r.CheckNodes[1:] {
		check = append(check, ensembles.Count{Degree: c.Degree, Nodes: c.Nodes + 1})
	}
	return realization(variable, check)
}

func realization(variable, check ensembles.Counts) ensembles.Realization {
	return ensembles.Realization{
		Length:        variable.Nodes(),
		Checks:        check.Nodes(),
		Edges:         variable.Sockets(),
		VariableNodes: variable,
		CheckNodes:    check,
	}
}

func trust(m *document.Mapping) Trust {
	return Trust(m.Required("trust").Choice(string(Read), string(Recalled), string(Computed)))
}

// printed reads the fractions of a table and normalises them: rounding to
// five digits lets a sum of ten miss 1 by up to 5e-5.
func printed(v document.Value) ensembles.Distribution {
	var terms []ensembles.Term
	for _, entry := range v.ByDegree(1, ensembles.MaxDegree, "degrees with fractions") {
		terms = append(terms, ensembles.Term{Degree: entry.Key, Fraction: entry.Value.Float(document.Between(0, 2))})
	}
	if excess := ensembles.Excess(terms); math.Abs(excess) > 5e-5 {
		v.Refuse(fmt.Sprintf("a sum of %v", 1+excess), "a sum of 1 within 5e-5")
	}
	return ensembles.Normalize(terms)
}

func counts(v document.Value) ensembles.Counts {
	var c ensembles.Counts
	for _, entry := range v.ByDegree(1, ensembles.MaxDegree, "degrees with numbers of nodes") {
		c = append(c, ensembles.Count{Degree: entry.Key, Nodes: entry.Value.Int(1, ensembles.MaxLength)})
	}
	return c
}

func thresholds(m *document.Mapping) []Threshold {
	var all []Threshold
	for _, item := range m.Required("thresholds").List("thresholds") {
		t := item.Mapping()
		decoder := BeliefPropagation
		if v := t.Optional("decoder"); v.Present() {
			decoder = v.Choice(MAP, GallagerA, GallagerB)
		}
		value := t.Required("value")
		all = append(all, Threshold{
			Channel:    t.Required("channel").Choice("bec", "bsc", "biawgn", "laplace", "rayleigh"),
			Decoder:    decoder,
			Method:     t.Optional("method").String(),
			Value:      value.Float(document.AtLeast(0)),
			Resolution: resolution(value.String()),
			Trust:      trust(t),
		})
	}
	return all
}

// resolution is half a unit of the last digit of a printed number.
func resolution(text string) float64 {
	_, digits, _ := strings.Cut(text, ".")
	return math.Pow10(-len(digits)) / 2
}

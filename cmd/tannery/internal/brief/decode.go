package brief

import (
	"math"
	"slices"
	"strings"
	"time"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// Methods names the methods of analysis a brief may ask for.
func Methods() []string {
	return []string{string(de.Exact), string(de.Gaussian), string(de.GaussianFit), string(de.Quantized)}
}

// DegreeTwoRules are the rules for variable nodes of degree 2: no more of
// them than a chain of parity bits has, or as many as stability allows.
var DegreeTwoRules = []string{"parity", "free"}

// Decode reads a brief. Problems are kept for Err and Finish. The channels
// given by options win over the file, and the first of all says under which
// key a link has its parameter.
func Decode(name string, data []byte, given Channels) *Draft {
	d := &Draft{file: map[string]document.Value{}, options: map[string]string{}}
	d.doc = document.Parse(name, data)
	root := d.doc.Kind("brief", 1)
	if !root.Present() {
		return d
	}
	get := func(m *document.Mapping, prefix, key string) document.Value {
		v := m.Optional(key)
		d.file[prefix+key] = v
		return v
	}
	d.Title = get(root, "", "title").String()
	var channels []string
	if v := get(root, "", "channel"); v.Present() {
		channels = decodeChannels(v)
	}
	if v := get(root, "", "degradation"); v.Present() {
		d.Degradation = v.Choice(Degradations...)
	}
	d.take(given, channels)
	if v := get(root, "", "method"); v.Present() {
		d.Method = v.Choice(Methods()...)
	}
	d.Rate = get(root, "", "rate").Float(document.Between(0, 1))
	if link := get(root, "", "link"); link.Present() {
		if d.file["rate"].Present() {
			link.Refuse("a link beside a rate", "one of the two")
		}
		d.Link = decodeLink(link.Mapping(), d.family())
	}
	d.VariableDegrees = decodeDegrees(get(root, "", "variable_degrees"), 2)
	d.CheckDegrees = decodeDegrees(get(root, "", "check_degrees"), 2)

	limits := get(root, "", "limits").Mapping()
	d.Iterations = get(limits, "limits.", "iterations").Int(1, MaxIterations)
	d.TargetError = get(limits, "limits.", "target_error").Float(TargetErrors)
	d.EdgesPerBit = get(limits, "limits.", "edges_per_bit").Float(document.AtLeast(1))
	if v := get(limits, "limits.", "degree_two"); v.Present() {
		d.DegreeTwo = v.Choice(DegreeTwoRules...)
	}
	d.DistinctDegrees = get(limits, "limits.", "distinct_degrees").Int(1, MaxDistinctDegrees)
	d.StabilityMargin = get(limits, "limits.", "stability_margin").Float(StabilityMargins)

	search := get(root, "", "search").Mapping()
	d.Seed = get(search, "search.", "seed").Uint64()
	d.Time = get(search, "search.", "time").Duration(time.Millisecond, MaxTime)
	d.Evaluations = get(search, "search.", "evaluations").Int(1, MaxEvaluations)
	d.Workers = get(search, "search.", "workers").Int(1, MaxWorkers)
	return d
}

// decodeDegrees reads {max: 15} or {allowed: [2, 3, 8]}.
func decodeDegrees(v document.Value, low int) Degrees {
	if !v.Present() {
		return Degrees{}
	}
	m := v.Mapping()
	if !m.Present() {
		return Degrees{}
	}
	largest, allowed := m.Optional("max"), m.Optional("allowed")
	switch {
	case largest.Present() && allowed.Present():
		v.Refuse("both max and allowed", "one of the two")
	case !largest.Present() && !allowed.Present():
		v.Refuse("neither max nor allowed", "one of the two, as in {max: 15} or {allowed: [2, 3, 8]}")
	}
	d := Degrees{
		Max:     largest.Int(low, ensembles.MaxDegree),
		Allowed: allowed.Ints(low, ensembles.MaxDegree),
	}
	slices.Sort(d.Allowed)
	return d
}

// decodeLink reads a link. The channel's parameter stands under its own key,
// such as sigma; where that is a noise deviation, es_n0_db does as well.
func decodeLink(m *document.Mapping, family channel.Family) *Link {
	l := &Link{
		SourceRate:        m.Required("source_rate").Float(document.Above(0)),
		SourceProbability: 0.5,
		SymbolRate:        m.Required("symbol_rate").Float(document.Above(0)),
	}
	if v := m.Optional("source_probability"); v.Present() {
		l.SourceProbability = v.Float(document.Between(0, 1))
	}
	if family == nil { // reported with the channel
		m.Known(parameterKeys()...)
		return l
	}
	best, worst := family.Range()
	db := m.Optional("es_n0_db")
	switch {
	case !db.Present():
		allowed := document.Range{Low: best, High: worst, OpenHigh: math.IsInf(worst, 1), OpenLow: true}
		v := m.Optional(family.Parameter())
		switch {
		case v.Present():
			l.Parameter = v.Float(allowed)
		case family.Parameter() == "sigma":
			v.Refuse("", allowed.String()+"; or es_n0_db")
		default:
			v.Refuse("", allowed.String())
		}
	case family.Parameter() != "sigma":
		db.Refuse("es_n0_db", family.Parameter()+" for the channel "+family.Name())
	default:
		if v := m.Optional("sigma"); v.Present() {
			v.Refuse("sigma beside es_n0_db", "one of the two")
		}
		l.Parameter = channel.SigmaFromEsN0DB(db.Float(document.FromTo(-100, 100)))
	}
	return l
}

// parameterKeys lists every key under which a parameter may stand.
func parameterKeys() []string {
	keys := []string{"es_n0_db"}
	for _, name := range channel.Names() {
		if f, err := channel.ByName(name); err == nil {
			keys = append(keys, f.Parameter())
		}
	}
	return keys
}

// listOf joins names for a sentence: "a, b or c".
func listOf(names []string) string {
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " or " + names[last]
}

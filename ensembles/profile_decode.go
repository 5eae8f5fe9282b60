package ensembles

import (
	"fmt"
	"math"

	"tannery/ensembles/document"
)

// rateTolerance is how far the design rate in a file may be from that of the
// fractions before it is called stale: fractions may have been normalised by
// SumTolerance, and people shorten numbers to six digits.
const rateTolerance = 1e-5

func profileOf(doc *document.Document) (Profile, []string, error) {
	root := doc.Kind("profile", ProfileVersion)
	p := Profile{
		Title: root.Optional("title").String(),
		Ensemble: Ensemble{
			Lambda: distributionOf(root.Required("lambda"), 1),
			Rho:    distributionOf(root.Required("rho"), 2),
		},
	}
	warnRate(root.Optional("design_rate"), p.Ensemble)
	p.Results = resultsOf(root.Optional("results"))
	if v := root.Optional("provenance"); v.Present() {
		p.Provenance = provenanceOf(v.Mapping())
	}
	if v := root.Optional("realization"); v.Present() {
		r := realizationOf(v.Mapping())
		p.Realization = &r
	}
	if err := doc.Err(); err != nil {
		return Profile{}, nil, err
	}
	return p, doc.Warnings(), nil
}

// distributionOf returns nil if any problem was reported.
func distributionOf(v document.Value, least int) Distribution {
	var terms []Term
	faulty := false
	fraction := document.AtLeast(0)
	for _, entry := range v.ByDegree(least, MaxDegree, "degrees with their fractions of the edges, such as {2: 0.3, 3: 0.7}") {
		x := entry.Value.Float(fraction)
		faulty = faulty || entry.Value.Faulty()
		terms = append(terms, Term{entry.Key, x})
	}
	if faulty || len(terms) == 0 || v.Faulty() {
		return nil
	}
	excess := Excess(terms)
	if !(math.Abs(excess) <= SumTolerance) {
		v.Refuse(fmt.Sprintf("fractions that sum to %.9g", 1+excess), fmt.Sprintf("a sum of 1 within %g", SumTolerance))
		return nil
	}
	d, err := NewDistribution(terms...)
	if err != nil {
		v.Refuse(err.Error(), "a degree distribution")
		return nil
	}
	if math.Abs(excess) > roundingTolerance {
		v.Warn(fmt.Sprintf("the fractions sum to %.12g and were normalised to sum to 1", 1+excess))
	}
	return d
}

func warnRate(v document.Value, e Ensemble) {
	stated := v.Float(document.Finite)
	if !v.Present() || v.Faulty() || e.Lambda == nil || e.Rho == nil {
		return
	}
	if rate := e.DesignRate(); math.Abs(stated-rate) > rateTolerance {
		v.Warn(fmt.Sprintf("%v is not the design rate of lambda and rho, which is %.6f; results in this file may be out of date", stated, rate))
	}
}

func resultsOf(v document.Value) []Result {
	var results []Result
	for _, item := range v.List("a list of results") {
		m := item.Mapping()
		r := Result{
			Channel:     m.Required("channel").Word(),
			Parameter:   m.Required("parameter").Word(),
			Method:      m.Required("method").Word(),
			Threshold:   m.Required("threshold").Float(document.AtLeast(0)),
			Uncertainty: m.Required("uncertainty").Float(document.AtLeast(0)),
			Limit:       m.Required("limit").Float(document.AtLeast(0)),
		}
		gap := m.Required("gap").Mapping()
		r.Gap.Parameter = gap.Required("parameter").Float(document.Finite)
		if db := gap.Optional("db"); db.Present() {
			x := db.Float(document.Finite)
			r.Gap.DB = &x
		}
		r.Gap.Rate = gap.Required("rate").Float(document.Finite)
		results = append(results, r)
	}
	return results
}

func provenanceOf(m *document.Mapping) Provenance {
	p := Provenance{
		Program: m.Optional("program").String(),
		Created: m.Optional("created").Time(),
		Brief:   m.Optional("brief").Tree(),
	}
	if v := m.Optional("seed"); v.Present() {
		seed := v.Uint64()
		p.Seed = &seed
	}
	return p
}

// realizationOf reads the counts and reports every invariant that they
// break.
func realizationOf(m *document.Mapping) Realization {
	const what = "degrees with their numbers of nodes, such as {2: 400, 3: 600}"
	values := map[string]document.Value{}
	for _, key := range []string{"length", "checks", "edges", "variable_nodes", "check_nodes"} {
		values[key] = m.Required(key)
	}
	r := Realization{
		Length:        values["length"].Int(1, MaxLength),
		Checks:        values["checks"].Int(1, MaxLength),
		Edges:         values["edges"].Int(1, math.MaxInt),
		VariableNodes: countsOf(values["variable_nodes"], 1, what),
		CheckNodes:    countsOf(values["check_nodes"], 2, what),
	}
	rate := m.Optional("design_rate")
	stated := rate.Float(document.Finite)
	r.Results = resultsOf(m.Optional("results"))
	for _, v := range values {
		if !v.Present() || v.Faulty() {
			return r
		}
	}
	if r.VariableNodes == nil || r.CheckNodes == nil {
		return r
	}
	for _, f := range r.faults() {
		values[f.key].Refuse(f.found, f.allowed)
	}
	if exact := r.DesignRate(); rate.Present() && !rate.Faulty() && math.Abs(stated-exact) > roundingTolerance {
		rate.RefuseAsIs(fmt.Sprintf("%v, which is 1 - checks/length", exact))
	}
	return r
}

// countsOf returns nil if any problem was reported.
func countsOf(v document.Value, least int, what string) Counts {
	var counts Counts
	for _, entry := range v.ByDegree(least, MaxDegree, what) {
		n := entry.Value.Int(1, MaxLength)
		if entry.Value.Faulty() {
			return nil
		}
		counts = append(counts, Count{entry.Key, n})
	}
	counts.sort()
	return counts
}

package ensembles

import (
	"gopkg.in/yaml.v3"
	"tannery/ensembles/document"
)

// node lays the profile out for writing: YAML and JSON have the same keys in
// the same order.
func (p Profile) node() *yaml.Node {
	var b document.Build
	b.Text("kind", "profile").Int("version", ProfileVersion)
	if p.Title != "" {
		b.Text("title", p.Title)
	}
	b.Add("lambda", distributionNode(p.Ensemble.Lambda)).Add("rho", distributionNode(p.Ensemble.Rho))
	if len(p.Ensemble.Lambda) > 0 && len(p.Ensemble.Rho) > 0 {
		b.Float("design_rate", p.Ensemble.DesignRate())
	}
	if len(p.Results) > 0 {
		b.Add("results", resultsNode(p.Results))
	}
	if !p.Provenance.IsZero() {
		b.Add("provenance", provenanceNode(p.Provenance))
	}
	if p.Realization != nil {
		b.Add("realization", realizationNode(*p.Realization))
	}
	return b.Node()
}

func distributionNode(d Distribution) *yaml.Node {
	var b document.Build
	for _, t := range d {
		b.Entry(t.Degree, document.FloatNode(t.Fraction))
	}
	return b.Flow().Node()
}

func resultsNode(results []Result) *yaml.Node {
	items := make([]*yaml.Node, len(results))
	for i, r := range results {
		var gap, b document.Build
		gap.Float("parameter", r.Gap.Parameter)
		if r.Gap.DB != nil {
			gap.Float("db", *r.Gap.DB)
		}
		gap.Float("rate", r.Gap.Rate)
		b.Text("channel", r.Channel).Text("parameter", r.Parameter).Text("method", r.Method)
		b.Float("threshold", r.Threshold).Float("uncertainty", r.Uncertainty).Float("limit", r.Limit)
		items[i] = b.Add("gap", gap.Flow().Node()).Node()
	}
	return document.ListNode(items...)
}

func provenanceNode(p Provenance) *yaml.Node {
	var b document.Build
	if p.Program != "" {
		b.Text("program", p.Program)
	}
	if p.Seed != nil {
		b.Uint64("seed", *p.Seed)
	}
	if !p.Created.IsZero() {
		b.Time("created", p.Created.UTC())
	}
	if !p.Brief.IsZero() {
		b.Add("brief", p.Brief.Node())
	}
	return b.Node()
}

func realizationNode(r Realization) *yaml.Node {
	var b document.Build
	b.Int("length", r.Length).Int("checks", r.Checks).Int("edges", r.Edges)
	b.Add("variable_nodes", countsNode(r.VariableNodes)).Add("check_nodes", countsNode(r.CheckNodes))
	b.Float("design_rate", r.DesignRate())
	if len(r.Results) > 0 {
		b.Add("results", resultsNode(r.Results))
	}
	return b.Node()
}

func countsNode(counts Counts) *yaml.Node {
	var b document.Build
	for _, c := range counts {
		b.Entry(c.Degree, document.IntNode(c.Nodes))
	}
	return b.Flow().Node()
}

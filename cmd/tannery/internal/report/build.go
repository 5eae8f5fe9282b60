package report

import (
	"io"

	"tannery/ensembles"
)

// Build is the answer of the command build.
type Build struct {
	Schema        string            `json:"schema"`
	File          string            `json:"file,omitempty"`
	Construction  string            `json:"construction"`
	Seed          uint64            `json:"seed"`
	DegreeTwo     string            `json:"degree_two"`
	Profile       ensembles.Profile `json:"profile"`
	ProfileDigest string            `json:"profile_digest"`
	Graph         Graph             `json:"graph"`
	Warnings      []string          `json:"warnings"`
}

// WriteText writes the answer for people.
func (r *Build) WriteText(w io.Writer) error {
	var t Text
	t.Heading("Parity-check matrix for %d code bits", r.Graph.Length)
	r.Graph.rows(&t)
	t.Row("variable nodes", "%s", counts(r.Profile.Realization.VariableNodes))
	t.Row("check nodes", "%s", counts(r.Profile.Realization.CheckNodes))
	t.Row("", "exactly the node counts of the profile")
	t.Row("construction", "%s, degree 2 %s, seed %d", r.Construction, r.DegreeTwo, r.Seed)
	if r.File != "" && r.File != "-" {
		t.Row("written to", "%s", r.File)
	}
	_, err := t.WriteTo(w)
	return err
}

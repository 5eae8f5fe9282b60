package report

import (
	"io"

	"tannery/ensembles"
)

// MatrixProfile is the answer of the command profile: a matrix and its profile.
type MatrixProfile struct {
	Schema   string            `json:"schema"`
	File     string            `json:"file,omitempty"`
	Profile  ensembles.Profile `json:"profile"`
	Graph    Graph             `json:"graph"`
	Warnings []string          `json:"warnings"`
}

// WriteText writes the answer for people.
func (r *MatrixProfile) WriteText(w io.Writer) error {
	var t Text
	t.Heading("Parity-check matrix")
	r.Graph.rows(&t)
	t.Row("variable nodes", "%s", counts(r.Profile.Realization.VariableNodes))
	t.Row("check nodes", "%s", counts(r.Profile.Realization.CheckNodes))
	t.Heading("Profile, by edges")
	t.Row("λ", "%s", Degrees(r.Profile.Ensemble.Lambda))
	t.Row("ρ", "%s", Degrees(r.Profile.Ensemble.Rho))
	if r.File != "" && r.File != "-" {
		t.Row("written to", "%s", r.File)
	}
	_, err := t.WriteTo(w)
	return err
}

package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"unicode"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
	"tannery/de"
	"tannery/ensembles"
	"tannery/optimize"
)

// seriesRecord is a cell that is done, as the checkpoint keeps it.
type seriesRecord struct {
	Row     report.SeriesRow `json:"row"`
	Profile string           `json:"profile"` // YAML; empty where nothing was found
}

// row is what the row of a cell says before its search.
func (c seriesCell) row() report.SeriesRow {
	b := c.brief
	return report.SeriesRow{
		Name: c.name, Channel: b.Channel, Rate: b.Rate, MaxVariableDegree: largestDegree(b),
		MaxEdgesPerBit: b.EdgesPerBit, MaxIterations: b.Iterations, Symbol: b.Families[0].Symbol(),
	}
}

// withProfile adds to a row what was found.
func withProfile(row report.SeriesRow, p ensembles.Profile) report.SeriesRow {
	found := p.Results[0]
	row.Threshold, row.Uncertainty, row.Limit = found.Threshold, found.Uncertainty, found.Limit
	row.Gap = report.Gap{Parameter: found.Gap.Parameter, DB: found.Gap.DB, Rate: found.Gap.Rate}
	row.Method, row.EdgesPerBit, row.DistinctDegrees = found.Method, p.Ensemble.EdgesPerBit(), len(p.Ensemble.Lambda)
	row.Lambda, row.Rho = p.Ensemble.Lambda.String(), p.Ensemble.Rho.String()
	return row
}

// recordsIn reads the state of a series, and refuses what no series of these
// cells writes.
func recordsIn(state []byte, cells []seriesCell) ([]seriesRecord, error) {
	var records []seriesRecord
	decoder := json.NewDecoder(bytes.NewReader(state))
	decoder.DisallowUnknownFields()
	if err := decoder.Decode(&records); err != nil {
		return nil, err
	}
	if len(records) == 0 || len(records) > len(cells) {
		return nil, fmt.Errorf("%d searches of %d", len(records), len(cells))
	}
	for i, r := range records {
		if err := r.check(cells[i]); err != nil {
			return nil, fmt.Errorf("%s: %w", cells[i].name, err)
		}
	}
	return records, nil
}

// check returns an error unless the record may be that of the cell: its row is
// what follows from its profile, or says that there is none.
func (r seriesRecord) check(c seriesCell) error {
	want := c.row()
	want.Seconds, want.Status, want.Note = r.Row.Seconds, r.Row.Status, r.Row.Note
	switch {
	case !(r.Row.Seconds >= 0):
		return fmt.Errorf("%v seconds", r.Row.Seconds)
	case strings.ContainsFunc(r.Row.Note, unicode.IsControl):
		return errors.New("a note with control characters")
	case r.Profile == "" && r.Row.Status != unreachable, r.Profile != "" && !searchEnded(r.Row.Status):
		return fmt.Errorf("status %q", r.Row.Status)
	}
	if r.Profile != "" {
		p, err := c.profile(r.Profile)
		if err != nil {
			return err
		}
		want = withProfile(want, p)
	}
	a, failedA := json.Marshal(r.Row)
	b, failedB := json.Marshal(want)
	if failedA != nil || failedB != nil || !bytes.Equal(a, b) {
		return errors.New("a row that does not follow from its profile")
	}
	return nil
}

// searchEnded tells whether this is how a search ends of which a series keeps
// the profile.
func searchEnded(status string) bool {
	for _, s := range []optimize.Status{optimize.Settled, optimize.TimeLimit, optimize.EvaluationLimit} {
		if status == s.String() {
			return true
		}
	}
	return false
}

// resultSlack is how far, relative, the results of a profile may be from what
// follows from its threshold here: not all processors round alike.
const resultSlack = 1e-6

// profile reads a profile that a search of the cell may have found.
func (c seriesCell) profile(text string) (ensembles.Profile, error) {
	p, _, err := ensembles.DecodeProfile(c.name, []byte(text))
	if err != nil {
		return p, err
	}
	if again, err := p.Encode(); err != nil || string(again) != text {
		return p, errors.New("a profile as no search writes it")
	}
	if len(p.Results) != len(c.brief.Families) {
		return p, fmt.Errorf("%d results for %d channels", len(p.Results), len(c.brief.Families))
	}
	for i, f := range c.brief.Families {
		found := p.Results[i]
		best, worst := f.Range()
		if !(found.Threshold >= best && found.Threshold <= min(worst, found.Limit*(1+resultSlack))) || !slices.Contains(brief.Methods(), found.Method) {
			return p, errors.New("a result that no search has")
		}
		want, err := resultOf(p.Ensemble, f, de.Threshold{Value: found.Threshold, Uncertainty: found.Uncertainty, Method: de.Method(found.Method)})
		if err != nil {
			return p, err
		}
		near := func(a, b float64) bool { return math.Abs(a-b) <= resultSlack*(1+math.Abs(b)) }
		decibels := (found.Gap.DB == nil) == (want.Gap.DB == nil) && (found.Gap.DB == nil || near(*found.Gap.DB, *want.Gap.DB))
		if found.Channel != want.Channel || found.Parameter != want.Parameter || !near(found.Limit, want.Limit) || !near(p.Ensemble.DesignRate(), c.brief.Rate) ||
			!near(found.Gap.Parameter, want.Gap.Parameter) || !near(found.Gap.Rate, want.Gap.Rate) || !decibels {
			return p, errors.New("results that do not belong to the profile")
		}
	}
	return p, nil
}

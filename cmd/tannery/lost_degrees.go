package main

import (
	"fmt"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles"
)

// lostEdges is the fraction of the profile's edges from which on it is said
// that their degrees have no node. Less is the rounding of any profile with
// rare large degrees.
const lostEdges = 0.01

// lostDegrees warns of degrees of a profile that have no node among the counts
// although many of its edges are theirs: such a code is too short for it.
func lostDegrees(e ensembles.Ensemble, r ensembles.Realization) (warnings []string) {
	for _, side := range []struct {
		name   string
		terms  ensembles.Distribution
		counts ensembles.Counts
	}{{"variable", e.Lambda, r.VariableNodes}, {"check", e.Rho, r.CheckNodes}} {
		has := map[int]bool{}
		for _, c := range side.counts {
			has[c.Degree] = true
		}
		lost, largest := 0.0, 0
		for _, t := range side.terms {
			if !has[t.Degree] {
				lost += t.Fraction
				largest = max(largest, t.Degree)
			}
		}
		if lost >= lostEdges {
			warnings = append(warnings, fmt.Sprintf("%d code bits are too few for the profile: %s%% of its edges are of %s degrees up to %d that have no node",
				r.Length, report.Significant(100*lost, 2), side.name, largest))
		}
	}
	return warnings
}

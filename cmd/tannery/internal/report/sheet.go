package report

import (
	"fmt"

	"tannery/ensembles"
)

// SheetOf makes a sheet of node counts.
func SheetOf(r ensembles.Realization) Sheet {
	return Sheet{
		Length: r.Length, Checks: r.Checks, Edges: r.Edges, DesignRate: r.DesignRate(),
		VariableNodes: sheetCounts(r.VariableNodes), CheckNodes: sheetCounts(r.CheckNodes),
	}
}

func sheetCounts(c ensembles.Counts) []SheetCount {
	all := make([]SheetCount, len(c))
	for i, n := range c {
		all[i] = SheetCount{n.Degree, n.Nodes}
	}
	return all
}

// Edges returns the edges at the nodes.
func (c SheetCount) Edges() int { return c.Degree * c.Nodes }

// ThresholdText says how the integer profile does; empty if it was not
// measured.
func (s Sheet) ThresholdText() string {
	r := s.Result
	if r == nil {
		return ""
	}
	symbol := symbolOf(r.Channel, r.Parameter)
	text := symbol + " = " + WithUncertainty(r.Threshold, r.Uncertainty)
	if r.Gap.DB != nil {
		return text + fmt.Sprintf(", %s dB from the Shannon limit", Fixed(*r.Gap.DB, 4))
	}
	return text + fmt.Sprintf(", %s from the Shannon limit", Fixed(r.Gap.Parameter, DecimalsAt(r.Uncertainty, 4, 7)))
}

// LimitText says what the best code of the length can do; empty where that is
// not known.
func (s Sheet) LimitText() string {
	if s.FiniteLimit == nil || s.Result == nil {
		return ""
	}
	return fmt.Sprintf("%s = %s for any code at frame error rate %s (normal approximation)",
		symbolOf(s.Result.Channel, s.Result.Parameter), Fixed(*s.FiniteLimit, 5), Plain(s.FrameError))
}

// DistancePercent is the distance below the threshold for the caption.
func (c *Compare) DistancePercent() string { return Plain(100 * c.Distance) }

// InDB tells whether gaps can be given in dB.
func (c *Compare) InDB() bool {
	for _, r := range c.Rows {
		if r.Gap != nil && r.Gap.DB != nil {
			return true
		}
	}
	return false
}

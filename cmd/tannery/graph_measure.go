package main

import (
	"context"
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles/tanner"
)

// graphOptions are those of commands that measure a Tanner graph.
type graphOptions struct {
	rank       bool
	noProgress bool
}

// rankWork is the most work, in additions of words, that is done for the rank
// unasked: some ten seconds on two processors. It is the same on every machine,
// so that reports are too.
const rankWork = 8e9

func (o *graphOptions) add(cmd *cobra.Command) {
	cmd.Flags().BoolVar(&o.rank, "rank", false, "compute the rank even if that takes more than some ten seconds")
	cmd.Flags().BoolVar(&o.noProgress, "no-progress", false, "no progress on standard error")
}

// measure finds out about a graph what decides decoding and encoding.
func (o *graphOptions) measure(cmd *cobra.Command, g *tanner.Graph, shown *progress) (report.Graph, error) {
	ctx := cmd.Context()
	shown.update("counting cycles", 0, "", 0)
	cycles, err := g.ShortestCycles(ctx)
	if err != nil {
		return report.Graph{}, context.Cause(ctx)
	}
	shown.update("making a triangle", 0, "", 0)
	triangle := g.Triangulate()
	r := report.Graph{
		Length:     g.Variables(),
		Checks:     g.Checks(),
		Edges:      g.Edges(),
		DesignRate: 1 - float64(g.Checks())/float64(g.Variables()),
		Girth:      cycles.Girth,
		Cycles:     cycles.Total,
		CyclesMean: float64(cycles.Total) * float64(cycles.Girth) / 2 / float64(g.Variables()),
		CyclesMost: slices.Max(cycles.PerVariable),
		Gap:        triangle.Gap(),
		Digest:     g.Digest(),
	}
	if o.rank || triangle.RankWork() <= rankWork {
		shown.update("computing the rank", 0, "", 0)
		rank, err := triangle.Rank(ctx)
		if err != nil {
			return report.Graph{}, context.Cause(ctx)
		}
		rate := 1 - float64(rank)/float64(g.Variables())
		r.Rank, r.Rate = &rank, &rate
	}
	return r, nil
}

package main

import (
	"cmp"
	"fmt"
	"slices"
	"strconv"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
)

// tradeoffOptions are the options of tradeoff.
type tradeoffOptions struct {
	seriesOptions
	against nameOption
	at      listOption
}

func newTradeoff() *cobra.Command {
	o := &tradeoffOptions{
		seriesOptions: seriesOptions{searchOptions: newSearchOptions(), pictureOption: newPictureOption("edges")},
		against:       nameOption{names: []string{"edges", "iterations"}, value: "edges"},
	}
	cmd := &cobra.Command{
		Use:   "tradeoff [BRIEF] --at LIST [options]",
		Short: "the best threshold against edges per bit, or iterations",
		Example: `# what does a decoder with fewer edges lose?
tannery tradeoff --channel bec --rate 0.5 --at 2.8,3,3.2,3.4 --plot edges.svg
# and one that does fewer iterations?
tannery tradeoff --channel biawgn --rate 0.5 --variable-degrees 2,3,5 \
    --against iterations --at 10,20,40`,
		Long: `One search for each limit of --at: on the edges per code bit, which are the work
of one iteration, or on the number of iterations. A looser limit allows all that
a tighter one does, so where its own search ends lower, the row shows the
profile of the tighter limit and says so.

With --checkpoint FILE each search that is done is kept there, and the same
command continues behind it.

` + channelFileHelp,
		Args:              atMost(1, "one brief"),
		ValidArgsFunction: profileFiles,
		RunE:              func(cmd *cobra.Command, args []string) error { return runTradeoff(cmd, args, o) },
	}
	cmd.Flags().Var(&o.against, "against", "edges (per code bit) or iterations; edges if not given")
	complete(cmd, "against", o.against.names)
	cmd.Flags().Var(&o.at, "at", "the limits, with commas between them")
	o.add(cmd, "edges (thresholds against edges per code bit)")
	return cmd
}

func runTradeoff(cmd *cobra.Command, args []string, o *tradeoffOptions) error {
	if len(o.at) == 0 {
		return usagef("--at: missing; allowed: a list of limits, such as 2.8,3,3.2 edges per bit or 10,20,40 iterations")
	}
	// The other limit may be given, and holds for all searches.
	varied := "max-edges-per-bit"
	if o.against.value == "iterations" {
		varied = "max-iterations"
	}
	if err := o.check(cmd, args, varied); err != nil {
		return err
	}
	o.renamed = map[string]string{"--" + varied: "--at"}
	var cells []seriesCell
	for _, limit := range o.at {
		if err := o.vary(cmd, varied, limit, "at"); err != nil {
			return err
		}
		b, err := o.brief(cmd, args)
		if err != nil {
			return err
		}
		cells = append(cells, seriesCell{o.against.value + "-" + limit, b, nil})
	}
	bound := func(c seriesCell) float64 {
		if o.against.value == "iterations" {
			return float64(c.brief.Iterations)
		}
		return c.brief.EdgesPerBit
	}
	slices.SortStableFunc(cells, func(a, b seriesCell) int { return cmp.Compare(bound(a), bound(b)) })
	for i := 1; i < len(cells); i++ {
		if bound(cells[i]) == bound(cells[i-1]) {
			return usagef("--at: found %s twice; allowed: each limit once", strconv.FormatFloat(bound(cells[i]), 'g', -1, 64))
		}
	}
	plot, err := o.open(cmd)
	if err != nil {
		return err
	}
	records, err := o.search(cmd, "tradeoff", cells)
	if err != nil {
		return err
	}
	answer := &report.Series{Schema: "tannery/tradeoff/1", Against: o.against.value}
	for i, r := range records {
		row := r.Row
		if i > 0 {
			// An ensemble within a tighter limit is within this one too. With
			// more iterations it is no worse, but its threshold is then better
			// than the one known: a lower bound.
			if before := answer.Rows[i-1]; before.Threshold > row.Threshold {
				name := row.Name
				edges, iterations := row.MaxEdgesPerBit, row.MaxIterations
				row = before
				row.Name, row.MaxEdgesPerBit, row.MaxIterations = name, edges, iterations
				row.Note = fmt.Sprintf("the profile of %s, which its own search did not beat", before.Name)
			}
		}
		answer.Rows = append(answer.Rows, row)
	}
	return o.deliver(cmd, answer, plot, false)
}

package main

import (
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
	"tannery/ensembles/catalog"
	"tannery/ensembles/document"
)

type catalogOptions struct {
	rate    numberOption
	channel nameOption
	csv     bool
}

func newCatalog() *cobra.Command {
	o := &catalogOptions{
		rate:    numberOption{allow: document.Between(0, 1)},
		channel: nameOption{names: channel.Names()},
	}
	cmd := &cobra.Command{
		Use:   "catalog [NAME] [options]",
		Short: "published ensembles and the profiles of standards",
		Example: `# everything
tannery catalog
# what was published for the Gaussian channel at rate 1/2
tannery catalog --channel biawgn --rate 0.5
# one of them as a profile, with its source
tannery catalog rsu01-r50-d15
# a name stands for a profile wherever one is asked for
tannery threshold ru01-r50-d3 --channel bec`,
		Long: `Names say the source, the design rate in hundredths and the largest variable
degree: rsu01-r50-d15. Sources are papers, by the initials of their authors and
the year, and open standards, by their number. Each entry says whether its
figures were read in the source, recalled from it, or computed by a formula.

The profile of EN 302 307 has one bit of degree 1, with which errors never
vanish altogether; en302307-closed is the same with that bit joined to the
first check. Standards that puncture their highest degrees, or whose structure
matters more than their degrees, are left out: a pair of degree distributions
cannot describe them.`,
		Args: atMost(1, "one name"),
		ValidArgsFunction: func(_ *cobra.Command, args []string, _ string) ([]string, cobra.ShellCompDirective) {
			if len(args) > 0 {
				return nil, cobra.ShellCompDirectiveNoFileComp
			}
			return catalog.Names(), cobra.ShellCompDirectiveNoFileComp
		},
		RunE: func(cmd *cobra.Command, args []string) error { return runCatalog(cmd, args, o) },
	}
	cmd.Flags().Var(&o.rate, "rate", "only ensembles of this design rate, within 0.005")
	cmd.Flags().Var(&o.channel, "channel", "only ensembles with a published threshold on this channel")
	complete(cmd, "channel", o.channel.names)
	cmd.Flags().BoolVar(&o.csv, "csv", false, "the list as CSV, one line per threshold")
	return cmd
}

func runCatalog(cmd *cobra.Command, args []string, o *catalogOptions) error {
	if o.csv && asJSON(cmd) {
		return usagef("--csv and --json: only one of the two")
	}
	if len(args) == 1 {
		for _, option := range []string{"rate", "channel", "csv"} {
			if cmd.Flags().Changed(option) {
				return usagef("--%s: for the list only; allowed: it, or %s", option, args[0])
			}
		}
		entry, ok := catalog.Lookup(args[0])
		if !ok {
			return usagef("%s: not a name of the catalogue%s; tannery catalog lists them", args[0], nearestNames(args[0]))
		}
		return deliver(cmd, catalogProfile(entry))
	}
	entries := catalog.All()
	if o.rate.given {
		entries = catalog.AtRate(o.rate.value)
	}
	answer := &report.Catalog{Schema: "tannery/catalog/1", Entries: []report.CatalogEntry{}, Only: o.channel.value}
	for _, e := range entries {
		if o.channel.value != "" && !slices.ContainsFunc(e.Thresholds, func(t catalog.Threshold) bool { return t.Channel == o.channel.value }) {
			continue
		}
		answer.Entries = append(answer.Entries, catalogEntry(e))
	}
	if o.csv {
		return answer.WriteCSV(cmd.OutOrStdout())
	}
	return deliver(cmd, answer)
}

func catalogEntry(e catalog.Entry) report.CatalogEntry {
	entry := report.CatalogEntry{
		Name:          e.Name,
		Source:        e.Source,
		Variant:       e.Variant,
		Trust:         string(e.Trust),
		DesignRate:    e.Ensemble.DesignRate(),
		LargestDegree: e.Ensemble.Lambda.Max(),
		EdgesPerBit:   e.Ensemble.EdgesPerBit(),
		Published:     []report.PublishedThreshold{},
	}
	if e.Realization != nil {
		entry.Length = &e.Realization.Length
	}
	for _, t := range e.Thresholds {
		entry.Published = append(entry.Published, report.PublishedThreshold{
			Channel:    t.Channel,
			Decoder:    t.Decoder,
			Method:     t.Method,
			Threshold:  t.Value,
			Resolution: t.Resolution,
			Trust:      string(t.Trust),
			Plain:      t.Decoder == catalog.BeliefPropagation && t.Method == "",
		})
	}
	return entry
}

func catalogProfile(e catalog.Entry) *report.CatalogProfile {
	return &report.CatalogProfile{Schema: "tannery/catalog-entry/1", CatalogEntry: catalogEntry(e), Profile: entryProfile(e)}
}

package main

import (
	"errors"
	"fmt"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/cmd/tannery/internal/report"
)

// sweepOptions are the options of sweep.
type sweepOptions struct {
	seriesOptions
	rates, degrees, channelList listOption
}

func newSweep() *cobra.Command {
	o := &sweepOptions{seriesOptions: seriesOptions{searchOptions: newSearchOptions(), pictureOption: newPictureOption("gaps", "edges")}}
	cmd := &cobra.Command{
		Use:   "sweep [BRIEF] [options]",
		Short: "a table of searches over rates, largest degrees and channels",
		Example: `# proven best profiles of three rates with two largest degrees
tannery sweep --channels bec --rates 0.25,0.5,0.75 --max-variable-degrees 8,20
# on two channels, with the profiles, to be continued if it is interrupted
tannery sweep --channels biawgn,bsc --rates 0.5 --max-variable-degrees 4,5 \
    --profiles table --checkpoint table.state --csv
# how the gap falls with the largest degree
tannery sweep --channels bec --rates 0.5 --max-variable-degrees 4,8,16,32 \
    --plot gaps.svg`,
		Long: `One search for each channel, rate and largest variable degree; a brief and the
other options of search say what they have in common. A combination that no
ensemble meets is a row that says so.

With --checkpoint FILE each search that is done is kept there: the same command
continues behind it after an interruption, even after a crash, and ends in the
same table. A checkpoint of another sweep is refused. It is removed at the end.
The picture shows one channel and one rate: gaps against the largest degree, or
thresholds against edges per code bit.

` + channelFileHelp,
		Args:              atMost(1, "one brief"),
		ValidArgsFunction: profileFiles,
		RunE:              func(cmd *cobra.Command, args []string) error { return runSweep(cmd, args, o) },
	}
	cmd.Flags().Var(&o.channelList, "channels", "channels, with commas between them; that of the brief if not given")
	cmd.Flags().Var(&o.rates, "rates", "rates, with commas between them; that of the brief if not given")
	cmd.Flags().Var(&o.degrees, "max-variable-degrees", "largest variable degrees, with commas between them")
	o.add(cmd, "gaps (against the largest degree) or edges (thresholds against edges per code bit); gaps if not given", sweepVaried...)
	return cmd
}

// sweepVaried are the options of search that a sweep sets for each cell.
var sweepVaried = []string{"channel", "rate", "max-variable-degree"}

func runSweep(cmd *cobra.Command, args []string, o *sweepOptions) error {
	if err := o.check(cmd, args, sweepVaried...); err != nil {
		return err
	}
	cells, err := o.cells(cmd, args)
	if err != nil {
		return err
	}
	plot, err := o.open(cmd)
	if err != nil {
		return err
	}
	if plot != nil && (len(o.channelList) > 1 || len(o.rates) > 1) {
		return usagef("--plot: a picture shows one channel and one rate")
	}
	records, err := o.search(cmd, "sweep", cells)
	if err != nil {
		return err
	}
	answer := &report.Series{Schema: "tannery/sweep/1"}
	for _, r := range records {
		answer.Rows = append(answer.Rows, r.Row)
	}
	return o.deliver(cmd, answer, plot, o.picture.value == "gaps")
}

// deliver writes the picture, if one is asked for, and the answer.
func (o *seriesOptions) deliver(cmd *cobra.Command, answer *report.Series, plot *plotFile, gaps bool) error {
	if plot != nil {
		drawing, ok := answer.Picture(gaps)
		if !ok {
			return usagef("--plot: there is nothing to show: no search has found a profile")
		}
		if err := plot.write(drawing); err != nil {
			return err
		}
	}
	if o.csv {
		return answer.WriteCSV(cmd.OutOrStdout())
	}
	return deliver(cmd, answer)
}

// cells makes a brief for each combination, by setting the options of search.
func (o *sweepOptions) cells(cmd *cobra.Command, args []string) ([]seriesCell, error) {
	o.renamed = map[string]string{"--channel": "--channels", "--rate": "--rates", "--max-variable-degree": "--max-variable-degrees"}
	if err := exclusive(cmd, "max-variable-degrees", "variable-degrees"); err != nil {
		return nil, err
	}
	var cells []seriesCell
	for _, c := range o.channelList.orOnce() {
		for _, rate := range o.rates.orOnce() {
			for _, degree := range o.degrees.orOnce() {
				o.channels.values = nil
				for _, set := range [][3]string{{"channel", c, "channels"}, {"rate", rate, "rates"}, {"max-variable-degree", degree, "max-variable-degrees"}} {
					if set[1] == "" {
						continue
					}
					if err := o.vary(cmd, set[0], set[1], set[2]); err != nil {
						return nil, err
					}
				}
				b, err := o.brief(cmd, args)
				var beyond brief.Unreachable
				if err != nil && !errors.As(err, &beyond) {
					return nil, err
				}
				name := fmt.Sprintf("%s-r%s-d%d", strings.NewReplacer("/", "_", ".", "_").Replace(b.Channel), strconv.FormatFloat(b.Rate, 'g', 6, 64), largestDegree(b))
				cells = append(cells, seriesCell{name, b, err})
			}
		}
	}
	seen := map[string]bool{}
	for _, c := range cells {
		if seen[c.name] {
			return nil, usagef("%s: found twice; allowed: each channel, rate and degree once", c.name)
		}
		seen[c.name] = true
	}
	return cells, nil
}

// listOption is a list of words with commas between them.
type listOption []string

// Set reads the list.
func (o *listOption) Set(text string) error {
	for item := range strings.SplitSeq(text, ",") {
		if item = strings.TrimSpace(item); item == "" {
			return fmt.Errorf("a list with commas between its items")
		}
		*o = append(*o, item)
	}
	return nil
}

// Type names the value in help texts.
func (o *listOption) Type() string { return "LIST" }

// String returns what was given.
func (o *listOption) String() string { return strings.Join(*o, ",") }

// orOnce returns the items, or an empty one if there is none.
func (o listOption) orOnce() []string {
	if len(o) == 0 {
		return []string{""}
	}
	return o
}

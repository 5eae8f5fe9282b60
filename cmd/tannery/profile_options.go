package main

import (
	"fmt"
	"io"
	"slices"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles"
)

// profileOptions are the ways to give a profile: a file, standard input, a name
// of the catalogue, or its two distributions as text.
type profileOptions struct {
	lambda, rho distributionOption
}

func (o *profileOptions) add(cmd *cobra.Command) {
	cmd.Flags().Var(&o.lambda, "lambda", "variable degrees, edge perspective, as `2:0.3,3:0.7`, in place of a file")
	cmd.Flags().Var(&o.rho, "rho", "check degrees, edge perspective, as `6:1`")
}

// read returns the profile that the arguments or the options give, and the
// warnings of its reader.
func (o *profileOptions) read(cmd *cobra.Command, args []string) (ensembles.Profile, []string, error) {
	var none ensembles.Profile
	lambda, rho := cmd.Flags().Changed("lambda"), cmd.Flags().Changed("rho")
	switch {
	case len(args) == 0 && !lambda && !rho:
		return none, nil, usagef("profile: missing; allowed: a file, - for standard input, a name of the catalogue, or --lambda and --rho")
	case len(args) > 0 && (lambda || rho):
		return none, nil, usagef("%s: a profile from a file beside --lambda or --rho; allowed: one of the two", args[0])
	case lambda != rho:
		return none, nil, usagef("--lambda and --rho: a profile needs both")
	case lambda:
		e, err := ensembles.New(o.lambda.distribution, o.rho.distribution)
		if err != nil {
			return none, nil, usagef("--%w", err)
		}
		return ensembles.Profile{Ensemble: e}, nil, nil
	}
	return loadProfile(cmd, args[0])
}

// channelOf returns the name of the channel to use for a profile if none was
// asked for: that of its results, where they name exactly one.
func channelOf(p ensembles.Profile) string {
	var names []string
	for _, r := range p.Results {
		if !slices.Contains(names, r.Channel) {
			names = append(names, r.Channel)
		}
	}
	if len(names) != 1 {
		return ""
	}
	return names[0]
}

// warn prints warnings on standard error, unless the user wants it quiet.
func warn(cmd *cobra.Command, warnings []string) {
	if quiet(cmd) {
		return
	}
	for _, w := range warnings {
		printWarning(cmd.ErrOrStderr(), w)
	}
}

func printWarning(w io.Writer, text string) {
	fmt.Fprintf(w, "tannery: warning: %s\n", report.Visible(text))
}

// profileFiles completes the argument of a command that takes one brief.
func profileFiles(_ *cobra.Command, args []string, _ string) ([]string, cobra.ShellCompDirective) {
	if len(args) > 0 {
		return nil, cobra.ShellCompDirectiveNoFileComp
	}
	return []string{"yaml", "yml"}, cobra.ShellCompDirectiveFilterFileExt
}

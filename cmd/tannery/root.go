package main

import (
	"strconv"
	"strings"

	"github.com/spf13/cobra"
)

// Commands are listed in the order in which an engineer meets them.
func init() { cobra.EnableCommandSorting = false }

// newRoot assembles the command tree. Nothing is shared between two trees,
// so that tests may run side by side.
func newRoot() *cobra.Command {
	root := &cobra.Command{
		Use:   "tannery",
		Short: "degree profiles for Tanner graphs, close to the Shannon limit",
		Long: `An engineer has a channel, an information rate and a decoder with limits.
tannery finds what rate the channel allows (limit), the degree profile whose
decoding threshold lies closest to the Shannon limit under the decoder's limits
(search), how far any profile is from that limit and why (threshold, trace), how
it stands beside published ones (compare, catalog), and the same profile as
exact integer node counts for whoever constructs the parity-check matrix
(export). It constructs one itself (build), takes in those that exist (profile),
and measures whether they behave as predicted (simulate). One page tells
colleagues about it all (report).

Answers go to standard output, everything else to standard error. Exit codes:
0 done; 1 failed; 2 wrong usage or invalid input; 3 finished, but what was asked
for was not reached (the best found is still written); 130 and 143 after SIGINT
and SIGTERM; 141 when the reader of standard output went away.`,
		Example: `# which channel can carry rate 1/2 at all?
tannery limit --channel biawgn --rate 0.5
# the best profile for it, found by density evolution and linear programmes
tannery search --channel biawgn --rate 0.5 --max-variable-degree 15 \
    -o link.yaml
# exact node counts for 64800 code bits
tannery export link.yaml --length 64800 -o link-64800.yaml`,
		Version:       version,
		SilenceUsage:  true,
		SilenceErrors: true,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 {
				return nil
			}
			var names []string
			for _, c := range cmd.Commands() {
				if c.IsAvailableCommand() {
					names = append(names, c.Name())
				}
			}
			name := args[0]
			if strings.TrimSpace(name) != name || name == "" {
				name = strconv.Quote(name)
			}
			return usagef("%s: unknown command%s; tannery --help lists them", name, suggestion(args[0], names))
		},
		PersistentPreRunE: func(cmd *cobra.Command, args []string) error {
			if err := checkEpoch(); err != nil {
				return err
			}
			return refuseSameFile(cmd, args)
		},
		RunE: func(cmd *cobra.Command, _ []string) error {
			printWelcome(cmd)
			return nil
		},
	}
	root.SetVersionTemplate("tannery {{.Version}}\n")
	root.PersistentFlags().Bool("json", false, "answer with one JSON object")
	root.PersistentFlags().BoolP("quiet", "q", false, "nothing on standard error but errors")
	root.SetHelpFunc(printHelp)
	root.SetFlagErrorFunc(func(cmd *cobra.Command, err error) error { return flagError(cmd.Flags(), err) })
	root.SetHelpCommand(&cobra.Command{Use: "help [COMMAND]", Hidden: true, RunE: helpOf})
	root.AddCommand(commands()...)
	root.InitDefaultCompletionCmd()
	root.InitDefaultVersionFlag()
	root.Flags().Lookup("version").Usage = "the version"
	for _, c := range append(root.Commands(), root) {
		if c.Name() == "completion" {
			dressCompletion(c)
		}
		c.DisableFlagsInUseLine = true
		c.InitDefaultHelpFlag()
		c.Flags().Lookup("help").Usage = "this text"
	}
	return root
}

// dressCompletion gives the command of the library our manners.
func dressCompletion(c *cobra.Command) {
	c.Short = "completion of commands, options and names for your shell"
	var shells []string
	for _, shell := range c.Commands() {
		shells = append(shells, shell.Name())
		shell.Args = atMost(0, "options only")
	}
	c.Args = func(_ *cobra.Command, args []string) error {
		if len(args) > 0 {
			return usagef("completion: found %q; allowed: %s%s", args[0], listOf(shells), suggestion(args[0], shells))
		}
		return nil
	}
	c.RunE = func(c *cobra.Command, _ []string) error { return c.Help() }
}

// helpOf prints the help of the command named by args.
func helpOf(cmd *cobra.Command, args []string) error {
	target, rest, err := cmd.Root().Find(args)
	switch {
	case err != nil || target == cmd.Root() && len(rest) > 0:
		return cmd.Root().Args(cmd.Root(), args)
	case len(rest) > 0:
		return usagef("%q: unexpected; help takes one command", rest[0])
	}
	target.InitDefaultHelpFlag()
	printHelp(target, nil)
	return nil
}

// quiet tells whether the user wants nothing but errors on standard error.
func quiet(cmd *cobra.Command) bool {
	q, _ := cmd.Flags().GetBool("quiet")
	return q
}

// asJSON tells whether the answer is to be one JSON object.
func asJSON(cmd *cobra.Command) bool {
	j, _ := cmd.Flags().GetBool("json")
	return j
}

// atMost returns an argument check with an error of our own kind: at most n
// positional arguments, which are called what.
func atMost(n int, what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) > n {
			return usagef("%q: unexpected; %s takes %s", args[n], cmd.Name(), what)
		}
		return nil
	}
}

// exactly is atMost for arguments that must be there.
func exactly(n int, what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) < n {
			return usagef("%s: missing; tannery %s --help shows how it is used", what, cmd.Name())
		}
		return atMost(n, what)(cmd, args)
	}
}

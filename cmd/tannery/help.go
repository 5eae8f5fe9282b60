package main

import (
	"fmt"
	"strings"
	"unicode/utf8"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"tannery/cmd/tannery/internal/report"
)

// printHelp writes the help of a command: what it is, worked examples, how it
// works, and only then the list of options.
func printHelp(cmd *cobra.Command, _ []string) {
	var b strings.Builder
	for _, line := range report.Wrap(cmd.CommandPath()+": "+cmd.Short, report.Width) {
		fmt.Fprintln(&b, line)
	}
	if cmd.Example != "" {
		b.WriteString("\nExamples\n")
		for _, line := range strings.Split(cmd.Example, "\n") {
			fmt.Fprintf(&b, "  %s\n", line)
		}
	}
	if cmd.Long != "" {
		for paragraph := range strings.SplitSeq(cmd.Long, "\n\n") {
			fmt.Fprintf(&b, "\n%s\n", strings.Join(report.Wrap(paragraph, report.Width), "\n"))
		}
	}
	if cmd.HasAvailableSubCommands() {
		b.WriteString("\nCommands\n")
		for _, c := range cmd.Commands() {
			if c.IsAvailableCommand() {
				entry(&b, c.Name(), c.Short, 14)
			}
		}
	}
	options(&b, "Options", cmd.LocalFlags())
	options(&b, "Options of every command", cmd.InheritedFlags())
	if cmd.HasParent() {
		fmt.Fprintf(&b, "\nForm\n  %s\n", cmd.UseLine())
	} else {
		b.WriteString("\nForm\n  tannery COMMAND [options]; tannery COMMAND --help tells more.\n")
	}
	fmt.Fprint(cmd.OutOrStdout(), b.String())
}

// optionWidth is the column at which the description of an option begins.
const optionWidth = 30

func options(b *strings.Builder, heading string, flags *pflag.FlagSet) {
	if !flags.HasAvailableFlags() {
		return
	}
	fmt.Fprintf(b, "\n%s\n", heading)
	flags.VisitAll(func(f *pflag.Flag) {
		if f.Hidden {
			return
		}
		name := "--" + f.Name
		if f.Shorthand != "" {
			name = "-" + f.Shorthand + ", " + name
		}
		kind, usage := pflag.UnquoteUsage(f)
		if f.Value.Type() != "bool" {
			if kind == "value" || kind == "string" {
				kind = f.Value.Type()
			}
			name += " " + kind
		}
		entry(b, name, usage, optionWidth)
	})
}

// entry writes a name and its description, wrapped, from a fixed column.
func entry(b *strings.Builder, name, description string, column int) {
	const margin = 2
	lines := report.Wrap(description, report.Width-column)
	gap := column - margin - utf8.RuneCountInString(name)
	if gap < 2 {
		fmt.Fprintf(b, "  %s\n", name)
	} else {
		fmt.Fprintf(b, "  %s%s%s\n", name, strings.Repeat(" ", gap), lines[0])
		lines = lines[1:]
	}
	for _, line := range lines {
		fmt.Fprintf(b, "%s%s\n", strings.Repeat(" ", column), line)
	}
}

package main

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
)

// printWelcome is what the program says when it is called without a command:
// what it does, three commands that work, and where to go from there.
func printWelcome(root *cobra.Command) {
	var b strings.Builder
	paragraph := func(text string) {
		fmt.Fprintln(&b, strings.Join(report.Wrap(text, report.Width), "\n"))
	}
	paragraph(root.Name() + ": " + root.Short)
	b.WriteByte('\n')
	what, _, _ := strings.Cut(root.Long, "\n\n")
	paragraph(what)
	b.WriteString("\nThree commands to begin with\n")
	for line := range strings.SplitSeq(root.Example, "\n") {
		fmt.Fprintf(&b, "  %s\n", line)
	}
	b.WriteString("\nAll commands\n")
	for _, c := range root.Commands() {
		if c.IsAvailableCommand() {
			entry(&b, c.Name(), c.Short, 14)
		}
	}
	b.WriteByte('\n')
	paragraph("tannery COMMAND --help begins with worked examples; tannery --help has the rest.")
	fmt.Fprint(root.OutOrStdout(), b.String())
}

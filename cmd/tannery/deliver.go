package main

import (
	"io"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
)

// answer is a recorded result: its JSON is the value itself, its text is
// what it writes.
type answer interface {
	WriteText(w io.Writer) error
}

// deliver writes the answer to standard output, as JSON if asked for.
func deliver(cmd *cobra.Command, a answer) error {
	return deliverTo(cmd, cmd.OutOrStdout(), a)
}

func deliverTo(cmd *cobra.Command, w io.Writer, a answer) error {
	if asJSON(cmd) {
		return report.WriteJSON(w, a)
	}
	return a.WriteText(w)
}

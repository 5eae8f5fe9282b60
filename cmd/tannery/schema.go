package main

import (
	"github.com/spf13/cobra"

	"tannery/ensembles/schema"
)

// schemas are the files whose form can be printed.
var schemas = map[string]func() []byte{"profile": schema.Profile, "brief": schema.Brief}

func newSchema() *cobra.Command {
	names := []string{"profile", "brief"}
	return &cobra.Command{
		Use:   "schema profile|brief",
		Short: "the form of a file as JSON Schema (draft-07)",
		Example: `# let an editor check profiles while they are written
tannery schema profile > profile.schema.json
# then, as the first line of the profile:
#   # yaml-language-server: $schema=profile.schema.json`,
		Long: `The schema says what keys and values a file may have. Relations between them,
such as that fractions sum to 1, are checked when the file is read.`,
		Args:      atMost(1, "one name"),
		ValidArgs: names,
		RunE: func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 {
				return usagef("schema: missing; allowed: %s", listOf(names))
			}
			text, ok := schemas[args[0]]
			if !ok {
				return usagef("schema: found %q; allowed: %s%s", args[0], listOf(names), suggestion(args[0], names))
			}
			_, err := cmd.OutOrStdout().Write(text())
			return err
		},
	}
}

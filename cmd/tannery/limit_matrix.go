package main

import "github.com/spf13/cobra"

func runMatrix(cmd *cobra.Command, o *limitOptions) error {
	return usagef("--matrix: not yet")
}

package main

import "github.com/spf13/cobra"

// commands lists every command, in the order in which an engineer meets them.
func commands() []*cobra.Command {
	return []*cobra.Command{newLimit(), newThreshold(), newTrace(), newSearch(), newSweep(), newTradeoff(), newCompare(), newExport(), newBuild(), newProfile(), newSimulate(), newReport(), newCatalog(), newSchema(), newMan()}
}

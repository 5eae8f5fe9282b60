package main

import (
	"os"
	"strconv"
	"time"

	"github.com/spf13/cobra"

	"tannery/ensembles"
)

// program is what wrote a profile, for its provenance.
const program = "tannery " + version

// now is the time written into profiles, in whole seconds. The environment
// variable SOURCE_DATE_EPOCH (reproducible-builds.org) fixes it, so that the
// same work gives the same file.
func now() time.Time {
	if seconds, err := strconv.ParseInt(os.Getenv("SOURCE_DATE_EPOCH"), 10, 64); err == nil {
		return time.Unix(seconds, 0).UTC()
	}
	return time.Now().UTC().Truncate(time.Second)
}

// profileOutput sends a profile and the report about it their ways: the
// profile to a file and the report to standard output, or the profile to
// standard output and the report to standard error.
type profileOutput struct {
	cmd  *cobra.Command
	file *outputFile // nil unless a file was asked for
	path string      // "" for none, "-" for standard output
}

// openProfileOutput finds out whether the output can be written.
func openProfileOutput(cmd *cobra.Command, path string) (*profileOutput, error) {
	out := &profileOutput{cmd: cmd, path: path}
	if path == "-" || !cmd.Flags().Changed("output") {
		return out, nil
	}
	var err error
	out.file, err = openOutput("--output", path)
	return out, err
}

// deliver writes the profile first, so that a reader of the report who goes
// away costs nothing.
func (o *profileOutput) deliver(p ensembles.Profile, a answer) error {
	content, err := p.Encode()
	if err != nil {
		return err
	}
	reports := o.cmd.OutOrStdout()
	switch {
	case o.file != nil:
		if err := o.file.write(content); err != nil {
			return err
		}
	case o.path == "-":
		if _, err := o.cmd.OutOrStdout().Write(content); err != nil {
			return err
		}
		if quiet(o.cmd) {
			return nil
		}
		reports = o.cmd.ErrOrStderr()
	}
	return deliverTo(o.cmd, reports, a)
}

package main

import (
	"io"
	"os"
	"strconv"
	"time"

	"github.com/spf13/cobra"

	"tannery/ensembles"
)

// program is what wrote a profile, for its provenance.
const program = "tannery " + version

// epochVariable is the variable of the environment that fixes the time written
// into profiles (reproducible-builds.org), so that the same work gives the same
// file.
const epochVariable = "SOURCE_DATE_EPOCH"

// lastEpoch is the last second that profiles can hold, that of the year 9999.
const lastEpoch = 253402300799

// checkEpoch refuses a value of epochVariable that is no time, as its
// specification wants.
func checkEpoch() error {
	text, set := os.LookupEnv(epochVariable)
	if seconds, err := strconv.ParseInt(text, 10, 64); set && text != "" && (err != nil || seconds < 0 || seconds > lastEpoch) {
		return usagef("%s: found %q; allowed: a whole number of seconds from 0 to %d", epochVariable, text, int64(lastEpoch))
	}
	return nil
}

// now is the time written into profiles, in whole seconds.
func now() time.Time {
	if seconds, err := strconv.ParseInt(os.Getenv(epochVariable), 10, 64); err == nil {
		return time.Unix(seconds, 0).UTC()
	}
	return time.Now().UTC().Truncate(time.Second)
}

// productOutput sends what a command makes, a profile or a matrix, and the
// report about it their ways: the product to a file and the report to standard
// output, or the product to standard output and the report to standard error.
type productOutput struct {
	cmd  *cobra.Command
	file *outputFile // nil unless a file was asked for
	path string      // "" for none, "-" for standard output
}

// openProductOutput finds out whether the output can be written.
func openProductOutput(cmd *cobra.Command, path string) (*productOutput, error) {
	out := &productOutput{cmd: cmd, path: path}
	if path == "-" || !cmd.Flags().Changed("output") {
		return out, nil
	}
	var err error
	out.file, err = openOutput("--output", path)
	return out, err
}

// deliverProfile delivers a profile as YAML.
func (o *productOutput) deliverProfile(p ensembles.Profile, a answer) error {
	content, err := p.Encode()
	if err != nil {
		return err
	}
	return o.deliver(func(w io.Writer) error {
		_, err := w.Write(content)
		return err
	}, a)
}

// deliver writes the product first, so that a reader of the report who goes
// away costs nothing.
func (o *productOutput) deliver(write func(io.Writer) error, a answer) error {
	reports := o.cmd.OutOrStdout()
	switch {
	case o.file != nil:
		if err := o.file.stream(write); err != nil {
			return err
		}
	case o.path == "-":
		if err := write(o.cmd.OutOrStdout()); err != nil {
			return err
		}
		if quiet(o.cmd) {
			return nil
		}
		reports = o.cmd.ErrOrStderr()
	}
	return deliverTo(o.cmd, reports, a)
}

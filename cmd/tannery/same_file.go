package main

import (
	"os"
	"path/filepath"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"
)

// fileOptionsWritten and fileOptionsRead name files; arguments are read too.
var (
	fileOptionsWritten = []string{"output", "plot", "checkpoint"}
	fileOptionsRead    = []string{"simulation", "matrix"}
)

// refuseSameFile refuses a command line on which writing a file would destroy
// another one that it names: one that is read, or is written for something
// else. A profile may be replaced by the same with node counts.
func refuseSameFile(cmd *cobra.Command, args []string) error {
	var outputs []*pflag.Flag
	for _, name := range fileOptionsWritten {
		f := cmd.Flags().Lookup(name)
		if f == nil || !f.Changed {
			continue
		}
		for _, other := range outputs {
			if sameFile(f.Value.String(), other.Value.String()) {
				return usagef("--%s and --%s: found the same file, %s; allowed: two", f.Name, other.Name, f.Value)
			}
		}
		outputs = append(outputs, f)
	}
	if cmd.Name() == "export" {
		return nil
	}
	for _, name := range fileOptionsRead {
		if f := cmd.Flags().Lookup(name); f != nil && f.Changed {
			if list, ok := f.Value.(pflag.SliceValue); ok {
				args = append(args, list.GetSlice()...)
			} else {
				args = append(args, f.Value.String())
			}
		}
	}
	for _, input := range args {
		if _, err := os.Stat(input); err != nil {
			continue // a name of the catalogue, or a mistake that is told later
		}
		for _, f := range outputs {
			if sameFile(f.Value.String(), input) {
				return usagef("--%s: found %s, which is read; allowed: another file", f.Name, f.Value)
			}
		}
	}
	return nil
}

// sameFile tells whether two paths lead to the same regular file, or would if
// there were one.
func sameFile(a, b string) bool {
	if a == "" || a == "-" || b == "" || b == "-" {
		return false
	}
	one, err := os.Stat(a)
	if err != nil {
		return filepath.Clean(a) == filepath.Clean(b)
	}
	other, err := os.Stat(b)
	return err == nil && one.Mode().IsRegular() && os.SameFile(one, other)
}

package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles"
	"tannery/ensembles/tanner"
)

type matrixProfileOptions struct {
	graphOptions
	output string
}

func newProfile() *cobra.Command {
	o := &matrixProfileOptions{}
	cmd := &cobra.Command{
		Use:   "profile MATRIX [options]",
		Short: "the profile, girth, rank and encoding gap of a matrix that exists",
		Example: `# what is this matrix?
tannery profile buoys.mtx
# its threshold
tannery profile buoys.mtx -o - --quiet | tannery threshold - --channel biawgn
# its profile as a file, with exact node counts
tannery profile buoys.mtx -o buoys-found.yaml`,
		Long: `MATRIX is a parity-check matrix as a Matrix Market coordinate pattern, from
whichever program: rows are check nodes and columns code bits. Every row and
every column must have an entry, and none may be repeated. Coordinate files of
integers or reals will do if all entries are 1, and so will symmetric ones.

The rank over GF(2), and with it the true rate, is left out where it would take
more than some ten seconds, unless --rank asks for it.

With -o FILE the profile, which has the exact node counts, goes to that file;
with -o - to standard output, and the report to standard error.`,
		Args:              exactly(1, "one matrix"),
		ValidArgsFunction: matrixFiles,
		RunE:              func(cmd *cobra.Command, args []string) error { return runProfile(cmd, args[0], o) },
	}
	cmd.Flags().StringVarP(&o.output, "output", "o", "", "`FILE` for the profile, or - for standard output")
	o.add(cmd)
	return cmd
}

func runProfile(cmd *cobra.Command, path string, o *matrixProfileOptions) error {
	g, label, err := readMatrix(cmd, path)
	if err != nil {
		return err
	}
	p, err := profileOf(g, label, path)
	if err != nil {
		return err
	}
	out, err := openProductOutput(cmd, o.output)
	if err != nil {
		return err
	}
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd), 0)
	defer shown.finish()
	answer := &report.MatrixProfile{Schema: "tannery/profile/1", File: o.output, Profile: p, Warnings: []string{}}
	if answer.Graph, err = o.measure(cmd, g, shown); err != nil {
		return err
	}
	shown.finish()
	return out.deliverProfile(p, answer)
}

// profileOf returns the profile of a graph.
func profileOf(g *tanner.Graph, label tanner.Label, path string) (ensembles.Profile, error) {
	r, err := g.Realization()
	if err != nil {
		return ensembles.Profile{}, usagef("%s: %w", inputName(path), err)
	}
	p := ensembles.Profile{Title: label.Title, Ensemble: r.Ensemble(), Realization: &r}
	p.Provenance.Program, p.Provenance.Created = program, now()
	return p, nil
}

// readMatrix reads a parity-check matrix from a file, or from standard input
// for "-". It may be far larger than other inputs.
func readMatrix(cmd *cobra.Command, path string) (*tanner.Graph, tanner.Label, error) {
	name, source := inputName(path), cmd.InOrStdin()
	if path != "-" {
		f, err := os.Open(path)
		if err != nil {
			return nil, tanner.Label{}, invalid(inputError(path, err))
		}
		defer f.Close()
		source = f
	}
	type outcome struct {
		graph *tanner.Graph
		label tanner.Label
		err   error
	}
	// A terminal or a pipe may never say anything.
	done := make(chan outcome, 1)
	go func() {
		g, label, err := tanner.ReadMatrix(name, untilDone{cmd.Context(), source})
		done <- outcome{g, label, err}
	}()
	select {
	case o := <-done:
		if cmd.Context().Err() != nil {
			return nil, o.label, context.Cause(cmd.Context())
		}
		var pathError *fs.PathError
		if errors.As(o.err, &pathError) {
			return nil, o.label, invalid(inputError(name, o.err))
		}
		if o.err != nil {
			return nil, o.label, invalid(o.err)
		}
		return o.graph, o.label, nil
	case <-cmd.Context().Done():
		return nil, tanner.Label{}, context.Cause(cmd.Context())
	}
}

// untilDone reads until the context ends.
type untilDone struct {
	ctx context.Context
	r   io.Reader
}

func (u untilDone) Read(p []byte) (int, error) {
	if err := u.ctx.Err(); err != nil {
		return 0, fmt.Errorf("reading was ended: %w", err)
	}
	return u.r.Read(p)
}

// matrixFiles completes the argument of a command that takes one matrix.
func matrixFiles(_ *cobra.Command, args []string, _ string) ([]string, cobra.ShellCompDirective) {
	if len(args) > 0 {
		return nil, cobra.ShellCompDirectiveNoFileComp
	}
	return []string{"mtx"}, cobra.ShellCompDirectiveFilterFileExt
}

package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"strconv"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles"
	"tannery/ensembles/tanner"
)

type buildOptions struct {
	profileOptions
	graphOptions
	length       integerOption
	construction nameOption
	girth        integerOption
	seed         seedOption
	degreeTwo    nameOption
	output       string
}

func newBuild() *cobra.Command {
	o := &buildOptions{
		length:       integerOption{low: 2, high: ensembles.MaxLength},
		construction: nameOption{names: []string{string(tanner.Growth), string(tanner.Randomized)}},
		girth:        integerOption{low: 4, high: 12},
		degreeTwo:    nameOption{names: []string{string(tanner.Forest), string(tanner.Chain), string(tanner.Free)}, value: string(tanner.Forest)},
	}
	cmd := &cobra.Command{
		Use:   "build PROFILE [options]",
		Short: "a parity-check matrix with exactly a profile's node counts",
		Example: `# counts by export, then the matrix
tannery export harbour.yaml --length 2048 -o harbour-2048.yaml
tannery build harbour-2048.yaml -o harbour-2048.mtx
# in one step, with the degree-2 columns as a dual diagonal for encoding
tannery build harbour.yaml --length 2048 --degree-two chain \
    -o harbour-2048.mtx
# to another program, without a file
tannery build --lambda 3:1 --rho 6:1 --length 500 -o - | use-matrix`,
		Long: `The profile needs its node counts, which export adds to it; with --length they are
chosen here as export does. The matrix has exactly these counts, and no two nodes
are joined twice.

Up to ` + strconv.Itoa(tanner.PracticalGrowth) + ` columns the graph is constructed by progressive edge growth (Hu,
Eleftheriou & Arnold, 2005): each edge goes to the check node that is farthest
away. Longer ones are joined at random. Either way edges are then exchanged until
cycles shorter than --girth are gone, as far as that is possible with bounded
effort; the girth reached is reported. The same seed gives the same matrix.

Cycles of variable nodes of degree 2 alone are codewords of low weight. By default
these nodes form a forest, without such cycles. --degree-two chain makes them a
dual diagonal, the last columns, from which parity bits follow one by one. Both
cost some thousandths of the threshold where such nodes are nearly as many as
check nodes; free follows the profile to the letter, with an error floor.

The report tells the girth and the number of shortest cycles through a variable
node, the rank over GF(2) with the true rate, and the gap of an approximate lower
triangular form, which decides what encoding costs (Richardson & Urbanke, 2001).
The time for the rank grows with the third power of that gap; where it would be
more than some ten seconds, as beyond two million columns with three ones each, the
rank is left out unless --rank asks for it.

The file is a Matrix Market coordinate pattern: rows are check nodes, columns
code bits; comments carry the title, the SHA-256 of the profile, and the seed.
With -o - it goes to standard output and the report to standard error.`,
		Args:              atMost(1, "one profile"),
		ValidArgsFunction: profileArguments(1),
		RunE:              func(cmd *cobra.Command, args []string) error { return runBuild(cmd, args, o) },
	}
	o.profileOptions.add(cmd)
	f := cmd.Flags()
	f.Var(&o.length, "length", "code bits, which are variable nodes; by default those of the profile's counts")
	f.Var(&o.construction, "construction", "growth or randomized; by the length if not given")
	complete(cmd, "construction", o.construction.names)
	f.Var(&o.girth, "girth", "even length of cycle to aim at: shorter ones are removed where possible; "+strconv.Itoa(tanner.DefaultGirth)+" if not given")
	f.Var(&o.degreeTwo, "degree-two", "variable nodes of degree 2 as a forest, as a chain (dual diagonal), or free; forest if not given")
	complete(cmd, "degree-two", o.degreeTwo.names)
	f.Var(&o.seed, "seed", "seed of the construction: the same seed gives the same matrix")
	f.StringVarP(&o.output, "output", "o", "", "`FILE` for the matrix, or - for standard output")
	o.graphOptions.add(cmd)
	return cmd
}

func runBuild(cmd *cobra.Command, args []string, o *buildOptions) error {
	if o.output == "" {
		return usagef("--output: missing; allowed: a file for the matrix, or - for standard output")
	}
	if o.girth.value%2 != 0 {
		return usagef("--girth: found %d; allowed: an even number from %d to %d", o.girth.value, o.girth.low, o.girth.high)
	}
	p, warnings, err := o.read(cmd, args)
	if err != nil {
		return err
	}
	warn(cmd, warnings)
	if err := o.realize(cmd.Context(), &p); err != nil {
		return err
	}
	if lost := lostDegrees(p.Ensemble, *p.Realization); len(lost) > 0 {
		warn(cmd, lost)
		warnings = append(warnings, lost...)
	}
	twos := nodesOfDegreeTwo(*p.Realization)
	if most := p.Realization.Checks - 1; o.degreeTwo.value == string(tanner.Chain) && twos > most {
		return usagef("--degree-two: found chain, and %d variable nodes of degree 2; allowed: a chain of at most %d, one less than the check nodes, or forest or free", twos, most)
	}
	if available, known := availableMemory(); known && p.Realization.Edges <= tanner.MaxEdges {
		if err := fits(*p.Realization, available); err != nil {
			return err
		}
	}
	out, err := openProductOutput(cmd, o.output)
	if err != nil {
		return err
	}
	digest, err := digestOf(p)
	if err != nil {
		return err
	}
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd), 0)
	defer shown.finish()
	method := tanner.Method(o.construction.value)
	if method == "" {
		method = tanner.MethodFor(p.Realization.Length)
	}
	g, err := tanner.Build(cmd.Context(), *p.Realization, tanner.Settings{
		Method:    method,
		Seed:      o.seed.value,
		DegreeTwo: tanner.DegreeTwo(o.degreeTwo.value),
		Girth:     o.girth.value,
		Progress: func(done, total int) {
			shown.update("placing edges", float64(done)/float64(total), "", 0)
		},
	})
	switch {
	case cmd.Context().Err() != nil:
		return context.Cause(cmd.Context())
	case err != nil:
		return usagef("%s: %w", profileName(args), err)
	}
	if err := g.Verify(*p.Realization); err != nil {
		return err
	}
	answer := &report.Build{
		Schema:        "tannery/build/1",
		File:          o.output,
		Construction:  string(method),
		Seed:          o.seed.value,
		DegreeTwo:     o.degreeTwo.value,
		Profile:       p,
		ProfileDigest: digest,
		Warnings:      append([]string{}, warnings...),
	}
	if closing := g.DegreeTwoCycles(); closing > 0 && o.degreeTwo.value == string(tanner.Forest) {
		answer.Warnings = append(answer.Warnings, fmt.Sprintf("no forest: %d of the %d variable nodes of degree 2 close cycles among themselves, which are codewords; up to %d, one less than the check nodes, can do without", closing, twos, p.Realization.Checks-1))
		warn(cmd, answer.Warnings[len(warnings):])
	}
	if answer.Graph, err = o.measure(cmd, g, shown); err != nil {
		return err
	}
	shown.finish()
	label := tanner.Label{Title: p.Title, Profile: digest, Seed: strconv.FormatUint(o.seed.value, 10)}
	return out.deliver(func(w io.Writer) error { return tanner.WriteMatrix(w, g, label) }, answer)
}

func nodesOfDegreeTwo(r ensembles.Realization) int {
	for _, c := range r.VariableNodes {
		if c.Degree == 2 {
			return c.Nodes
		}
	}
	return 0
}

// realize chooses the node counts if a length is asked for; else the profile
// must have them.
func (o *buildOptions) realize(ctx context.Context, p *ensembles.Profile) error {
	if !o.length.given {
		if p.Realization == nil {
			return usagef("--length: missing; allowed: a whole number from %d to %d, or a profile with node counts, as export writes it", o.length.low, o.length.high)
		}
		return nil
	}
	meters, _ := resultMeters(*p)
	r, err := ensembles.Realize(p.Ensemble, o.length.value, score(ctx, meters))
	if err != nil {
		return usagef("--length: %w", err)
	}
	p.Realization = &r
	return context.Cause(ctx)
}

// digestOf returns the SHA-256 of the profile as its file is written.
func digestOf(p ensembles.Profile) (string, error) {
	content, err := p.Encode()
	if err != nil {
		return "", err
	}
	sum := sha256.Sum256(content)
	return fmt.Sprintf("sha256:%s", hex.EncodeToString(sum[:])), nil
}

package main

import (
	"bytes"
	"context"
	"fmt"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
)

// runMatrix answers limit for a channel given as a transition matrix, with a
// link over it if one is asked about.
func runMatrix(cmd *cobra.Command, o *limitOptions) error {
	content, name, err := readInput(cmd.Context(), o.matrix, cmd.InOrStdin())
	if err != nil {
		return err
	}
	c, warnings, err := channel.ReadDMC(name, bytes.NewReader(content))
	if err != nil {
		return invalid(err)
	}
	warn(cmd, warnings)
	found := c.Capacity(cmd.Context())
	if found.Status == channel.Interrupted {
		return context.Cause(cmd.Context())
	}
	if found.Status != channel.BoundsClosed {
		warnings = append(warnings, fmt.Sprintf("the bounds of the capacity are %.2g apart, more than %.0g", found.Upper-found.Lower, channel.CapacityTolerance))
		warn(cmd, warnings[len(warnings)-1:])
	}
	// The lower bound is what the input distribution reaches.
	capacity := found.Lower
	answer := &report.Matrix{
		Schema:       "tannery/limit/1",
		Channel:      name,
		Inputs:       len(c.Transitions),
		Outputs:      len(c.Transitions[0]),
		Capacity:     capacity,
		Rate:         capacity,
		Lower:        found.Lower,
		Upper:        found.Upper,
		Distribution: make([]report.InputShare, len(found.Distribution)),
		Iterations:   found.Iterations,
		Warnings:     append([]string{}, warnings...),
	}
	for i, p := range found.Distribution {
		answer.Distribution[i] = report.InputShare{Input: fmt.Sprint(i + 1), Probability: p}
		if c.Inputs != nil {
			answer.Distribution[i].Input = c.Inputs[i]
		}
	}
	if o.sourceRate.given {
		if answer.Link, err = o.link(capacity); err != nil {
			return err
		}
	}
	return deliver(cmd, answer)
}

package main

import (
	"errors"
	"math"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/brief"
	"tannery/de"
	"tannery/de/channel"
)

// methodOption is the method of analysis; if it is not given, the most exact
// one that fits the channel is used.
type methodOption struct{ method nameOption }

func (o *methodOption) addMethod(cmd *cobra.Command) {
	o.method.names = brief.Methods()
	cmd.Flags().Var(&o.method, "method", "exact (bec), gaussian (biawgn), gaussian-fit (biawgn, with the published approximate φ) or quantized; the most exact that fits if not given")
	complete(cmd, "method", o.method.names)
}

// engine returns the engine for the method asked for, or the default one.
func (o *methodOption) engine(f channel.Family) (de.Engine, error) {
	return engineFor(de.Method(o.method.value), f)
}

// engineFor returns the engine of a method, or of the default one of the
// channel for an empty name. Whether the engine covers the channel shows when
// it is used.
func engineFor(method de.Method, f channel.Family) (de.Engine, error) {
	if method == "" {
		method = de.DefaultMethod(f)
	}
	if method == "" {
		return nil, usagef("--method: no method for channel %s yet", f.Name())
	}
	engine, err := de.EngineFor(method)
	if err != nil {
		return nil, usagef("--method: %w", err)
	}
	return engine, nil
}

// methodError makes invalid input of a method that does not cover a channel.
func methodError(err error) error {
	var wrong *de.ErrChannel
	if errors.As(err, &wrong) {
		return usagef("--method: found %s; allowed on channel %s: one that covers it (%s covers %s)",
			wrong.Method, wrong.Channel, wrong.Method, listOf(wrong.Covered))
	}
	return err
}

// bounded passes a threshold on, but for one that no channel of the family is
// too bad for.
func bounded(t de.Threshold, err error) (de.Threshold, error) {
	if err == nil && math.IsInf(t.Value, 1) {
		err = errors.New("there is no threshold: decoding succeeds on every channel of the family")
	}
	return t, methodError(err)
}

package de

import (
	"fmt"
	"maps"
	"slices"
	"strings"

	"tannery/de/channel"
)

// ErrChannel reports a channel that a method does not cover.
type ErrChannel struct {
	Method  Method
	Channel string   // name of the family asked for
	Covered []string // names of the families that the method covers
}

func (e *ErrChannel) Error() string {
	return fmt.Sprintf("method %s does not cover channel %s: it covers %s",
		e.Method, e.Channel, strings.Join(e.Covered, ", "))
}

// Names of the families that methods are tied to.
const (
	bec    = "bec"
	biawgn = "biawgn"
)

// covers returns an *ErrChannel unless the family is one of the covered.
func covers(m Method, f channel.Family, covered ...string) error {
	if slices.Contains(covered, f.Name()) {
		return nil
	}
	return &ErrChannel{Method: m, Channel: f.Name(), Covered: covered}
}

// checkParameter returns an error unless the parameter lies in the family's
// range.
func checkParameter(f channel.Family, parameter float64) error {
	best, worst := f.Range()
	if !(parameter >= best && parameter <= worst) {
		return fmt.Errorf("%s %v of channel %s: must be from %v to %v", f.Parameter(), parameter, f.Name(), best, worst)
	}
	return nil
}

// engines lists the engine of each method.
var engines = map[Method]Engine{
	Exact:       ExactEngine{},
	Gaussian:    GaussianEngine{},
	GaussianFit: GaussianFitEngine{},
	Quantized:   QuantizedEngine{},
}

// Methods returns the methods that EngineFor knows, in alphabetical order.
func Methods() []Method {
	return slices.Sorted(maps.Keys(engines))
}

// EngineFor returns the engine of a method, which is one of Methods.
func EngineFor(method Method) (Engine, error) {
	if e, ok := engines[method]; ok {
		return e, nil
	}
	known := make([]string, 0, len(engines))
	for _, m := range Methods() {
		known = append(known, string(m))
	}
	return nil, fmt.Errorf("method %q: must be one of %s", method, strings.Join(known, ", "))
}

// DefaultMethod returns the most exact method that covers the family.
func DefaultMethod(f channel.Family) Method {
	if f.Name() == bec {
		return Exact
	}
	return Quantized
}

package catalog

import (
	"fmt"
	"math"
	"slices"

	"tannery/ensembles"
)

// Trust says how far a number can be relied on.
type Trust string

// The words for it.
const (
	Read     Trust = "read"     // in the source named
	Recalled Trust = "recalled" // from the source named, and reproduced by a computation to about 1e-4
	Computed Trust = "computed" // from an exact formula
)

// Entry is an ensemble of the catalogue.
type Entry struct {
	// Name by which the ensemble is asked for, such as rsu01-r50-d15.
	Name string
	// Source is where the ensemble is from: authors, title, place and year.
	Source string
	// Variant is the source's own name where it has several of a kind.
	Variant string
	// Trust in the degrees and their fractions.
	Trust Trust
	// Ensemble is in edge perspective, normalised.
	Ensemble ensembles.Ensemble
	// Realization has the node counts of a standard; nil elsewhere.
	Realization *ensembles.Realization
	// Thresholds that the source prints, or that a formula gives.
	Thresholds []Threshold
}

// Threshold is a published threshold.
type Threshold struct {
	Channel string // name of the channel family
	// Decoder that it holds for: BeliefPropagation unless the source speaks
	// of another.
	Decoder string
	// Method by which the source found it, a name of package de; empty where
	// it is that of the decoder itself.
	Method string
	Value  float64 // as the channel's parameter
	// Resolution is half a unit of the last digit printed.
	Resolution float64
	Trust      Trust
}

// The decoders.
const (
	BeliefPropagation = "belief-propagation"
	MAP               = "map"
	GallagerA         = "gallager-a"
	GallagerB         = "gallager-b"
)

// All returns the entries, sorted by source in the order of the data, rate and
// largest degree. Treat them as immutable.
func All() []Entry { return slices.Clone(entries()) }

// Names returns the names of All.
func Names() []string {
	all := entries()
	names := make([]string, len(all))
	for i, e := range all {
		names[i] = e.Name
	}
	return names
}

// Lookup returns the entry of that name; ok is false if there is none.
func Lookup(name string) (entry Entry, ok bool) {
	i := slices.IndexFunc(entries(), func(e Entry) bool { return e.Name == name })
	if i < 0 {
		return Entry{}, false
	}
	return entries()[i], true
}

// RateTolerance is how far design rates may differ to count as the same:
// half a unit of the hundredths in names.
const RateTolerance = 0.005

// AtRate returns the entries whose design rate is the given one, within
// RateTolerance.
func AtRate(rate float64) []Entry {
	return slices.DeleteFunc(All(), func(e Entry) bool {
		return math.Abs(e.Ensemble.DesignRate()-rate) > RateTolerance
	})
}

// On returns the published threshold of belief propagation on a channel, by
// the method that covers it best; ok is false if the entry has none.
func (e Entry) On(channel string) (threshold Threshold, ok bool) {
	for _, t := range e.Thresholds {
		if t.Channel == channel && t.Decoder == BeliefPropagation && t.Method == "" {
			return t, true
		}
	}
	return Threshold{}, false
}

// nameOf names an ensemble.
func nameOf(source string, e ensembles.Ensemble) string {
	return fmt.Sprintf("%s-r%02.0f-d%d", source, 100*e.DesignRate(), e.Lambda.Max())
}

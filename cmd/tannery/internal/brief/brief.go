// Package brief is what the user asked a search for: a YAML file, options,
// or both. Reading is strict, and every problem names its place in the file
// or its option, the value found and what is allowed.
package brief

import (
	"time"

	"tannery/de/channel"
	"tannery/ensembles/document"
)

// Brief is what a search is asked for, whole and valid. Zero means no limit
// or the default unless said otherwise.
type Brief struct {
	Title       string
	Channel     string   // name of a channel family, or a file
	Also        []string // further channels on which the profile must work
	Degradation string   // of channels from files; empty for DefaultDegradation
	Rate        float64  // information bits per code bit, between 0 and 1
	Link        *Link    // where the rate follows from a link
	Method      string   // name of a method, or empty for the most exact that fits

	// Families are those of the channels, Channel's first.
	Families []channel.Family

	VariableDegrees Degrees
	CheckDegrees    Degrees

	Iterations      int     // the most that the decoder can do
	TargetError     float64 // bit error probability to reach in them
	EdgesPerBit     float64 // the most that the decoder can hold
	DegreeTwo       string  // "parity", "free" or empty
	DistinctDegrees int     // the most different variable degrees
	StabilityMargin float64 // the least relative distance from instability

	Seed        uint64
	Time        time.Duration
	Evaluations int
	Workers     int
}

// Link is a source and a channel from which the rate follows: the entropy of
// the source over the number of channel symbols.
type Link struct {
	SourceRate        float64 // bits per second, or any other unit of time
	SourceProbability float64 // of a one in the source, between 0 and 1
	SymbolRate        float64 // channel symbols in the same unit of time
	Parameter         float64 // of the channel's family
}

// Degrees are the degrees allowed: those of a list, or all up to a largest
// one. If both are empty, the search chooses.
type Degrees struct {
	Max     int
	Allowed []int
}

// bounds returns the least and the largest degree allowed, with the given
// defaults where nothing is said.
func (d Degrees) bounds(low, high int) (least, most int) {
	switch {
	case len(d.Allowed) > 0:
		least, most = d.Allowed[0], d.Allowed[0]
		for _, n := range d.Allowed {
			least, most = min(least, n), max(most, n)
		}
		return least, most
	case d.Max > 0:
		return low, d.Max
	}
	return low, high
}

// MaxTime is the longest that a search may be asked to take.
const MaxTime = 30 * 24 * time.Hour

// MaxWorkers is the largest number of workers that may be asked for.
const MaxWorkers = 1024

// MaxEvaluations is the largest number of evaluations that may be asked for.
const MaxEvaluations = 1_000_000_000

// MaxDistinctDegrees is the largest limit on the number of different degrees:
// no profile found has as many.
const MaxDistinctDegrees = 1000

// TargetErrors are the bit error probabilities that may be asked for within a
// number of iterations: below 1e-15 they are lost in rounding.
var TargetErrors = document.Range{Low: 1e-15, High: 0.5, OpenHigh: true}

// StabilityMargins are those that may be asked for.
var StabilityMargins = document.Range{High: 1, OpenHigh: true}

// MaxIterations is the largest limit on a decoder's iterations.
const MaxIterations = 1_000_000

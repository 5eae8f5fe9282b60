package ensembles

import (
	"errors"
	"io"
	"slices"
	"time"

	"tannery/ensembles/document"
)

// ProfileVersion is the version of the file format that is read and written.
const ProfileVersion = 1

// Profile is an ensemble with what is known about it: the content of a
// profile file. Its design rate is that of the ensemble and is not stored.
type Profile struct {
	Title       string
	Ensemble    Ensemble
	Results     []Result     // thresholds of the ensemble, one per channel and method
	Provenance  Provenance   // how it came about; the zero value if unknown
	Realization *Realization // exact node counts, nil before they are chosen
}

// Result is a decoding threshold with its distance from the Shannon limit.
// All numbers are finite.
type Result struct {
	Channel     string  // name of the channel family, such as "biawgn"
	Parameter   string  // key of its parameter, such as "sigma"
	Method      string  // name of the method of analysis
	Threshold   float64 // as a channel parameter, at least 0
	Uncertainty float64 // numerical, of Threshold, at least 0
	Limit       float64 // the parameter at which capacity equals the design rate
	Gap         Gap
}

// Gap is the distance of a threshold from the Shannon limit, positive where
// the threshold lies below the limit.
type Gap struct {
	Parameter float64  // Limit - Threshold
	DB        *float64 // in signal-to-noise ratio, nil for channels without one
	Rate      float64  // capacity at the threshold minus the design rate, bits per code bit
}

// Provenance tells how a profile came about. Fields that are zero or nil are
// left out of the file.
type Provenance struct {
	Program string        // name and version of the program
	Seed    *uint64       // of the search
	Created time.Time     // in UTC
	Brief   document.Tree // what was asked for, as it was given
}

// IsZero tells whether nothing is known.
func (p Provenance) IsZero() bool {
	return p.Program == "" && p.Seed == nil && p.Created.IsZero() && p.Brief.IsZero()
}

// ReadProfile reads a profile as DecodeProfile does.
func ReadProfile(name string, r io.Reader) (Profile, []string, error) {
	return profileOf(document.Read(name, r))
}

// DecodeProfile reads the YAML text of a profile; name stands for the file
// in messages. Everything that is wrong is returned as document.Problems.
// The warnings, in the form "file:line:column: key: text", say what was
// corrected: fractions that miss a sum of 1 by more than rounding but less
// than SumTolerance are normalised, and a design rate that does not belong
// to the fractions is ignored.
func DecodeProfile(name string, data []byte) (Profile, []string, error) {
	return profileOf(document.Parse(name, data))
}

// Encode returns the YAML text of the profile, which DecodeProfile reads
// back to the same bits. A profile that could not be read back, such as one
// with a number that is not finite, is an error instead.
func (p Profile) Encode() ([]byte, error) {
	data, err := document.Marshal(p.node())
	if err != nil {
		return nil, err
	}
	back, _, err := DecodeProfile("profile", data)
	if err != nil {
		return nil, err
	}
	if !slices.Equal(back.Ensemble.Lambda, p.Ensemble.Lambda) || !slices.Equal(back.Ensemble.Rho, p.Ensemble.Rho) {
		return nil, errors.New("lambda and rho: must be made by NewDistribution, in order and with fractions that sum to 1")
	}
	return data, nil
}

// WriteTo writes what Encode returns.
func (p Profile) WriteTo(w io.Writer) (int64, error) {
	data, err := p.Encode()
	if err != nil {
		return 0, err
	}
	n, err := w.Write(data)
	return int64(n), err
}

// MarshalJSON returns the profile with the same keys as in YAML.
func (p Profile) MarshalJSON() ([]byte, error) {
	if _, err := p.Encode(); err != nil {
		return nil, err
	}
	return document.MarshalJSON(p.node())
}

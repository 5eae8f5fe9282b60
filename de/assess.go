package de

import (
	"fmt"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Assessment sets a threshold beside what is possible.
type Assessment struct {
	// DesignRate of the ensemble, information bits per code bit.
	DesignRate float64
	// Limit is the Shannon limit at the design rate: the channel parameter at
	// which the capacity equals it.
	Limit float64
	Gap   Gap
	// Stability is the stability condition with its margin at the threshold.
	Stability Stability
}

// Gap is the distance of a threshold from the Shannon limit; no part of it is
// negative but by the numerical uncertainty, or by the error of an
// approximation.
type Gap struct {
	// Parameter is the limit minus the threshold.
	Parameter float64
	// DB is the ratio of the signal-to-noise ratios at the threshold and at
	// the limit in dB; meaningful only if HasDB, since some families, such as
	// the BEC, have no noise power.
	DB    float64
	HasDB bool
	// Rate is the capacity at the threshold minus the design rate.
	Rate float64
}

// Assess returns the gap between the threshold and the Shannon limit at the
// ensemble's design rate. It is an error if the design rate is not strictly
// between 0 and 1, since no channel has such a capacity as its limit.
func Assess(e ensembles.Ensemble, f channel.Family, t Threshold) (Assessment, error) {
	rate := e.DesignRate()
	if !(rate > 0 && rate < 1) {
		return Assessment{}, fmt.Errorf("design rate %.6g: must lie strictly between 0 and 1 to have a Shannon limit", rate)
	}
	limit, err := f.Inverse(rate)
	if err != nil {
		return Assessment{}, fmt.Errorf("Shannon limit at design rate %.6g: %w", rate, err)
	}
	a := Assessment{
		DesignRate: rate,
		Limit:      limit,
		Gap:        Gap{Parameter: limit - t.Value, Rate: f.Capacity(t.Value) - rate},
		Stability:  StabilityOf(e, f, t.Value),
	}
	atLimit, ok := f.SNR(limit)
	atThreshold, okToo := f.SNR(t.Value)
	if ok && okToo {
		a.Gap.DB, a.Gap.HasDB = channel.DB(atThreshold/atLimit), true
	}
	return a, nil
}

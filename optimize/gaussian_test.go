package optimize

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// Richardson, Shokrollahi & Urbanke, Design of capacity-approaching irregular
// low-density parity-check codes, IEEE Trans. Inf. Theory 47(2), 2001, Tables I
// and II, rate 1/2 on BI-AWGN (recalled). Designed by exact evolution; by the
// Gaussian approximation they can be no better than the best found by it with
// the same degrees.
var published = []struct {
	largest     int
	lambda, rho string
}{
	{4, "2:.38354,3:.04237,4:.57409", "5:.24123,6:.75877"},
	{5, "2:.32660,3:.11960,4:.18393,5:.36988", "6:.78555,7:.21445"},
	{6, "2:.33241,3:.24632,4:.11014,6:.31112", "6:.76611,7:.23389"},
	{7, "2:.31570,3:.26758,7:.41672", "6:.43810,7:.56190"},
	{8, "2:.30013,3:.28395,8:.41592", "6:.22919,7:.77081"},
	{10, "2:.25105,3:.30938,4:.00104,10:.43853", "7:.63676,8:.36324"},
	{11, "2:.23882,3:.29515,4:.03261,11:.43342", "7:.43011,8:.56989"},
	{15, "2:.23802,3:.20997,4:.03492,5:.12015,7:.01587,14:.00480,15:.37627", "8:.98013,9:.01987"},
}

// renormalized reads a printed row, whose fractions may miss 1 by a few units
// of the last digit.
func renormalized(t *testing.T, text string) ensembles.Distribution {
	t.Helper()
	var terms []ensembles.Term
	for _, item := range strings.Split(text, ",") {
		var term ensembles.Term
		if _, err := fmt.Sscanf(item, "%d:%g", &term.Degree, &term.Fraction); err != nil {
			t.Fatal(err)
		}
		terms = append(terms, term)
	}
	return ensembles.Normalize(terms)
}

func TestGaussianBeatsPublished(t *testing.T) {
	for _, row := range published {
		e := ensembles.Ensemble{Lambda: renormalized(t, row.lambda), Rho: renormalized(t, row.rho)}
		printed, err := (de.GaussianEngine{}).Threshold(context.Background(), e, channel.BIAWGN{})
		if err != nil {
			t.Fatal(err)
		}
		// The rows miss rate 1/2 by rounding: compare at their own rate.
		p := Problem{Channel: channel.BIAWGN{}, Rate: e.DesignRate(), VariableDegrees: DegreesUpTo(row.largest)}
		r := mustSearch(t, p, Settings{})
		checkResult(t, p, r)
		if r.Threshold.Value < printed.Value*(1-1e-9) {
			t.Errorf("largest degree %d: %v found, the published row has %v", row.largest, r.Threshold.Value, printed.Value)
		}
	}
}

// The threshold rises with the largest degree, stays below the Shannon limit
// at these rates, and is that of the programme.
func TestGaussianSweep(t *testing.T) {
	for _, rate := range []float64{0.15, 0.25, 0.5, 0.75, 0.9, 0.98} {
		last := 0.
		for _, largest := range []int{3, 5, 12, 40, 200} {
			p := Problem{Channel: channel.BIAWGN{}, Rate: rate, VariableDegrees: DegreesUpTo(largest)}
			seen := &recorder{}
			r := mustSearch(t, p, Settings{Recorder: seen})
			checkResult(t, p, r)
			if r.Threshold.Value < last*(1-1e-9) {
				t.Errorf("rate %v: largest degree %d reaches %v, a smaller one %v", rate, largest, r.Threshold.Value, last)
			}
			if last = r.Threshold.Value; last > r.Limit {
				t.Errorf("rate %v, largest degree %d: %v is above the Shannon limit %v", rate, largest, last, r.Limit)
			}
			if v := seen.improved[len(seen.improved)-1].Threshold; math.Abs(v-last) > 1e-8*last {
				t.Errorf("rate %v, largest degree %d: %v by the programme, %v by the engine", rate, largest, v, last)
			}
		}
	}
}

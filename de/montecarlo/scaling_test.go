package montecarlo

import (
	"context"
	"math"
	"strings"
	"testing"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// critical returns the threshold and the critical point on the BEC.
func critical(t *testing.T, e ensembles.Ensemble) (threshold, x float64) {
	t.Helper()
	th, err := de.ExactEngine{}.Threshold(context.Background(), e, channel.BEC{})
	if err != nil {
		t.Fatal(err)
	}
	return th.Value, th.Critical[0].Entropy
}

// Amraoui, Montanari, Richardson & Urbanke (2009), the table of scaling
// parameters (recalled).
func TestScalingOfRegularEnsembles(t *testing.T) {
	for _, test := range []struct {
		dv, dc      int
		alpha, beta float64
	}{
		{3, 4, .542483, .593632},
		{3, 6, .560355, .616949},
		{4, 8, .541600, .560092},
		{5, 10, .526558, .529754},
	} {
		e := ensembles.Regular(test.dv, test.dc)
		threshold, x := critical(t, e)
		s, err := ScalingOf(e, threshold, x)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(s.Alpha-test.alpha) > 2e-6 || math.Abs(s.Beta-test.beta) > 3e-6 {
			t.Errorf("(%d,%d): α %.6f, β %.6f; want %.6f, %.6f", test.dv, test.dc, s.Alpha, s.Beta, test.alpha, test.beta)
		}
		if !math.IsInf(s.Rival, 1) || !s.Isolated(100) {
			t.Errorf("(%d,%d): rival at %g, want none", test.dv, test.dc, s.Rival)
		}
		if p := s.FrameErrorRate(1<<40, threshold); math.Abs(p-0.5) > 0.01 {
			t.Errorf("(%d,%d): frame error rate %g at the threshold of a very long code, want about 1/2", test.dv, test.dc, p)
		}
		// Far above the threshold and for a very long code, density evolution;
		// at the threshold and for a long code half of what is left there.
		above, left := threshold*1.1, 1.0
		for range 1000 {
			left = above * math.Pow(1-math.Pow(1-left, float64(test.dc-1)), float64(test.dv-1))
		}
		left = above * math.Pow(1-math.Pow(1-left, float64(test.dc-1)), float64(test.dv))
		if p := s.BitErrorRate(1<<40, above); math.Abs(p-left) > 1e-3*left {
			t.Errorf("(%d,%d): bit error rate %g above the threshold, density evolution %g", test.dv, test.dc, p, left)
		}
		left = threshold * math.Pow(1-math.Pow(1-x, float64(test.dc-1)), float64(test.dv))
		if p := s.BitErrorRate(1<<40, threshold); math.Abs(p-left/2) > 0.02*left {
			t.Errorf("(%d,%d): bit error rate %g at the threshold of a very long code, want about %g", test.dv, test.dc, p, left/2)
		}
	}
}

func TestScalingRefuses(t *testing.T) {
	if _, err := ScalingOf(ensembles.Regular(3, 6), 0.43, 0.4); err == nil || !strings.Contains(err.Error(), "no critical point") {
		t.Errorf("error %v, want that 0.4 is no critical point", err)
	}
	// Threshold at the stability bound: the critical point is 0.
	e, err := ensembles.New(ensembles.Distribution{{Degree: 2, Fraction: .9}, {Degree: 3, Fraction: .1}}, ensembles.Distribution{{Degree: 6, Fraction: 1}})
	if err != nil {
		t.Fatal(err)
	}
	threshold, x := critical(t, e)
	if _, err := ScalingOf(e, threshold, x); err == nil {
		t.Errorf("no error at x = %g, where the law does not hold", x)
	}
}

package montecarlo

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"tannery/de/channel"
)

// The LLRs drawn have the error probability and the Bhattacharyya parameter
// of the family, within five standard errors, and each satisfies
// E[e^(-L)] ≤ 1 as every LLR of a sent zero does (equal on channels without
// certainty).
func TestSourcesMatchFamilies(t *testing.T) {
	const draws = 400_000
	for name := range sources {
		f, err := channel.ByName(name)
		if err != nil {
			t.Fatal(err)
		}
		for _, rate := range []float64{0.2, 0.5, 0.8} {
			parameter, err := f.Inverse(rate)
			if err != nil {
				t.Fatal(err)
			}
			draw, err := newSource(f, parameter)
			if err != nil {
				t.Fatal(err)
			}
			random := rand.New(rand.NewPCG(9, uint64(100*rate)))
			var wrong, b, b2 float64
			for range draws {
				l := draw(random)
				switch {
				case l < 0:
					wrong++
				case l == 0:
					wrong += 0.5
				}
				x := math.Exp(-l / 2)
				b += x
				b2 += x * x
			}
			wrong, b, b2 = wrong/draws, b/draws, b2/draws
			want := f.ErrorProbability(parameter)
			if off, allowed := math.Abs(wrong-want), 5*math.Sqrt(want/draws); off > allowed {
				t.Errorf("%s at %g: error probability %g, want %g within %g", name, parameter, wrong, want, allowed)
			}
			want = f.Bhattacharyya(parameter)
			if off, allowed := math.Abs(b-want), 5*math.Sqrt((b2-b*b)/draws)+1e-12; off > allowed {
				t.Errorf("%s at %g: Bhattacharyya parameter %g, want %g within %g", name, parameter, b, want, allowed)
			}
		}
	}
}

func TestSourceRefuses(t *testing.T) {
	for _, test := range []struct {
		f         channel.Family
		parameter float64
		want      string
	}{
		{channel.BIAWGN{}, 0, "sigma 0: must lie between"},
		{channel.BIAWGN{}, math.Inf(1), "sigma +Inf: must lie between"},
		{channel.BIAWGN{}, math.NaN(), "sigma NaN: must lie between"},
		{channel.BSC{}, 0.5, "p 0.5: must lie between 0 and 0.5"},
		{channel.BEC{}, 1.5, "epsilon 1.5: must lie between 0 and 1"},
	} {
		if _, err := newSource(test.f, test.parameter); err == nil || !strings.HasPrefix(err.Error(), test.want) {
			t.Errorf("%s at %v: error %v, want %s", test.f.Name(), test.parameter, err, test.want)
		}
	}
	if _, err := newSource(channel.BEC{}, 1); err != nil {
		t.Errorf("an erasure probability of 1: %v", err)
	}
}

package optimize

import (
	"context"
	"errors"
	"math"

	"tannery/de/channel"
	"tannery/ensembles"
)

// starts returns ensembles from which to refine: the best designs for the BEC
// with check degrees concentrated around the mean that is best there, and
// around means a little below and above.
func starts(ctx context.Context, p Problem) ([]ensembles.Ensemble, error) {
	p = onBEC(p)
	designs := newErasureDesigner(p)
	low, high := p.meanRange()
	value := map[float64]float64{}
	design := func(mean float64) (ensembles.Ensemble, float64, error) {
		c, err := designs.best(ctx, p.rhoAt(mean), p.VariableDegrees, nil)
		if err != nil {
			return ensembles.Ensemble{}, 0, err
		}
		return c.ensemble(), c.value, nil
	}
	at := func(mean float64) (float64, error) {
		if v, ok := value[mean]; ok {
			return v, nil
		}
		_, v, err := design(mean)
		if errors.Is(err, ErrUnreachable) {
			v, err = 0, nil
		}
		value[mean] = v
		return v, err
	}
	mean, err := goldenSection(at, low, high)
	if err != nil {
		return nil, err
	}
	var out []ensembles.Ensemble
	for _, factor := range startFactors {
		e, _, err := design(min(max(mean*factor, low), high))
		if errors.Is(err, ErrUnreachable) {
			continue
		}
		if err != nil {
			return nil, err
		}
		if len(out) == 0 || out[len(out)-1].Rho.String() != e.Rho.String() {
			out = append(out, e)
		}
	}
	if len(out) == 0 {
		return nil, p.unreachable()
	}
	return out, nil
}

// onBEC returns the problem as the designs for the BEC can take it. The margin
// of the stability condition is such that it holds at the Shannon limits of the
// problem's channels, where it is stricter than on the BEC.
func onBEC(p Problem) Problem {
	worst := 1 - p.Rate
	for _, f := range p.channels() {
		if limit, err := f.Inverse(p.Rate); err == nil {
			worst = max(worst, f.Bhattacharyya(limit))
		}
	}
	p.Limits.StabilityMargin = 1 - (1-p.Limits.StabilityMargin)*(1-p.Rate)/worst
	p.Limits.Iterations = 0
	p.Channel, p.Also = channel.BEC{}, nil
	return p
}

// startFactors relate the mean check degrees of the starts to the best on the
// BEC.
var startFactors = []float64{1, 0.94, 1.06}

// goldenSection maximises a function of the mean check degree by golden
// section search in its logarithm (Kiefer, Proc. AMS 4, 1953), after a coarse
// scan. Being near the maximum is enough.
func goldenSection(f func(float64) (float64, error), low, high float64) (float64, error) {
	const scans, width = 12, 0.01
	best, least, most := 0.0, low, high
	ratio := math.Pow(high/low, 1./scans)
	mean := low
	for k := range scans + 1 {
		at := low * math.Pow(ratio, float64(k))
		v, err := f(min(at, high))
		if err != nil {
			return 0, err
		}
		if v > best {
			best, mean = v, at
			least, most = max(low, at/ratio), min(high, at*ratio)
		}
	}
	golden := (math.Sqrt(5) - 1) / 2
	for most/least > 1+width {
		span := math.Log(most / least)
		a, b := most*math.Exp(-golden*span), least*math.Exp(golden*span)
		va, err := f(a)
		if err != nil {
			return 0, err
		}
		vb, err := f(b)
		if err != nil {
			return 0, err
		}
		if va > vb {
			most = b
		} else {
			least = a
		}
		for _, x := range []float64{a, b} {
			if v, _ := f(x); v > best {
				best, mean = v, x
			}
		}
	}
	return min(max(mean, low), high), nil
}

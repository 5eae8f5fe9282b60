package optimize

import (
	"context"
	"errors"
	"math"

	"tannery/de"
	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// yardstick measures ensembles on one channel family by density evolution: the
// threshold, and how much room is left near it, as margins that a linear
// programme can take. A margin is positive where decoding goes on, and an
// ensemble decodes at a parameter if all its margins there are.
type yardstick interface {
	family() channel.Family
	// read finds the threshold, near guess, where the first run may be at the
	// given distance below, 0 for both where nothing is known, to a tolerance
	// relative to it.
	read(ctx context.Context, e ensembles.Ensemble, guess, distance, tolerance float64) (reading, error)
	// margins returns those at the places, NaN where there is none.
	margins(ctx context.Context, e ensembles.Ensemble, parameter float64, places []float64) ([]float64, error)
}

// reading is an ensemble's threshold with its margins at a parameter a little
// below it.
type reading struct {
	threshold   float64
	parameter   float64
	places      []float64
	margins     []float64
	evaluations int // evolutions
}

// tunnel is the yardstick of decoders with any number of iterations. Its
// margins are the rates at which the Bhattacharyya parameter falls, and their
// places the depths in the tunnel.
type tunnelYardstick struct {
	channel channel.Family
	grid    *density.Grid
}

const (
	// linearRate is the least rate in a course whose margins are linearised:
	// near enough to the threshold for the tunnels to show, far enough for
	// the course to be short.
	linearRate = 0.008
	// freeRate is the rate from which a place does not constrain a step.
	freeRate = 0.3
)

func (t tunnelYardstick) family() channel.Family { return t.channel }

func (t tunnelYardstick) read(ctx context.Context, e ensembles.Ensemble, guess, distance, tolerance float64) (reading, error) {
	scale := guess
	if scale == 0 {
		scale, _ = t.channel.Inverse(e.DesignRate())
	}
	threshold, courses, err := de.Approach(ctx, e, t.grid, t.channel, guess, distance, tolerance*scale)
	if err != nil {
		return reading{}, err
	}
	r := reading{threshold: threshold, evaluations: len(courses)}
	for i := len(courses) - 1; i >= 0; i-- {
		c := courses[i]
		depths, rates := c.Depths()
		least := math.Inf(1)
		r.parameter, r.places, r.margins = c.Parameter, nil, nil
		for k, rate := range rates {
			least = min(least, rate)
			if rate < freeRate {
				r.places = append(r.places, depths[k])
				r.margins = append(r.margins, rate)
			}
		}
		if least > linearRate {
			break
		}
	}
	if r.places == nil {
		return r, errNoTunnel
	}
	return r, nil
}

// errNoTunnel says that an ensemble has no tunnel to measure: its threshold is
// where a bound puts it.
var errNoTunnel = errors.New("no tunnel")

func (t tunnelYardstick) margins(ctx context.Context, e ensembles.Ensemble, parameter float64, places []float64) ([]float64, error) {
	c, _, err := de.Follow(ctx, e, t.grid, t.channel, parameter)
	if err != nil {
		return nil, err
	}
	m := make([]float64, len(places))
	for i, depth := range places {
		m[i] = c.Rate(depth)
	}
	return m, nil
}

// deadlineYardstick is the yardstick of decoders that stop: the bit error
// probability must be at most target after the given number of iterations. Its
// only margin is the logarithm of target over that probability.
type deadlineYardstick struct {
	channel    channel.Family
	grid       *density.Grid
	iterations int
	target     float64
}

func (d deadlineYardstick) family() channel.Family { return d.channel }

func (d deadlineYardstick) margin(e ensembles.Ensemble, parameter float64) float64 {
	const least = 1e-18 // rounding may leave nothing of a smaller probability
	return math.Log(d.target / max(de.BitErrorAfter(e, d.grid, d.channel, parameter, d.iterations), least))
}

// read brackets the root of the margin, which falls with the parameter, from
// guess, and closes in by the Illinois rule (Dowell & Jarratt, BIT 11, 1971).
func (d deadlineYardstick) read(ctx context.Context, e ensembles.Ensemble, guess, distance, tolerance float64) (reading, error) {
	best, _ := d.channel.Range()
	limit, err := d.channel.Inverse(e.DesignRate())
	if err != nil {
		return reading{}, err
	}
	if guess == 0 {
		guess, distance = limit, (limit-best)/4
	}
	r := reading{places: []float64{0}}
	margin := func(parameter float64) float64 {
		r.evaluations++
		return d.margin(e, parameter)
	}
	high, low := guess, guess
	atHigh := margin(guess)
	atLow := atHigh
	for step := distance; atHigh > 0 && high < limit && ctx.Err() == nil; step *= 2 {
		low, atLow = high, atHigh
		high = min(high+step, limit)
		atHigh = margin(high)
	}
	for step := distance; atLow <= 0 && ctx.Err() == nil; step *= 2 {
		if low-best < tolerance*limit {
			return r, errNoTunnel
		}
		high, atHigh = low, atLow
		low = max(low-step, best+(low-best)/4)
		atLow = margin(low)
	}
	if err := ctx.Err(); err != nil {
		return r, err
	}
	for side := 0; high-low > tolerance*limit && atHigh < 0; {
		if err := ctx.Err(); err != nil {
			return r, err
		}
		middle := (low*atHigh - high*atLow) / (atHigh - atLow)
		edge := tolerance / 4 * limit
		middle = min(max(middle, low+edge), high-edge)
		switch m := margin(middle); {
		case m > 0:
			if low, atLow = middle, m; side > 0 {
				atHigh /= 2
			}
			side = 1
		default:
			if high, atHigh = middle, m; side < 0 {
				atLow /= 2
			}
			side = -1
		}
	}
	r.threshold, r.parameter = low, low
	r.margins = []float64{margin(low)}
	return r, nil
}

func (d deadlineYardstick) margins(ctx context.Context, e ensembles.Ensemble, parameter float64, places []float64) ([]float64, error) {
	return []float64{d.margin(e, parameter)}, ctx.Err()
}

package de

import (
	"context"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// course is one evolution as seen by its Bhattacharyya parameter B: how fast
// it fell, and where. The rate of an iteration is ln(B before/B after), at
// the depth -ln B of its middle.
type course struct {
	parameter float64
	depth     []float64
	rate      []float64
	entropy   []float64 // of the messages before the iteration
	outcome   Outcome
	// proven tells that success follows from the Bhattacharyya recursion.
	proven bool
}

// Limits of one evolution.
const (
	// deep is the Bhattacharyya parameter at which a stable ensemble counts
	// as decoded without proof: smaller ones are at the end of the grid.
	// shallow is that for searches, which hold the stability condition
	// themselves and can do without the end of the tunnel, slow where the
	// condition is almost violated.
	deep    = 1e-6
	shallow = 5e-4
	// followed is the Bhattacharyya parameter down to which an evolution is
	// followed even if its success is certain earlier, to see all tunnels.
	followed = 1e-3
	// stallDistance is the rule for failure: the evolution has stalled when
	// B, falling at its present rate with its present slowing down, would
	// stop before it falls by this fraction. A tunnel that is still open, of
	// least rate m, is not mistaken for closed unless m is near the square
	// of this, for the predicted stop in front of it is never nearer than
	// √(m/c), c the tunnel's curvature.
	stallDistance = 1e-5
	// stallWindow is over how many iterations slowing down is judged.
	stallWindow = 4
)

// evolve runs an ensemble at one parameter until it succeeds, stalls, or has
// done the iterations allowed.
func evolve(ctx context.Context, e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter, decoded float64) (course, error) {
	c := course{parameter: parameter, outcome: Exhausted}
	b0 := f.Bhattacharyya(parameter)
	certain := certainBelow(e, b0)
	stable := StabilityOf(e, f, parameter).Margin > 0
	v := NewEvolution(e, g, f.Density(parameter))
	b := v.Messages.Bhattacharyya()
	for range iterationCap {
		if err := ctx.Err(); err != nil {
			return c, err
		}
		if b < certain && b < followed {
			c.outcome, c.proven = Converged, true
			return c, nil
		}
		if b < decoded && stable {
			c.outcome = Converged
			return c, nil
		}
		c.entropy = append(c.entropy, v.Messages.Entropy())
		v.Step()
		next := v.Messages.Bhattacharyya()
		if !(next < b) {
			c.outcome = Stalled
			return c, nil
		}
		c.note(b, next)
		b = next
		if c.stalled() {
			c.outcome = Stalled
			return c, nil
		}
	}
	return c, nil
}

// note files the iteration that took B from before to after.
func (c *course) note(before, after float64) {
	c.rate = append(c.rate, math.Log(before/after))
	c.depth = append(c.depth, -math.Log(before*after)/2)
}

// stalled applies the rule of stallDistance.
func (c *course) stalled() bool {
	n := len(c.rate)
	if n <= stallWindow || c.rate[n-1] > stallDistance {
		return false
	}
	last, before := c.rate[n-1], c.rate[n-1-stallWindow]
	slowing := (before - last) / stallWindow // of the rate, per iteration
	return slowing > 0 && last*last < stallDistance*slowing
}

// rateAt interpolates the rate at a depth between the second and the last but
// one iteration; ok is false elsewhere.
func (c *course) rateAt(depth float64) (rate float64, ok bool) {
	i, _ := slices.BinarySearch(c.depth, depth)
	if i < 2 || i > len(c.depth)-2 {
		return 0, false
	}
	d, r := c.depth[i-2:i+2], c.rate[i-2:i+2]
	for j := range d {
		w := r[j]
		for k := range d {
			if k != j {
				w *= (depth - d[k]) / (d[j] - d[k])
			}
		}
		rate += w
	}
	return rate, true
}

package optimize

import (
	"context"

	"tannery/ensembles"
)

const (
	// dust is the fraction of edges below which a variable degree is left out
	// if that costs no more than tidyLoss of the threshold: profiles of long
	// codes have some 1e5 edges.
	dust     = 1e-6
	tidyLoss = 1e-10
)

// tidy returns the candidate without degrees that hardly any edge has: the
// linear programme leaves such where leaving them out is as good.
func tidy(ctx context.Context, d designer, c *candidate) (*candidate, error) {
	var kept ensembles.Distribution
	for _, t := range c.lambda {
		if t.Fraction >= dust {
			kept = append(kept, t)
		}
	}
	if len(kept) == len(c.lambda) {
		return c, nil
	}
	clean, err := d.best(ctx, c.rho, degreesOf(kept), c)
	if err != nil || clean.value < c.value*(1-tidyLoss) {
		// Without the degrees the rate may not be reached at all.
		return c, ctx.Err()
	}
	return clean, nil
}

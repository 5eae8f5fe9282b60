package ensembles

import (
	"math/rand/v2"
	"slices"
)

// randomDistribution has from 1 to most degrees between low and high.
func randomDistribution(r *rand.Rand, most, low, high int) Distribution {
	degrees := r.Perm(high - low + 1)[:1+r.IntN(min(most, high-low+1))]
	slices.Sort(degrees)
	terms := make([]Term, len(degrees))
	for i, degree := range degrees {
		terms[i] = Term{low + degree, r.ExpFloat64()}
	}
	return Normalize(terms)
}

// randomEnsemble has a design rate between 0.05 and 0.95 and concentrated
// check degrees, or check degrees at random.
func randomEnsemble(r *rand.Rand, most, largest int) Ensemble {
	for {
		e := Ensemble{Lambda: randomDistribution(r, most, 2, largest)}
		if r.IntN(2) == 0 {
			e.Rho = Concentrated(e.MeanVariableDegree() / (0.05 + 0.9*r.Float64()))
		} else {
			e.Rho = randomDistribution(r, most, 2, 3*largest)
		}
		if rate := e.DesignRate(); e.Rho.Min() >= 2 && rate > 0.05 && rate < 0.95 {
			return e
		}
	}
}

func seeded(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 0)) }

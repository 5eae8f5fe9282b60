package optimize

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"

	"tannery/ensembles"
)

// Which degrees to use when only a few may be is not a question for a linear
// programme. Besides the exchange of single degrees, a population of ensembles
// is evolved by differential evolution (Storn & Price, J. Global Optim. 11,
// 1997; the scheme rand/1/bin), which can change all degrees at once. Each
// individual draws from a generator of its own, seeded by the search, the
// generation and its number, so that the outcome does not depend on how many
// are measured at once.
const (
	populationPerDegree = 8
	generationCap       = 16
	// idleGenerations without a better best end the evolution.
	idleGenerations = 5
	differential    = 0.7 // F, the weight of a difference of two individuals
	crossover       = 0.9 // CR, the share of genes taken from the mutant
	// populationTolerance is that of thresholds, relative.
	populationTolerance = 1e-4
	// unfit is the gap of what cannot be measured or breaks a limit.
	unfit = 1e3
)

// individual is an ensemble as genes in [0, 1]: for each degree its place
// among the allowed ones, and its weight. Check degrees are concentrated and
// follow from the design rate.
type individual struct {
	Genes []float64
	Gap   float64 // worst over the channels, in rate
}

// ensemble decodes an individual; ok is false if it breaks a limit.
func (v individual) ensemble(p Problem) (e ensembles.Ensemble, ok bool) {
	n := len(v.Genes) / 2
	weight := map[int]float64{}
	for k := range n {
		weight[p.VariableDegrees[v.place(k, len(p.VariableDegrees))]] += v.Genes[n+k]
	}
	fractions := make([]float64, len(p.VariableDegrees))
	for i, d := range p.VariableDegrees {
		fractions[i] = weight[d]
	}
	e.Lambda = distribution(p.VariableDegrees, fractions)
	if e.Lambda == nil {
		return e, false
	}
	mean := 1 / (e.Lambda.Integral() * (1 - p.Rate))
	if low, high := p.meanRange(); mean < low || mean > high {
		return e, false
	}
	e.Rho = p.rhoAt(mean)
	if l := p.Limits; l.DegreeTwoParity && e.Lambda.Fraction(2) > 2*e.Rho.Integral() {
		return e, false
	}
	return withRate(e, p.Rate)
}

// place is the index of the k-th degree among n, finer among the small ones.
func (v individual) place(k, n int) int {
	g := v.Genes[k]
	return min(int(g*g*float64(n)), n-1)
}

// encode is the inverse of ensemble for λ.
func encode(lambda ensembles.Distribution, allowed []int, size int) []float64 {
	genes := make([]float64, 2*size)
	for k, t := range lambda {
		i, _ := slices.BinarySearch(allowed, t.Degree)
		genes[k] = math.Sqrt((float64(i) + 0.5) / float64(len(allowed)))
		genes[size+k] = t.Fraction
	}
	return genes
}

// dice returns the generator of one individual of one generation.
func dice(seed uint64, generation, number int) *rand.Rand {
	return rand.New(rand.NewPCG(seed, uint64(generation)<<32|uint64(number)))
}

// generation makes and measures the next generation of the population, the
// first around nothing but the best ensemble found so far.
func (f *refinement) generation(ctx context.Context, population []individual, number int, seed uint64, best ensembles.Ensemble) ([]individual, error) {
	size := f.problem.Limits.DistinctDegrees
	trials := make([]individual, populationPerDegree*size)
	for i := range trials {
		r := dice(seed, number, i)
		if population == nil {
			trials[i].Genes = make([]float64, 2*size)
			for k := range trials[i].Genes {
				trials[i].Genes[k] = r.Float64()
			}
			continue
		}
		trials[i].Genes = mutant(r, population, i)
	}
	if population == nil {
		trials[0].Genes = encode(best.Lambda, f.problem.VariableDegrees, size)
	}
	tasks := make([]func(), len(trials))
	evolved := make([]int, len(trials))
	for i := range trials {
		tasks[i] = func() { trials[i].Gap, evolved[i] = f.fitness(ctx, trials[i]) }
	}
	parallel(f.workers, tasks)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	for i := range trials {
		f.evaluations += evolved[i]
		if population != nil && population[i].Gap <= trials[i].Gap {
			trials[i] = population[i]
		}
	}
	return trials, nil
}

// mutant crosses individual i with the sum of another and the difference of
// two more, folded back into [0, 1].
func mutant(r *rand.Rand, population []individual, i int) []float64 {
	others := r.Perm(len(population))
	others = slices.DeleteFunc(others, func(k int) bool { return k == i })
	a, b, c := population[others[0]].Genes, population[others[1]].Genes, population[others[2]].Genes
	genes := slices.Clone(population[i].Genes)
	sure := r.IntN(len(genes))
	for k := range genes {
		if r.Float64() < crossover || k == sure {
			g := math.Abs(a[k] + differential*(b[k]-c[k]))
			if g > 1 {
				g = 2 - g
			}
			genes[k] = min(max(g, 0), 1)
		}
	}
	return genes
}

// fitness measures an individual's worst gap.
func (f *refinement) fitness(ctx context.Context, v individual) (gap float64, evolved int) {
	e, ok := v.ensemble(f.problem)
	if !ok {
		return unfit, 0
	}
	var thresholds []float64
	for _, stick := range f.by {
		r, err := stick.read(ctx, e, 0, 0, populationTolerance)
		evolved += r.evaluations
		if err != nil {
			return unfit, evolved
		}
		thresholds = append(thresholds, r.threshold)
	}
	if m := f.problem.Limits.StabilityMargin; m > 0 && e.Lambda.Min() == 2 {
		for y, t := range thresholds {
			if e.Lambda.Fraction(2)*e.Rho.Derivative(1)*f.by[y].family().Bhattacharyya(t) > 1-m {
				return unfit, evolved
			}
		}
	}
	return f.worstGap(thresholds), evolved
}

func fittest(population []individual) individual {
	return slices.MinFunc(population, func(a, b individual) int {
		switch {
		case a.Gap < b.Gap:
			return -1
		case a.Gap > b.Gap:
			return 1
		}
		return 0
	})
}

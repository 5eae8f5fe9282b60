package montecarlo

import (
	"fmt"
	"math"
	"math/rand/v2"

	"tannery/de/channel"
)

// source draws the LLRs with which the channel answers a sent zero.
type source func(random *rand.Rand) float64

// sources says how to draw from each family at a parameter. The formulas are
// those of the family's density in package channel.
var sources = map[string]func(parameter float64) source{
	channel.BEC{}.Name(): func(epsilon float64) source {
		return func(random *rand.Rand) float64 {
			if random.Float64() < epsilon {
				return 0
			}
			return math.Inf(1)
		}
	},
	channel.BSC{}.Name(): func(p float64) source {
		llr := math.Log((1 - p) / p)
		return func(random *rand.Rand) float64 {
			if random.Float64() < p {
				return -llr
			}
			return llr
		}
	},
	// y = 1 + σn, L = 2y/σ².
	channel.BIAWGN{}.Name(): func(sigma float64) source {
		mean, deviation := 2/(sigma*sigma), 2/sigma
		return func(random *rand.Rand) float64 {
			return mean + deviation*random.NormFloat64()
		}
	},
	// y = 1 + n, L = (|y+1| - |y-1|)/b.
	channel.Laplace{}.Name(): func(scale float64) source {
		return func(random *rand.Rand) float64 {
			n := scale * random.ExpFloat64()
			if random.Uint64()&1 == 0 {
				n = -n
			}
			return (math.Abs(2+n) - math.Abs(n)) / scale
		}
	},
	// y = a + σn with E[a²] = 1 and a known, L = 2ay/σ²; a² is exponential.
	channel.Rayleigh{}.Name(): func(sigma float64) source {
		return func(random *rand.Rand) float64 {
			a := math.Sqrt(random.ExpFloat64())
			return 2 * a * (a + sigma*random.NormFloat64()) / (sigma * sigma)
		}
	},
}

// newSource returns the source of a family at a parameter, which must lie in
// the family's range and not at its ends, except on the BEC.
func newSource(f channel.Family, parameter float64) (source, error) {
	make, known := sources[f.Name()]
	if !known {
		return nil, fmt.Errorf("channel %q: trials cannot be drawn from it", f.Name())
	}
	best, worst := f.Range()
	inside := parameter > best && parameter < worst
	if isBEC(f) {
		inside = parameter >= best && parameter <= worst
	}
	if !inside {
		return nil, fmt.Errorf("%s %v: must lie between %v and %v", f.Parameter(), parameter, best, worst)
	}
	return make(parameter), nil
}

// reseed makes the generator that of one trial: it depends on the seed, the
// channel parameter and the number of the trial only, so that neither the
// number of workers nor the other parameters of a sweep change a result.
func reseed(pcg *rand.PCG, seed uint64, parameter float64, trial int64) {
	point := scramble(seed ^ scramble(math.Float64bits(parameter)))
	pcg.Seed(scramble(point^uint64(trial)), scramble(point+uint64(trial)))
}

// scramble is the finaliser of SplitMix64 (Steele, Lea & Flood, Fast
// splittable pseudorandom number generators, OOPSLA 2014): it makes seeds
// that differ in one bit differ in half of them.
func scramble(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}

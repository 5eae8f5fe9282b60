package channel

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

const (
	// SymmetryTolerance is the largest distance from symmetry at which a
	// measured density is symmetrised. At half rate that is a scale of the
	// LLRs wrong by some 8 %, as where the noise was estimated; more says that
	// the values are no LLRs, or not those of a symmetric channel.
	SymmetryTolerance = 0.01
	// symmetryRounding is the distance that printed masses miss symmetry by.
	symmetryRounding = 1e-6
	// measuredResolution is the width in LLR over which the masses of the two
	// signs are compared. Samples of a continuous density never come in equal
	// pairs, and a shift by less than this changes e^x by an eighth at most.
	measuredResolution = 0.25
	// matrixResolution is the same for LLRs that were computed from a matrix
	// and differ by rounding.
	matrixResolution = 1e-9
	// noiseDeviations is how many standard deviations of the sampling noise
	// are allowed beside its mean.
	noiseDeviations = 4
)

// Measured is a symmetric density of the LLR made of atoms, from a user's
// measurement or a transition matrix. The families Erased and Degraded make
// channels with a parameter from it.
type Measured struct {
	// Title is free text, for people.
	Title string
	// Distance is the total variation between what was given and what it was
	// made into by the symmetry.
	Distance float64

	atoms                                     []Atom
	capacity, errorProbability, bhattacharyya float64
}

// NewMeasured makes a density from LLR values, given that a zero was sent,
// and their masses, which sum to 1. LLRs are natural logarithms, positive for
// a zero, and may be ±Inf.
//
// The density of a symmetric channel obeys f(-x) = e^(-x) f(x). Where the
// values do so within SymmetryTolerance, they are symmetrised: the mass of
// each magnitude |x| is kept and split into 1/(1+e^(-|x|)) of it at |x| and
// the rest at -|x|, so that the values are taken at their word and only the
// count of wrong signs changes. A warning tells the distance if it is more
// than rounding. The distance is the total variation, the signs compared over
// cells a quarter of a unit of LLR wide.
func NewMeasured(title string, llr, masses []float64) (m Measured, warning string, err error) {
	if err := checkLLR(llr, masses); err != nil {
		return Measured{}, "", err
	}
	normalised, warning, ok := normalise(masses)
	if !ok {
		return Measured{}, "", fmt.Errorf("masses: %s: must be %s", warning, sumAllowed)
	}
	m, symmetry, err := symmetrise(title, llr, normalised, measuredResolution, math.Inf(1), SymmetryTolerance)
	if warning != "" {
		warning = "masses: " + warning
	}
	if symmetry != "" && warning != "" {
		symmetry = "; " + symmetry
	}
	return m, warning + symmetry, err
}

// NewMeasuredFromCounts is NewMeasured for counts of independent samples. The
// distance allowed is greater by what sampling noise explains.
func NewMeasuredFromCounts(title string, llr, counts []float64) (m Measured, warning string, err error) {
	if err := checkLLR(llr, counts); err != nil {
		return Measured{}, "", err
	}
	samples := 0.0
	for _, n := range counts {
		samples += n
	}
	if samples == 0 || math.IsInf(samples, 1) {
		return Measured{}, "", fmt.Errorf("counts: a sum of %v: must be at least 1 and finite", samples)
	}
	masses := make([]float64, len(counts))
	for i, n := range counts {
		masses[i] = n / samples
	}
	return symmetrise(title, llr, masses, measuredResolution, samples, SymmetryTolerance)
}

// Measured returns the density of the LLR of a channel with two inputs, the
// first of them the zero, that is symmetric: the outputs form pairs of
// opposite LLR, or have LLR 0, with matching masses. It refuses others, such
// as the Z-channel, with their distance from symmetry.
func (c DMC) Measured(title string) (Measured, error) {
	if len(c.Transitions) != 2 {
		return Measured{}, fmt.Errorf("%d inputs: must be 2 for density evolution", len(c.Transitions))
	}
	var llr, masses []float64
	for y, zero := range c.Transitions[0] {
		if one := c.Transitions[1][y]; zero > 0 || one > 0 {
			llr, masses = append(llr, math.Log(zero)-math.Log(one)), append(masses, zero)
		}
	}
	m, _, err := symmetrise(title, llr, masses, matrixResolution, math.Inf(1), symmetryRounding)
	return m, err
}

func checkLLR(llr, weights []float64) error {
	if len(llr) == 0 || len(llr) != len(weights) {
		return fmt.Errorf("%d LLR values and %d masses or counts: must be as many, and at least 1", len(llr), len(weights))
	}
	for i, x := range llr {
		if math.IsNaN(x) {
			return fmt.Errorf("LLR %d: %v: must be a number or ±Inf", i+1, x)
		}
		if w := weights[i]; !(w >= 0) || math.IsInf(w, 1) {
			return fmt.Errorf("mass or count %d: %v: must be at least 0 and finite", i+1, w)
		}
	}
	return nil
}

// symmetrise makes the density, and judges its distance from the masses
// given; samples is their number, +Inf where the masses are exact.
func symmetrise(title string, llr, masses []float64, resolution, samples, tolerance float64) (m Measured, warning string, err error) {
	order := make([]int, len(llr))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int { return cmp.Compare(math.Abs(llr[i]), math.Abs(llr[j])) })
	m.Title = title
	var deviations, variances float64 // of the wrong signs, cell by cell
	// A cell begins at a value and holds those less than the resolution above.
	for i := 0; i < len(order); {
		begin := math.Abs(llr[order[i]])
		var total, wrong, expected float64
		for ; i < len(order); i++ {
			x, mass := llr[order[i]], masses[order[i]]
			magnitude := math.Abs(x)
			if magnitude > begin && !(magnitude-begin <= resolution) {
				break
			}
			total += mass
			switch {
			case x < 0:
				wrong += mass
			case x == 0:
				wrong += mass / 2
			}
			expected += mass / (1 + math.Exp(magnitude))
			m.add(magnitude, mass)
		}
		m.Distance += math.Abs(wrong - expected)
		if total > 0 {
			variance := expected * (1 - expected/total) / samples
			deviations += math.Sqrt(variance)
			variances += variance
		}
	}
	m.capacity = m.mean(llrCapacity)
	m.errorProbability = m.mean(errorAt)
	m.bhattacharyya = m.mean(func(x float64) float64 { return 1 / math.Cosh(x/2) })
	// The mean magnitude of a Gaussian of deviation d is d√(2/π).
	tolerance += math.Sqrt(2/math.Pi)*deviations + noiseDeviations*math.Sqrt(variances)
	switch {
	case m.Distance > tolerance:
		return Measured{}, "", fmt.Errorf("the density is not symmetric, f(-x) = e^(-x) f(x): its distance from symmetry is %.3g, and at most %.3g is allowed", m.Distance, tolerance)
	case m.Distance > symmetryRounding:
		warning = fmt.Sprintf("the density was symmetrised: its distance from symmetry was %.3g, and up to %.3g is allowed", m.Distance, tolerance)
	}
	return m, warning, nil
}

// add puts a mass at a magnitude not below those that are there, or to the
// last of them if that is the same to rounding.
func (m *Measured) add(magnitude, mass float64) {
	if mass == 0 {
		return
	}
	if n := len(m.atoms); n > 0 && magnitude <= m.atoms[n-1].Magnitude*(1+roundingTolerance) {
		m.atoms[n-1].Mass += mass
		return
	}
	m.atoms = append(m.atoms, Atom{magnitude, mass})
}

// Density returns the distribution of the magnitude of the LLR.
func (m Measured) Density() Density { return Density{Atoms: slices.Clone(m.atoms)} }

// Capacity returns bits per channel use, the most that a family made of the
// density can reach.
func (m Measured) Capacity() float64 { return m.capacity }

// ErrorProbability is as in Family.
func (m Measured) ErrorProbability() float64 { return m.errorProbability }

// Bhattacharyya is as in Family.
func (m Measured) Bhattacharyya() float64 { return m.bhattacharyya }

// errorAt returns the probability of a wrong sign at a magnitude.
func errorAt(x float64) float64 { return 1 / (1 + math.Exp(x)) }

func (m Measured) mean(k func(magnitude float64) float64) float64 {
	sum := 0.0
	for _, a := range m.atoms {
		sum += a.Mass * k(a.Magnitude)
	}
	return sum
}

// name returns the title, or what stands for it.
func (m Measured) name() string { return cmp.Or(m.Title, "measured") }

package optimize

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"tannery/ensembles"
)

// Certificate proves that on the BEC no λ with the degrees allowed reaches a
// threshold above Bound, given ρ, the rate and the limits. It is a solution
// of the dual of the linear programme for λ. For any λ with threshold ε and
// t = 1/ε, the points k have Σᵢ λᵢ yₖ^(i-1)/xₖ ≤ t, and with a margin m of
// stability λ₂ρ'(1)/(1-m) ≤ t. Their sum with weights wₖ ≥ 0 and w₀ ≥ 0, W in
// total, and with v ≥ 0 times λ₂ ≤ 2∫ρ where that is a limit, is
//
//	Σᵢ λᵢ gᵢ ≤ W t + 2v∫ρ,  gᵢ = Σₖ wₖ yₖ^(i-1)/xₖ + [i=2](w₀ρ'(1)/(1-m) + v).
//
// If α + β/i ≤ gᵢ for every degree allowed, then, as Σλᵢ = 1 and
// Σλᵢ/i = c = ∫ρ/(1-R), the left side is at least α + βc, and so
//
//	ε ≤ W/(α + βc - 2v∫ρ).
//
// The points are finitely many, so nothing is left to a grid. A limit to the
// number of distinct degrees is not used: the bound holds without it.
type Certificate struct {
	Rate            float64
	Rho             ensembles.Distribution
	VariableDegrees []int   // allowed, increasing; degree 1 may be added, as λ₁ > 0 has no threshold
	StabilityMargin float64 // m
	DegreeTwoParity bool    // whether λ₂ ≤ 2∫ρ is a limit

	// Points holds yₖ strictly between 0 and 1, the erasure probability of
	// messages from check to variable nodes; Weights their wₖ.
	Points, Weights []float64
	StabilityWeight float64 // w₀
	ParityWeight    float64 // v
	Alpha, Beta     float64

	// Bound is what is proved, from 0 to 1.
	Bound float64
}

// roundings is the allowance for rounding, in units of 2⁻⁵² relative to the
// terms of a sum: each term is made by a few functions that are right to one
// or two units. Exponents n·ln y have an error of n·|ln y| units besides.
const roundings = 64

// unit is the relative spacing of doubles.
const unit = 0x1p-52

// total returns W.
func (c *Certificate) total() float64 {
	total := c.StabilityWeight
	for _, w := range c.Weights {
		total += w
	}
	return total
}

// largestAlpha returns the largest α with α + β/i ≤ gᵢ for every degree
// allowed, less an allowance for rounding.
func (c *Certificate) largestAlpha() float64 {
	g := make([]float64, len(c.VariableDegrees))
	allowance := make([]float64, len(g))
	term := make([]float64, len(g))
	for k, y := range c.Points {
		l := logarithm(y)
		x := -math.Expm1(checkInverse(c.Rho, math.Log1p(-y)))
		clear(term)
		addPowers(c.Weights[k]/x, l, c.VariableDegrees, term)
		for i, v := range term {
			g[i] += v
			// addPowers rounds once for each of at most resync products.
			allowance[i] += v * (roundings + resync - float64(c.VariableDegrees[i])*l) * unit
		}
	}
	if i, found := slices.BinarySearch(c.VariableDegrees, 2); found {
		g[i] += c.StabilityWeight*c.Rho.Derivative(1)/(1-c.StabilityMargin) + c.ParityWeight
	}
	alpha := math.Inf(1)
	for i, degree := range c.VariableDegrees {
		b := c.Beta / float64(degree)
		alpha = min(alpha, g[i]-b-allowance[i]-roundings*unit*(math.Abs(b)+g[i]))
	}
	return alpha
}

// bound computes what the points, weights and multipliers prove.
func (c *Certificate) bound() (float64, error) {
	if alpha := c.largestAlpha(); !(c.Alpha <= alpha) {
		return 0, fmt.Errorf("certificate: alpha %v: the points and degrees allow %v at most", c.Alpha, alpha)
	}
	integral := c.Rho.Integral()
	b, parity := c.Beta*integral/(1-c.Rate), 2*c.ParityWeight*integral
	least := c.Alpha + b - parity - roundings*unit*(math.Abs(c.Alpha)+math.Abs(b)+parity)
	if !(least > 0) {
		return 1, nil
	}
	return min(c.total()/least*(1+roundings*unit), 1), nil
}

// logarithm returns ln y, precise near 1 too.
func logarithm(y float64) float64 {
	if y > 0.5 {
		return math.Log1p(y - 1)
	}
	return math.Log(y)
}

// Verify proves Bound from scratch: it computes what the points, weights and
// multipliers prove, with an allowance for rounding, and returns an error if
// that is not Bound or better, or if the certificate is malformed.
func (c *Certificate) Verify() error {
	if !(c.Rate > 0 && c.Rate < 1) {
		return fmt.Errorf("certificate: rate %v: must be strictly between 0 and 1", c.Rate)
	}
	if rho, err := ensembles.NewDistribution(c.Rho...); err != nil {
		return fmt.Errorf("certificate: rho: %w", err)
	} else if len(rho) == 0 || rho.Min() < 2 || !slices.Equal(rho, c.Rho) {
		return errors.New("certificate: rho: must have degrees from 2 in increasing order and sum to 1")
	}
	if len(c.VariableDegrees) == 0 {
		return errors.New("certificate: variable degrees: must list at least one")
	}
	for i, degree := range c.VariableDegrees {
		if degree < 2 || i > 0 && degree <= c.VariableDegrees[i-1] {
			return fmt.Errorf("certificate: variable degree %d: must be from 2 and in increasing order", degree)
		}
	}
	if len(c.Points) != len(c.Weights) {
		return fmt.Errorf("certificate: %d points with %d weights: must be as many", len(c.Points), len(c.Weights))
	}
	for k, y := range c.Points {
		if !(y > 0 && y < 1) {
			return fmt.Errorf("certificate: point %v: must be strictly between 0 and 1", y)
		}
		if w := c.Weights[k]; !(w >= 0) || math.IsInf(w, 0) {
			return fmt.Errorf("certificate: weight %v: must not be negative", w)
		}
	}
	if !(c.StabilityMargin >= 0 && c.StabilityMargin < 1) {
		return fmt.Errorf("certificate: stability margin %v: must be from 0 to below 1", c.StabilityMargin)
	}
	if !(c.StabilityWeight >= 0) || !(c.ParityWeight >= 0) {
		return errors.New("certificate: weights of the rows on λ₂: must not be negative")
	}
	if c.ParityWeight > 0 && !c.DegreeTwoParity {
		return errors.New("certificate: degree-two parity is used but is not a limit")
	}
	if math.IsNaN(c.Beta) || math.IsInf(c.Beta, 0) {
		return fmt.Errorf("certificate: beta %v: must be finite", c.Beta)
	}
	proved, err := c.bound()
	if err != nil {
		return err
	}
	if !(c.Bound >= proved*(1-roundings*unit)) || c.Bound > 1 {
		return fmt.Errorf("certificate: bound %v: the points, weights and multipliers prove %v", c.Bound, proved)
	}
	return nil
}

// certify makes the certificate of an optimum, with α lowered to what the
// degrees allow: the linear programme is content with a little less.
func certify(p Problem, d *design, rho ensembles.Distribution, o optimum) (*Certificate, error) {
	c := &Certificate{
		Rate:            p.Rate,
		Rho:             rho,
		VariableDegrees: p.VariableDegrees,
		StabilityMargin: p.Limits.StabilityMargin,
		DegreeTwoParity: p.Limits.DegreeTwoParity,
		Weights:         o.weights,
		Beta:            o.beta,
	}
	for _, point := range o.points {
		c.Points = append(c.Points, math.Exp(logErasure(point)))
	}
	for i, row := range d.two {
		if row.factor > 0 {
			c.StabilityWeight = o.two[i]
		} else {
			c.ParityWeight = o.two[i]
		}
	}
	c.Alpha = c.largestAlpha()
	bound, err := c.bound()
	if err != nil {
		return nil, err
	}
	c.Bound = bound
	return c, nil
}

package ensembles

import (
	"fmt"
	"math"
	"math/big"
	"slices"
	"sort"
	"strconv"
	"strings"
)

// MaxDegree is the largest degree a Distribution may hold. It keeps a typing
// error (2:0.3,30000000000:0.7) from asking for impossible work.
const MaxDegree = 1_000_000

// SumTolerance is how far the fractions given by a user may miss 1 before
// they are refused: published tables are printed with five digits, so a row
// of ten of them can miss by 5e-5 at worst, but rows that miss by more than
// 1e-6 are better corrected by the person who knows the source.
const SumTolerance = 1e-6

// roundingTolerance is how far a sum of fractions may miss 1 and still count
// as the same distribution: the fractions are then left alone, so that
// writing and reading a profile gives the same bits.
const roundingTolerance = 1e-12

// Term is one degree of a Distribution with the fraction of edges (edge
// perspective) or of nodes (node perspective) that have it.
type Term struct {
	Degree   int     // at least 1
	Fraction float64 // positive; the fractions of a Distribution sum to 1
}

// Distribution is a degree distribution: terms in strictly increasing order
// of degree, with positive fractions that sum to 1. Whether the fractions
// count edges or nodes is the perspective, which the holder states: the
// fields Lambda and Rho of an Ensemble are in edge perspective. Treat a
// Distribution as immutable.
type Distribution []Term

// NewDistribution sorts the terms, drops those of fraction zero, and checks
// them: degrees from 1 to MaxDegree and distinct, fractions finite and not
// negative, their sum within SumTolerance of 1. A sum that misses 1 by more
// than rounding is normalised; Excess tells by how much it missed.
func NewDistribution(terms ...Term) (Distribution, error) {
	d := make(Distribution, 0, len(terms))
	for _, t := range terms {
		if t.Degree < 1 || t.Degree > MaxDegree {
			return nil, fmt.Errorf("degree %d: must be from 1 to %d", t.Degree, MaxDegree)
		}
		if !(t.Fraction >= 0) || math.IsInf(t.Fraction, 0) {
			return nil, fmt.Errorf("fraction %v of degree %d: must be finite and not negative", t.Fraction, t.Degree)
		}
		if t.Fraction > 0 {
			d = append(d, t)
		}
	}
	sort.Slice(d, func(i, j int) bool { return d[i].Degree < d[j].Degree })
	for i := 1; i < len(d); i++ {
		if d[i].Degree == d[i-1].Degree {
			return nil, fmt.Errorf("degree %d: given twice", d[i].Degree)
		}
	}
	excess := Excess(d)
	if !(math.Abs(excess) <= SumTolerance) {
		return nil, fmt.Errorf("fractions sum to %.9g: must sum to 1 within %g", 1+excess, SumTolerance)
	}
	if math.Abs(excess) > roundingTolerance {
		return Normalize(d), nil
	}
	return d, nil
}

// Excess returns the sum of the fractions minus 1.
func Excess(terms []Term) float64 {
	sum := -1.0
	for _, t := range terms {
		sum += t.Fraction
	}
	return sum
}

// Normalize returns the terms, which must be sorted by degree and have
// positive fractions, divided by the sum of their fractions.
func Normalize(terms []Term) Distribution {
	var sum float64
	for _, t := range terms {
		sum += t.Fraction
	}
	d := slices.Clone(terms)
	for i := range d {
		d[i].Fraction /= sum
	}
	return d
}

// Concentrated returns the edge-perspective distribution on one degree, or
// on two neighbouring degrees, whose mean over nodes is mean (at least 1).
func Concentrated(mean float64) Distribution {
	low := math.Floor(mean)
	high := low + 1
	// Nodes: a fraction high-mean has degree low, the rest degree high.
	edges := low * (high - mean) / mean
	if edges >= 1-roundingTolerance {
		return Distribution{{int(low), 1}}
	}
	return Distribution{{int(low), edges}, {int(high), 1 - edges}}
}

// ParseDistribution reads the text form of a distribution, as written by
// String: "2:0.3,3:0.7". Spaces around the numbers are allowed.
func ParseDistribution(text string) (Distribution, error) {
	var terms []Term
	for _, item := range strings.Split(text, ",") {
		degree, fraction, found := strings.Cut(item, ":")
		if !found {
			return nil, fmt.Errorf("%q: must be DEGREE:FRACTION, as in 2:0.3,3:0.7", strings.TrimSpace(item))
		}
		n, err := parseDegree(strings.TrimSpace(degree))
		if err != nil {
			return nil, err
		}
		f, err := strconv.ParseFloat(strings.TrimSpace(fraction), 64)
		if err != nil || strings.ContainsAny(fraction, "_xX") { // which Go knows in numbers
			return nil, fmt.Errorf("fraction %q of degree %d: must be a number from 0 to 1", strings.TrimSpace(fraction), n)
		}
		terms = append(terms, Term{n, f})
	}
	return NewDistribution(terms...)
}

// parseDegree accepts plain decimal digits only: no sign, no leading zero.
func parseDegree(text string) (int, error) {
	n, err := strconv.Atoi(text)
	if err != nil || strconv.Itoa(n) != text || n < 1 || n > MaxDegree {
		return 0, fmt.Errorf("degree %q: must be a whole number from 1 to %d", text, MaxDegree)
	}
	return n, nil
}

// String returns the text form, "2:0.3,3:0.7", which ParseDistribution reads
// back to the same bits.
func (d Distribution) String() string {
	var b strings.Builder
	for i, t := range d {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString(strconv.Itoa(t.Degree))
		b.WriteByte(':')
		b.WriteString(strconv.FormatFloat(t.Fraction, 'g', -1, 64))
	}
	return b.String()
}

// At returns the generating polynomial Σ fᵢ x^(i-1) of an edge-perspective
// distribution: λ(x) or ρ(x). The cost grows with the number of terms, not
// with the degrees.
func (d Distribution) At(x float64) float64 {
	var sum float64
	for _, t := range d {
		sum += t.Fraction * Power(x, t.Degree-1)
	}
	return sum
}

// Derivative returns the derivative of At: Σ (i-1) fᵢ x^(i-2).
func (d Distribution) Derivative(x float64) float64 {
	var sum float64
	for _, t := range d {
		if t.Degree > 1 {
			sum += float64(t.Degree-1) * t.Fraction * Power(x, t.Degree-2)
		}
	}
	return sum
}

// Integral returns ∫₀¹ of At, Σ fᵢ/i: nodes per edge in edge perspective.
func (d Distribution) Integral() float64 {
	var sum float64
	for _, t := range d {
		sum += t.Fraction / float64(t.Degree)
	}
	return sum
}

// Power returns xⁿ for n ≥ 0 by repeated squaring; Power(0, 0) is 1.
func Power(x float64, n int) float64 {
	result := 1.0
	for ; n > 0; n >>= 1 {
		if n&1 == 1 {
			result *= x
		}
		x *= x
	}
	return result
}

// Fraction returns the fraction of the given degree, 0 if it is absent.
func (d Distribution) Fraction(degree int) float64 {
	i, found := slices.BinarySearchFunc(d, degree, func(t Term, n int) int { return t.Degree - n })
	if !found {
		return 0
	}
	return d[i].Fraction
}

// Min returns the smallest degree; d must not be empty.
func (d Distribution) Min() int { return d[0].Degree }

// Max returns the largest degree; d must not be empty.
func (d Distribution) Max() int { return d[len(d)-1].Degree }

// Nodes converts from edge to node perspective: Lᵢ = (λᵢ/i) / Σ λⱼ/j, each
// fraction rounded once.
func (d Distribution) Nodes() Distribution {
	return d.reweigh((*big.Float).Quo)
}

// Edges converts from node to edge perspective: λᵢ = i·Lᵢ / Σ j·Lⱼ, each
// fraction rounded once.
func (d Distribution) Edges() Distribution {
	return d.reweigh((*big.Float).Mul)
}

// reweighPrecision is the precision, in bits, of the quotients and of their
// sum before they are rounded to 53. The result is the double nearest to the
// exact value, or a neighbour only if that lies within 2⁻²⁰⁰ of the middle
// between two. Rational numbers would not err even there, but their
// denominators grow with the number of degrees: seconds for some thousands.
const reweighPrecision = 256

// reweigh applies the operation to every fraction and its degree, and
// normalises.
func (d Distribution) reweigh(operation func(z, fraction, degree *big.Float) *big.Float) Distribution {
	number := func(x float64) *big.Float { return new(big.Float).SetPrec(reweighPrecision).SetFloat64(x) }
	weight := make([]*big.Float, len(d))
	sum := number(0)
	for i, t := range d {
		weight[i] = number(t.Fraction)
		operation(weight[i], weight[i], number(float64(t.Degree)))
		sum.Add(sum, weight[i])
	}
	out := slices.Clone(d)
	for i := range out {
		out[i].Fraction, _ = weight[i].Quo(weight[i], sum).Float64()
	}
	return out
}

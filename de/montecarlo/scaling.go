package montecarlo

import (
	"fmt"
	"math"
	"slices"

	"tannery/ensembles"
)

// Scaling is the law by which the error rates of an ensemble of finite length
// on the BEC fall around the threshold ε* (Amraoui, Montanari, Richardson &
// Urbanke, Finite-length scaling for iteratively decoded LDPC ensembles, IEEE
// Trans. Inf. Theory 55(2), 2009):
//
//	P ≈ Q(√n·(ε* - β·n^(-2/3) - ε)/α).
//
// It holds for the average over the ensemble, as n grows, where decoding
// fails at one critical point of the recursion; small stopping sets, which
// cause an error floor well below the threshold, are not in it.
type Scaling struct {
	Threshold float64 // ε*
	Critical  float64 // x*, the erasure probability of messages where decoding stops
	Alpha     float64 // α
	Beta      float64 // β, with the paper's Ω = 1
	// Residues are the fractions of bits left erased where decoding fails, at
	// erasure probabilities from ε* up to 1 in increasing order.
	Residues []Residue
	// Rival is the erasure probability at which the next tightest point of
	// the recursion becomes critical, +Inf if there is none.
	Rival float64
}

// Residue is the fraction of bits that density evolution leaves erased, ε·L(y)
// at its largest fixed point, at an erasure probability above the threshold.
type Residue struct{ Epsilon, Bits float64 }

// fixedPointTolerance is how far the critical point given may miss the
// conditions that define it. Both ends of it change by less than that when
// threshold and point are known to seven digits.
const fixedPointTolerance = 1e-3

// ScalingOf returns the law of an ensemble from its threshold ε* on the BEC
// and the critical point x* in (0,1). There ε*·λ(y) = x with y = 1-ρ(1-x), and
// the two sides touch: ε*·λ'(y)·ρ'(1-x) = 1. It is an error if the values do
// not fulfil these, as for an ensemble whose threshold is its stability
// bound, where x* = 0 and another law holds. With x̄ = 1-x
//
//	α² = (ρ(x̄)² - ρ(x̄²) + ρ'(x̄)(1 - 2xρ(x̄)) - x̄²ρ'(x̄²)) / (L'(1)λ(y)²ρ'(x̄)²)
//	   + ε²(λ(y)² - λ(y²) - y²λ'(y²)) / (L'(1)λ(y)²).
//
// The paper's β³ contains r₂, here summed to x²ρ'(x̄), and r₃, x³/2 times the
// second derivative of ρ at x̄; with the touching condition inserted it is
//
//	β³ = ε⁴λ''(y)²ρ'(x̄) / (L'(1)²x³(ελ'(y)²ρ''(x̄) - λ''(y)ρ'(x̄))).
func ScalingOf(e ensembles.Ensemble, threshold, critical float64) (Scaling, error) {
	x, eps := critical, threshold
	if !(x > 0 && x < 1 && eps > 0 && eps <= 1) {
		return Scaling{}, fmt.Errorf("scaling law: critical point %v at threshold %v: must lie strictly between 0 and 1", x, eps)
	}
	xbar := 1 - x
	y := 1 - e.Rho.At(xbar)
	lambda, lambda1, lambda2 := e.Lambda.At(y), e.Lambda.Derivative(y), secondDerivative(e.Lambda, y)
	rho, rho1, rho2 := e.Rho.At(xbar), e.Rho.Derivative(xbar), secondDerivative(e.Rho, xbar)
	if math.Abs(eps*lambda/x-1) > fixedPointTolerance || math.Abs(eps*lambda1*rho1-1) > fixedPointTolerance {
		return Scaling{}, fmt.Errorf("scaling law: %v is no critical point at erasure probability %v: ε·λ(1-ρ(1-x))/x is %.6g and ε·λ'(1-ρ(1-x))·ρ'(1-x) is %.6g; both must be 1", x, eps, eps*lambda/x, eps*lambda1*rho1)
	}
	degree := e.MeanVariableDegree() // L'(1)
	checks := (rho*rho - e.Rho.At(xbar*xbar) + rho1*(1-2*x*rho) - xbar*xbar*e.Rho.Derivative(xbar*xbar)) / (degree * lambda * lambda * rho1 * rho1)
	bits := eps * eps * (lambda*lambda - e.Lambda.At(y*y) - y*y*e.Lambda.Derivative(y*y)) / (degree * lambda * lambda)
	beta3 := eps * eps * eps * eps * lambda2 * lambda2 * rho1 / (degree * degree * x * x * x * (eps*lambda1*lambda1*rho2 - lambda2*rho1))
	s := Scaling{
		Threshold: eps, Critical: x,
		Alpha: math.Sqrt(checks + bits), Beta: math.Cbrt(beta3),
		Residues: residues(e, x, eps),
		Rival:    rival(e, x),
	}
	if !(s.Alpha > 0 && s.Beta >= 0) || math.IsInf(s.Beta, 1) {
		return Scaling{}, fmt.Errorf("scaling law: α² = %.3g and β³ = %.3g at the critical point %v: must be positive", checks+bits, beta3, x)
	}
	return s, nil
}

func secondDerivative(d ensembles.Distribution, x float64) (sum float64) {
	for _, t := range d {
		if t.Degree > 2 {
			sum += float64((t.Degree-1)*(t.Degree-2)) * t.Fraction * ensembles.Power(x, t.Degree-3)
		}
	}
	return sum
}

// rival returns the least local minimum of ε(x) = x/λ(1-ρ(1-x)) on (0,1]
// other than the one at critical. The search on a grid may miss a pair of
// extrema closer than its step, which then hardly differ.
func rival(e ensembles.Ensemble, critical float64) float64 {
	const steps = 4000
	at := func(i int) float64 {
		x := float64(i) / steps
		if i == 0 {
			return 1 / (e.Lambda.Fraction(2) * e.Rho.Derivative(1)) // the stability bound
		}
		return x / e.Lambda.At(1-e.Rho.At(1-x))
	}
	least := math.Inf(1)
	for i := range steps + 1 {
		here := at(i)
		valley := (i == 0 || at(i-1) > here) && (i == steps || at(i+1) >= here)
		if valley && math.Abs(float64(i)/steps-critical) > 2.0/steps {
			least = min(least, here)
		}
	}
	return least
}

// residues returns what is left at a sequence of fixed points from the critical
// one to 1, which is evenly spaced in x and so closest in ε where that matters.
// At an erasure probability several x may be fixed points: the largest counts.
func residues(e ensembles.Ensemble, critical, threshold float64) []Residue {
	const steps = 4000
	nodes := e.Lambda.Nodes()
	var all []Residue
	least := math.Inf(1)
	for i := range steps + 1 {
		x := 1 - (1-critical)*float64(i)/steps
		y := 1 - e.Rho.At(1-x)
		if eps := x / e.Lambda.At(y); eps < least {
			least = eps
			all = append(all, Residue{max(eps, threshold), eps * y * nodes.At(y)})
		}
	}
	slices.Reverse(all)
	return all
}

// FrameErrorRate returns the law's probability that a code of the given
// length fails at an erasure probability.
func (s Scaling) FrameErrorRate(length int, epsilon float64) float64 {
	n := float64(length)
	return upperTail(math.Sqrt(n) * (s.Threshold - s.Beta*math.Pow(n, -2.0/3) - epsilon) / s.Alpha)
}

// BitErrorRate returns the law's bit erasure rate after decoding. What
// fluctuates by α/√n is in effect the erasure probability of the frame. Where that
// is above ε*, decoding leaves what density evolution leaves there; where it is at
// most β·n^(-2/3) below, decoding still fails, near the critical point. The mean
// over all frames is, to first order in the fluctuation, the paper's ε*·L(y*)·P;
// but what is left grows from ε* on like a square root, so that at lengths of
// thousands the first order alone is a fifth too low, while this mean was measured
// to be right within a few hundredths (TestRecordedScalingLaw). Above the threshold
// it goes to the value of density evolution as n grows.
func (s Scaling) BitErrorRate(length int, epsilon float64) float64 {
	beyond := func(level float64) float64 { // probability that the frame's is above
		return upperTail(math.Sqrt(float64(length)) * (level - epsilon) / s.Alpha)
	}
	least, last := s.Residues[0], len(s.Residues)-1
	rate := least.Bits * (s.FrameErrorRate(length, epsilon) - beyond(least.Epsilon))
	for i, r := range s.Residues[:last] {
		next := s.Residues[i+1]
		rate += (r.Bits + next.Bits) / 2 * (beyond(r.Epsilon) - beyond(next.Epsilon))
	}
	return rate + s.Residues[last].Bits*beyond(s.Residues[last].Epsilon)
}

// upperTail is Q, the probability that a standard normal variable exceeds z.
func upperTail(z float64) float64 { return math.Erfc(z/math.Sqrt2) / 2 }

// Isolated tells whether the critical point is alone at that length: whether
// decoding, at an erasure probability where the rival point has its median,
// all but surely fails at the critical one.
func (s Scaling) Isolated(length int) bool {
	const deviations = 3 // of the channel's fluctuation, α/√n
	return s.Rival-s.Threshold > deviations*s.Alpha/math.Sqrt(float64(length))
}

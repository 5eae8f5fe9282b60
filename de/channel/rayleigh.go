package channel

import "math"

// Rayleigh is the family of fully interleaved Rayleigh fading channels with
// the channel state known: y = a·x + n with x = ±1, a ≥ 0 of density
// 2a e^(-a²) (so E[a²] = 1), independent from bit to bit and known to the
// receiver, and real noise of standard deviation σ, from 0 to +Inf.
type Rayleigh struct{}

var _ Family = Rayleigh{}

// Name implements Family.
func (Rayleigh) Name() string { return "rayleigh" }

// Parameter implements Family.
func (Rayleigh) Parameter() string { return "sigma" }

// Symbol implements Family.
func (Rayleigh) Symbol() string { return "σ" }

// Range implements Family.
func (Rayleigh) Range() (best, worst float64) { return 0, math.Inf(1) }

// Capacity implements Family.
func (Rayleigh) Capacity(sigma float64) float64 {
	capacity, _ := rayleighInformation(EsN0(sigma))
	return capacity
}

// Inverse implements Family.
func (Rayleigh) Inverse(rate float64) (float64, error) {
	if err := checkRate(rate); err != nil {
		return 0, err
	}
	// With the mean γ = Es/N0: γ/ln 2 ≥ C, as it is for inputs of any kind,
	// and 1/(1+γ) = B ≥ 1-C, as it is for binary channels of any kind.
	gamma := atRate(rate, rate*math.Ln2, rate/(1-rate), rayleighInformation)
	return SigmaFromEsN0(gamma), nil
}

// Bhattacharyya implements Family: 1/(1+1/(2σ²)).
func (Rayleigh) Bhattacharyya(sigma float64) float64 { return 1 / (1 + EsN0(sigma)) }

// ErrorProbability implements Family: σ²/(r(r+1)) with r = √(1+2σ²), which
// is the familiar (1-√(γ/(1+γ)))/2 without its cancellation.
func (Rayleigh) ErrorProbability(sigma float64) float64 {
	gamma := EsN0(sigma)
	if gamma < rayleighUseless {
		return 0.5
	}
	_, alpha, r := rayleighDecay(gamma)
	return alpha / r
}

// Density implements Family.
func (Rayleigh) Density(sigma float64) Density {
	gamma := EsN0(sigma)
	switch {
	case math.IsInf(gamma, 1):
		return certain(1)
	case gamma < rayleighUseless:
		return certain(0)
	}
	beta, alpha, r := rayleighDecay(gamma)
	return Density{
		PDF: func(x float64) float64 {
			return alpha * beta / r * (math.Exp(-alpha*x) + math.Exp(-beta*x))
		},
		End: vanishing * vanishing / 2 / alpha,
	}
}

// SNR implements Family: the mean of Es/N0, 1/(2σ²).
func (Rayleigh) SNR(sigma float64) (snr float64, ok bool) { return EsN0(sigma), true }

// rayleighUseless is the γ below which 1/γ may overflow.
const rayleighUseless = 1e-307

// rayleighDecay describes the density of the LLR at the mean Es/N0 γ. Given
// a, the LLR is Gaussian with mean 2a²/σ² and variance twice that. Averaged
// over a, with ∫₀^∞ exp(-Pa²-Q/a²) da = √(π/P)/2·exp(-2√(PQ)), its density is
//
//	f(x) = σ²/(2r)·exp(x/2 - |x|r/2),  r = √(1+2σ²) = √(1+1/γ).
//
// So right and wrong signs decay as e^(-αx) and e^(-βx) with α = (r-1)/2 and
// β = (r+1)/2 = 1+α; σ² = 2αβ, and the factor is αβ/r.
func rayleighDecay(gamma float64) (beta, alpha, r float64) {
	r = math.Sqrt(1 + 1/gamma)
	beta = (r + 1) / 2
	return beta, 1 / (4 * gamma * beta), r
}

// rayleighInformation returns C and 1-C at the mean Es/N0 γ, from 0 to +Inf,
// each with full relative accuracy. With H(x) = h(1/(1+e^x)) in nats,
//
//	(1-C) ln 2 = αβ/r ∫₀^∞ (e^(-αx) + e^(-βx)) H(x) dx
//	C ln 2     = 1/r ∫₀^∞ (βe^(-αx) + αe^(-βx)) x/(4cosh²(x/2)) dx,
//
// the second by parts, as H' = -x/(4cosh²(x/2)). H and 1/cosh² hold another
// factor e^(-x), so that with t = βx both are ∫ e^(-t) F(t) dt with F smooth.
func rayleighInformation(gamma float64) (capacity, equivocation float64) {
	switch {
	case gamma < rayleighUseless:
		return 0, 1
	case math.IsInf(gamma, 1):
		return 1, 0
	}
	const half = 0.9 // the γ at which C is 1/2, nearly
	beta, alpha, r := rayleighDecay(gamma)
	sum := 0.0
	if gamma < half {
		for _, node := range exponentialRule {
			x := node.t / beta
			e := math.Exp(-x)
			sum += node.weight * (1 + alpha/beta*e) * x / ((1 + e) * (1 + e))
		}
		capacity = sum / (r * math.Ln2)
		return capacity, 1 - capacity
	}
	for _, node := range exponentialRule {
		x := node.t / beta
		e := math.Exp(-x)
		// e^x H(x): ln(1+e)/e tends to 1 where e vanishes
		entropy := x / (1 + e)
		if e > 0 {
			entropy += math.Log1p(e) / e
		} else {
			entropy++
		}
		sum += node.weight * (1 + e) * entropy
	}
	equivocation = alpha / r * sum / math.Ln2
	return 1 - equivocation, equivocation
}

// exponentialRule integrates e^(-t) F(t) over (0,∞) for F analytic in the
// right half plane and of slow growth: the trapezoidal rule in u after
// t = exp(u - e^(-u)) (Takahasi & Mori, Double exponential formulas for
// numerical integration, Publ. RIMS Kyoto Univ. 9(3), 1974). The integrand is
// analytic for |Im u| up to nearly π/2, so the error is about e^(-π²/step).
var exponentialRule = func() (rule []struct{ t, weight float64 }) {
	const step, from, to = 0.2, -3.8, 3.8 // beyond, the weights no longer count
	for i := range int(math.Round((to-from)/step)) + 1 {
		u := from + step*float64(i)
		t := math.Exp(u - math.Exp(-u))
		rule = append(rule, struct{ t, weight float64 }{t, step * math.Exp(-t) * t * (1 + math.Exp(-u))})
	}
	return rule
}()

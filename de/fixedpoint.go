package de

import (
	"math"

	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// fixedPoints finds fixed points of density evolution where it cannot reach
// them by itself: in the middle of a tunnel. The Bhattacharyya parameter B of
// the messages is held and the channel floats: after the check nodes, the
// channel is taken that brings B back to where it was. At variable nodes B
// multiplies, so with C the parameter of the messages from check nodes that
// channel's own is B/λ(C). What would lead out of the tunnel is thereby shut
// off, and what is left settles quickly. (Holding a functional of the density
// and letting the channel float is how Méasson, Montanari, Richardson &
// Urbanke trace EBP GEXIT curves: The generalized area theorem and some of its
// consequences, IEEE Trans. Inf. Theory 55(11), 2009; they hold the entropy.)
//
// A channel on which a fixed point exists, and every worse one, fails: an
// evolution begins with messages worse than the fixed point's, and stays so
// (density evolution preserves degradation: Richardson & Urbanke, Modern Coding
// Theory, 2008, chapter 4).
type fixedPoints struct {
	ensemble ensembles.Ensemble
	family   channel.Family
	check    *density.CheckNode
	variable *density.VariableNode
	nearby   nearby

	checks, channel, next *density.Density // working space
	iterations            int
}

const (
	// fixedPointSteps ends an iteration that does not settle.
	fixedPointSteps = 400
	// steadyRatio is by how much the ratio of successive changes may vary for
	// the error to count as one geometric sequence, which is then summed.
	steadyRatio = 0.15
)

func newFixedPoints(e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter float64) *fixedPoints {
	p := &fixedPoints{
		ensemble: e,
		family:   f,
		check:    g.NewCheckNode(e.Rho),
		nearby:   nearby{family: f, grid: g},
		checks:   g.NewDensity(),
		channel:  g.NewDensity(),
		next:     g.NewDensity(),
	}
	p.nearby.interpolate(p.channel, parameter)
	p.variable = g.NewVariableNode(e.Lambda, p.channel)
	return p
}

// settle takes messages to the fixed point at which their Bhattacharyya
// parameter is b. It returns the channel parameter there and how far that may
// be off, at most tolerance times itself if the iteration settled; infinite
// where there is none in the family.
func (p *fixedPoints) settle(messages *density.Density, b, tolerance float64) (parameter, error float64) {
	var recent []float64 // parameters of successive iterations
	error = math.Inf(1)
	for range fixedPointSteps {
		p.check.Apply(p.checks, messages)
		need := b / p.ensemble.Lambda.At(p.checks.Bhattacharyya())
		if !(need < 1) {
			return math.Inf(1), math.Inf(1)
		}
		parameter = channel.ParameterAtBhattacharyya(p.family, need)
		p.nearby.interpolate(p.channel, parameter)
		p.variable.SetChannel(p.channel)
		p.variable.Apply(p.next, p.checks)
		p.iterations++
		recent = append(recent, parameter)
		if n := len(recent); n > 3 {
			ratio := (recent[n-1] - recent[n-2]) / (recent[n-2] - recent[n-3])
			before := (recent[n-2] - recent[n-3]) / (recent[n-3] - recent[n-4])
			error = math.Abs(recent[n-1] - recent[n-2])
			if size := math.Abs(ratio); size < 1 {
				error *= max(1, size/(1-size))
			}
			if !(error > tolerance*parameter) {
				messages.Copy(p.next)
				break
			}
			if ratio < 1 && math.Abs(ratio-before) < steadyRatio*math.Abs(ratio) {
				// One geometric sequence: on to its limit.
				w := 1 / (1 - ratio)
				messages.Combine([]float64{1 - w, w}, []*density.Density{messages, p.next})
				recent = recent[:0]
				continue
			}
		}
		messages.Copy(p.next)
	}
	return parameter, error
}

package de

import (
	"math"
	"slices"

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
// off, and what is left settles, quickly with Anderson's acceleration.
// (Holding a functional of the density and letting the channel float is how
// Méasson, Montanari, Richardson & Urbanke trace EBP GEXIT curves: The
// generalized area theorem and some of its consequences, IEEE Trans. Inf.
// Theory 55(11), 2009; they hold the entropy.)
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

	known, erased         *density.Density // messages of parameter 0 and 1
	checks, channel, next *density.Density // working space
	iterations            int
}

const (
	// fixedPointSteps ends an iteration that does not settle.
	fixedPointSteps = 200
	// noiseWindow is over how many iterations it is judged whether rounding
	// is all that still moves the parameter, and noiseLevel how much of it
	// rounding may move. At rate 1/100, where messages say little, it moves
	// about 1e-8.
	noiseWindow = 10
	noiseLevel  = 1e-6
)

func newFixedPoints(e ensembles.Ensemble, g *density.Grid, f channel.Family, parameter float64) *fixedPoints {
	p := &fixedPoints{
		ensemble: e,
		family:   f,
		check:    g.NewCheckNode(e.Rho),
		nearby:   nearby{family: f, grid: g},
		known:    g.NewDensity(),
		erased:   g.Project(channel.BEC{}.Density(1)),
		checks:   g.NewDensity(),
		channel:  g.NewDensity(),
		next:     g.NewDensity(),
	}
	p.nearby.interpolate(p.channel, parameter)
	p.variable = g.NewVariableNode(e.Lambda, p.channel)
	return p
}

// settle takes messages to the fixed point at which their Bhattacharyya
// parameter is b, which they are given at once by erasing some or making some
// certain. It returns the channel parameter there and how far that may be off:
// at most tolerance times itself if the iteration settled, more if rounding
// prevents that; infinite where there is none in the family.
func (p *fixedPoints) settle(messages *density.Density, b, tolerance float64) (parameter, error float64) {
	p.give(messages, b)
	var faster density.Anderson
	var tried []float64 // parameters of successive iterations
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
		tried = append(tried, parameter)
		error = spread(tried, 3)
		if error <= tolerance*parameter {
			messages.Copy(p.next)
			break
		}
		if wide := spread(tried, noiseWindow); wide <= noiseLevel*parameter && wanders(tried[len(tried)-noiseWindow:]) {
			messages.Copy(p.next)
			error = wide
			break
		}
		faster.Next(messages, p.next)
	}
	return parameter, error
}

// give makes the Bhattacharyya parameter of messages b.
func (p *fixedPoints) give(messages *density.Density, b float64) {
	have, extreme := messages.Bhattacharyya(), p.known
	if have < b {
		extreme = p.erased
	}
	share := (b - have) / (extreme.Bhattacharyya() - have)
	messages.Combine([]float64{1 - share, share}, []*density.Density{messages, extreme})
}

// spread returns the difference between the largest and the least of the last
// n values, infinite if there are fewer.
func spread(values []float64, n int) float64 {
	if len(values) < n {
		return math.Inf(1)
	}
	values = values[len(values)-n:]
	return slices.Max(values) - slices.Min(values)
}

// wanders tells whether values go to and fro rather than somewhere.
func wanders(values []float64) bool {
	way := 0.0
	for i := range values[1:] {
		way += math.Abs(values[i+1] - values[i])
	}
	return math.Abs(values[len(values)-1]-values[0]) < way/4
}

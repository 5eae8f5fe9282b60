package density

import (
	"math"
	"testing"

	"tannery/de/channel"
)

// Above the threshold an evolution goes to a fixed point by itself, only more
// slowly.
func TestAnderson(t *testing.T) {
	const before, steps, plainSteps = 40, 15, 1000
	g := grid(t, 128)
	noise := g.Project(channel.BIAWGN{}.Density(.883)) // (3,6) decodes up to .881
	check, variable := g.NewCheckNode(distribution(t, "6:1")), g.NewVariableNode(distribution(t, "3:1"), noise)
	image := g.NewDensity()
	evolve := func(x *Density, steps int, next func(x *Density)) *Density {
		x = x.Clone()
		fromChecks := g.NewDensity()
		for range steps {
			check.Apply(fromChecks, x)
			variable.Apply(image, fromChecks)
			next(x)
		}
		return x
	}
	plain := func(x *Density) { x.Copy(image) }
	start := evolve(noise, before, plain)
	want := evolve(start, plainSteps, plain).Entropy()
	var faster Anderson
	got := evolve(start, steps, func(x *Density) { faster.Next(x, image) }).Entropy()
	if d := math.Abs(got - want); d > 1e-9 {
		t.Errorf("entropy %.12g after %d steps, %.12g after %d plain ones", got, steps, want, plainSteps)
	}
	if short := evolve(start, steps, plain).Entropy(); math.Abs(short-want) < 1e-3*want {
		t.Errorf("entropy %.12g after %d plain steps: no test of anything faster", short, steps)
	}
}

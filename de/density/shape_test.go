package density

import (
	"math"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// The error that each number of the standard shape leaves is found by
// exchanging it alone for a more generous one, the steps of the grids staying
// what they are, and evolving ensembles near their thresholds, where errors
// are multiplied.
func TestGridShape(t *testing.T) {
	const points = 512
	type variant struct {
		what      string
		points    int
		change    func(*shape)
		tolerance float64 // of Bhattacharyya parameter and entropy
	}
	variants := []variant{
		{"twice the reach", 2 * points, func(s *shape) { s.reach *= 2; s.cells /= 2 }, 1e-7},
		{"twice the range of u", points, func(s *shape) { s.top *= 2; s.cells *= 2; s.count++ }, 1e-7},
		{"two levels more", points, func(s *shape) { s.count += 2 }, 1e-7},
		{"less damping", points, func(s *shape) { s.damping -= 2 }, 2e-6},
		{"more damping", points, func(s *shape) { s.damping += 2 }, 2e-7},
		{"twice the cells", points, func(s *shape) { s.cells *= 2 }, 1e-7},
		{"twice the points", 2 * points, func(*shape) {}, 2e-7},
	}
	courses := []struct {
		lambda, rho string
		family      channel.Family
		parameter   float64
		roughness   float64 // by which tolerances are multiplied where there are atoms
	}{
		{"3:1", "6:1", channel.BIAWGN{}, .8809, 1},
		{"3:1", "6:1", channel.BSC{}, .0840, 50},
		{"2:0.3,3:0.28,8:0.42", "6:0.23,7:0.77", channel.BIAWGN{}, .949, 1},
		{"3:0.74,123:0.26", "5:0.33,39:0.67", channel.BIAWGN{}, .58, 1},
		{"3:0.6,91:0.4", "54:0.94,55:0.06", channel.BSC{}, .0067, 50},
		{"3:1", "20:1", channel.Rayleigh{}, .28, 1},
	}
	for _, c := range courses {
		evolve := func(points int, s shape) (measures [][2]float64) {
			g := buildGrid(points, s)
			messages, checks := g.Project(c.family.Density(c.parameter)), g.NewDensity()
			v := g.NewVariableNode(distribution(t, c.lambda), messages)
			k := g.NewCheckNode(distribution(t, c.rho))
			for range 30 {
				k.Apply(checks, messages)
				v.Apply(messages, checks)
				measures = append(measures, [2]float64{messages.Bhattacharyya(), messages.Entropy()})
			}
			return measures
		}
		base := evolve(points, standard)
		for _, v := range variants {
			s := standard
			v.change(&s)
			worst := 0.0
			for i, m := range evolve(v.points, s) {
				worst = math.Max(worst, math.Max(math.Abs(m[0]-base[i][0]), math.Abs(m[1]-base[i][1])))
			}
			if !(worst <= v.tolerance*c.roughness) {
				t.Errorf("λ %s, ρ %s, %s %g, %s: changes by %.1g, allowed is %g", c.lambda, c.rho, c.family.Name(), c.parameter, v.what, worst, v.tolerance*c.roughness)
			}
		}
	}
}

// Messages beyond the reach keep their Bhattacharyya parameter.
func TestBeyondReach(t *testing.T) {
	g := grid(t, 128)
	for _, x := range []float64{19.9, 20, 20.1, 25, 40, 100} {
		d := g.Project(channel.Density{Atoms: []channel.Atom{{Magnitude: x, Mass: 1}}})
		want := 1 / math.Cosh(x/2)
		if got := d.Bhattacharyya(); !(math.Abs(got-want) <= 1e-8*want+1e-12) {
			t.Errorf("atom at %g: B = %.12g, want %.12g", x, got, want)
		}
		// A variable node of degree 3 multiplies them.
		out := g.NewDensity()
		g.NewVariableNode(ensembles.Distribution{{Degree: 3, Fraction: 1}}, d).Apply(out, d)
		if got := out.Bhattacharyya(); !(math.Abs(got-want*want*want) <= 1e-16) {
			t.Errorf("atom at %g: three make B = %g, want %g", x, got, want*want*want)
		}
	}
}

package density

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

func grid(t testing.TB, points int) *Grid {
	t.Helper()
	g, err := NewGrid(points)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

func distribution(t testing.TB, text string) ensembles.Distribution {
	t.Helper()
	d, err := ensembles.ParseDistribution(text)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// sweep calls f with channels of every family from almost perfect to almost
// useless.
func sweep(f func(family channel.Family, parameter float64)) {
	for _, name := range channel.Names() {
		family, _ := channel.ByName(name)
		best, worst := family.Range()
		parameters := []float64{best, best + 1e-6, .001, .01, .05, .11, .2, .3, .4, .499999, .5}
		if worst > .5 {
			parameters = append(parameters, .65, .8, .95, 1)
		}
		if worst > 1 {
			parameters = append(parameters, 1.5, 3, 10, 100, 1e4)
		}
		for _, p := range parameters {
			f(family, p)
		}
	}
}

func TestNewGrid(t *testing.T) {
	for _, points := range []int{-1, 0, 1, 32, 63, 65, 96, 1000, 1<<16 + 1, 1 << 17} {
		if g, err := NewGrid(points); err == nil {
			t.Errorf("%d points: got a grid of %d, want an error", points, g.Points())
		}
	}
	for points := MinPoints; points <= 1<<10; points *= 2 {
		if a, b := grid(t, points), grid(t, points); a != b || a.Points() != points {
			t.Errorf("%d points: got %d, the same twice: %v", points, a.Points(), a == b)
		}
	}
}

// A projected channel has the closed forms of its family: mass 1, the
// Bhattacharyya parameter and the entropy to sixth order in the step, the
// error probability to second, or to first if there is an atom near zero.
func TestProject(t *testing.T) {
	for points := 128; points <= 1024; points *= 2 {
		step := standard.reach / float64(points)
		sixth := .02*math.Pow(step, 6) + 2e-9
		first := step / 20
		g := grid(t, points)
		sweep(func(f channel.Family, p float64) {
			d := g.Project(f.Density(p))
			mass := 0.0
			for _, m := range d.Masses {
				mass += m
			}
			for _, c := range []struct {
				what      string
				got, want float64
				tolerance float64
			}{
				{"mass", mass, 1, 1e-13},
				{"Bhattacharyya", d.Bhattacharyya(), f.Bhattacharyya(p), sixth},
				{"entropy", d.Entropy(), 1 - f.Capacity(p), sixth},
				{"error probability", d.ErrorProbability(), f.ErrorProbability(p), first},
			} {
				if !(math.Abs(c.got-c.want) <= c.tolerance) {
					t.Errorf("%d points, %s %g: %s is %.12g, want %.12g (%+.1g)", points, f.Name(), p, c.what, c.got, c.want, c.got-c.want)
				}
			}
		})
	}
}

// The entropy is 1 - Σ Moment(k)/(2k(2k-1))/ln 2 (Richardson & Urbanke, Modern
// Coding Theory, 2008, section 4.1).
func TestMomentsGiveEntropy(t *testing.T) {
	g := grid(t, 256)
	for _, sigma := range []float64{.8, 1, 2} {
		d := g.Project(channel.BIAWGN{}.Density(sigma))
		sum := 1.0
		const terms = 2000
		for k := 1; k <= terms; k++ {
			sum -= d.Moment(k) / float64(2*k*(2*k-1)) / math.Ln2
		}
		// What is left is at most the last moment times Σ 1/(4k²).
		rest := d.Moment(terms) / (4 * terms) / math.Ln2
		if e := d.Entropy(); !(e <= sum+1e-9 && e >= sum-rest-1e-9) {
			t.Errorf("σ = %g: entropy %.12g, by moments %.12g - %.1g", sigma, e, sum, rest)
		}
	}
}

func TestMasses(t *testing.T) {
	g := grid(t, 64)
	d := g.Project(channel.Density{Atoms: []channel.Atom{{Magnitude: 0, Mass: .25}, {Magnitude: 5, Mass: .5}, {Magnitude: math.Inf(1), Mass: .25}}})
	last, sum := -1.0, 0.0
	for x, m := range d.Masses {
		if !(x > last) {
			t.Fatalf("magnitude %g after %g", x, last)
		}
		last = x
		if !math.IsInf(x, 1) {
			sum += m * x
		}
	}
	if !math.IsInf(last, 1) {
		t.Errorf("last magnitude %g, want +Inf", last)
	}
	if math.Abs(sum-2.5) > 1e-12 || d.Erased() != .25 || math.Abs(d.Infinite()-.25) > 1e-14 {
		t.Errorf("mean %g, erased %g, infinite %g", sum, d.Erased(), d.Infinite())
	}
	for x := range d.Masses { // may be left early
		if x > 0 {
			break
		}
	}
	c := d.Clone()
	c.Copy(g.NewDensity())
	if c.Infinite() != 1 || d.Erased() != .25 || c.Grid() != g {
		t.Error("a clone is not independent")
	}
}

// randomDensity mixes erasures, certainty, atoms and a smooth part.
func randomDensity(r *rand.Rand, g *Grid) *Density {
	erased, certain, smooth := r.Float64(), r.Float64(), r.Float64()
	c := channel.Density{}
	total := erased + certain + smooth
	weights := make([]float64, 1+r.IntN(4))
	for i := range weights {
		weights[i] = r.Float64()
		total += weights[i]
	}
	c.Atoms = append(c.Atoms, channel.Atom{Magnitude: 0, Mass: erased / total})
	x := 0.0
	for _, w := range weights {
		x += 4 * r.ExpFloat64()
		c.Atoms = append(c.Atoms, channel.Atom{Magnitude: x, Mass: w / total})
	}
	c.Atoms = append(c.Atoms, channel.Atom{Magnitude: math.Inf(1), Mass: certain / total})
	pdf := channel.BIAWGN{}.Density(.3 + 2*r.Float64())
	c.PDF, c.End = func(x float64) float64 { return smooth / total * pdf.PDF(x) }, pdf.End
	return g.Project(c)
}

// randomDegrees draws up to four degrees from low up, small ones likelier.
func randomDegrees(r *rand.Rand, low, high int) ensembles.Distribution {
	seen := map[int]float64{}
	for range 1 + r.IntN(4) {
		d := low - 1 + int(math.Exp(r.Float64()*math.Log(float64(high-low+1))))
		seen[d] = .05 + r.Float64()
	}
	var terms []ensembles.Term
	for d := low; d <= high; d++ {
		if f, ok := seen[d]; ok {
			terms = append(terms, ensembles.Term{Degree: d, Fraction: f})
		}
	}
	return ensembles.Normalize(terms)
}

// At variable nodes Bhattacharyya parameters multiply, whatever the densities
// and degrees.
func TestVariableNodeBhattacharyya(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for range 100 {
		g := grid(t, 64<<r.IntN(5))
		lambda := randomDegrees(r, 1, 10_000)
		c, in, out := randomDensity(r, g), randomDensity(r, g), g.NewDensity()
		g.NewVariableNode(lambda, c).Apply(out, in)
		want := c.Bhattacharyya() * lambda.At(in.Bhattacharyya())
		if got := out.Bhattacharyya(); !(math.Abs(got-want) <= 1e-13) {
			t.Errorf("λ %s: B = %.15g, want %.15g", lambda, got, want)
		}
	}
}

// The decision on a bit is a variable node of one degree more.
func TestDecisionError(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	for range 50 {
		g := grid(t, 64<<r.IntN(5))
		lambda := randomDegrees(r, 1, 1000)
		c, in, out := randomDensity(r, g), randomDensity(r, g), g.NewDensity()
		v := g.NewVariableNode(lambda, c)
		v.Apply(out, in)
		want := 0.0
		for _, node := range lambda.Nodes() {
			g.NewVariableNode(ensembles.Distribution{{Degree: node.Degree + 1, Fraction: 1}}, c).Apply(out, in)
			want += node.Fraction * out.ErrorProbability()
		}
		if got := v.DecisionError(); !(math.Abs(got-want) <= 1e-13) {
			t.Errorf("λ %s: %.15g, want %.15g", lambda, got, want)
		}
	}
}

// At check nodes moments multiply, to the accuracy of interpolation.
func TestCheckNodeMoments(t *testing.T) {
	for _, accuracy := range []struct {
		points    int
		tolerance float64
	}{{128, 4e-5}, {512, 3e-7}, {2048, 3e-8}} {
		g := grid(t, accuracy.points)
		r := rand.New(rand.NewPCG(9, 10))
		for range 40 {
			rho := randomDegrees(r, 2, 60)
			in, out := randomDensity(r, g), g.NewDensity()
			g.NewCheckNode(rho).Apply(out, in)
			for _, k := range []int{1, 2, 3, 10} {
				got, want := out.Moment(k), rho.At(in.Moment(k))
				if !(math.Abs(got-want) <= accuracy.tolerance) {
					t.Errorf("%d points, ρ %s: moment %d is %.12g, want %.12g (%+.1g)", accuracy.points, rho, k, got, want, got-want)
				}
			}
			if got, least := out.Erased(), 1-rho.At(1-in.Erased()); !(got >= least-1e-14) {
				t.Errorf("%d points, ρ %s: erased %g, want at least %g", accuracy.points, rho, got, least)
			}
		}
	}
}

// Erasures stay erasures: the scalar recursion x ← ε·λ(1-ρ(1-x)) of the BEC
// (Luby et al., IEEE Trans. Inf. Theory 47(2), 2001), for any degrees.
func TestErasures(t *testing.T) {
	r := rand.New(rand.NewPCG(11, 12))
	for range 60 {
		g := grid(t, 64<<r.IntN(4))
		lambda, rho := randomDegrees(r, 2, 10_000), randomDegrees(r, 2, 1000)
		epsilon := r.Float64()
		messages := g.Project(channel.BEC{}.Density(epsilon))
		checks := g.NewDensity()
		v, c := g.NewVariableNode(lambda, messages), g.NewCheckNode(rho)
		x := epsilon
		for step := range 20 {
			c.Apply(checks, messages)
			y := 1 - rho.At(1-x)
			if math.Abs(checks.Erased()-y) > 1e-12 || math.Abs(checks.Infinite()-(1-y)) > 1e-12 {
				t.Fatalf("λ %s, ρ %s, ε %g, step %d: checks %g erased and %g certain, want %g", lambda, rho, epsilon, step, checks.Erased(), checks.Infinite(), y)
			}
			v.Apply(messages, checks)
			x = epsilon * lambda.At(y)
			for what, got := range map[string]float64{
				"erased": messages.Erased(), "Bhattacharyya": messages.Bhattacharyya(),
				"entropy": messages.Entropy(), "errors": 2 * messages.ErrorProbability(),
			} {
				if math.Abs(got-x) > 1e-12 {
					t.Fatalf("λ %s, ρ %s, ε %g, step %d: %s %.15g, want %.15g", lambda, rho, epsilon, step, what, got, x)
				}
			}
		}
	}
}

// Powers of an atom's spectrum stay bounded wherever the atom lies, for every
// check degree: the masses, of which some are slightly negative, add up to little more
// than 1 without their signs, and all measures of the outcome are in range.
func TestCheckNodeStability(t *testing.T) {
	for _, points := range []int{128, 256} {
		g := grid(t, points)
		for degree := 2; degree <= 1000; degree += 1 + degree/3 {
			c := g.NewCheckNode(ensembles.Distribution{{Degree: degree, Fraction: 1}})
			out := g.NewDensity()
			for x := .003; x < 24; x += .0917 {
				in := g.Project(channel.Density{Atoms: []channel.Atom{{Magnitude: x, Mass: 1}}})
				c.Apply(out, in)
				inRange(t, out, .01, func() string { return fmt.Sprintf("%d points, degree %d, atom at %g", points, degree, x) })
			}
		}
	}
}

// An evolution stays in range from any channel on, and Bhattacharyya parameter
// and entropy do not grow.
func TestEvolutionInRange(t *testing.T) {
	r := rand.New(rand.NewPCG(13, 14))
	sweep(func(f channel.Family, p float64) {
		g := grid(t, 128)
		lambda, rho := randomDegrees(r, 2, 10_000), randomDegrees(r, 2, 200)
		messages, checks := g.Project(f.Density(p)), g.NewDensity()
		v, c := g.NewVariableNode(lambda, messages), g.NewCheckNode(rho)
		where := func() string { return fmt.Sprintf("λ %s, ρ %s, %s %g", lambda, rho, f.Name(), p) }
		b := messages.Bhattacharyya()
		for range 30 {
			c.Apply(checks, messages)
			inRange(t, checks, 1e-7, where)
			v.Apply(messages, checks)
			inRange(t, messages, 1e-7, where)
			next := messages.Bhattacharyya()
			if next > b+1e-9 {
				t.Errorf("%s: Bhattacharyya parameter grows from %.12g to %.12g", where(), b, next)
			}
			b = next
		}
	})
}

func inRange(t *testing.T, d *Density, tolerance float64, where func() string) {
	t.Helper()
	for _, m := range []struct {
		what       string
		value, end float64
	}{
		{"Bhattacharyya", d.Bhattacharyya(), 1}, {"entropy", d.Entropy(), 1},
		{"error probability", d.ErrorProbability(), .5},
	} {
		if !(m.value >= -tolerance && m.value <= m.end+tolerance) {
			t.Errorf("%s: %s is %g", where(), m.what, m.value)
		}
	}
	total := 0.0
	for _, m := range d.Masses {
		total += math.Abs(m)
	}
	if !(total <= 2) {
		t.Errorf("%s: the absolute masses sum to %g", where(), total)
	}
}

// The same step on gonum's transforms.
func TestStepAgainstPlain(t *testing.T) {
	r := rand.New(rand.NewPCG(15, 16))
	for range 12 {
		g := grid(t, 64<<r.IntN(5))
		e := ensembles.Ensemble{Lambda: randomDegrees(r, 2, 200), Rho: randomDegrees(r, 2, 60)}
		c := randomDensity(r, g)
		messages, checks, plain, plainChecks := c.Clone(), g.NewDensity(), c.Clone(), g.NewDensity()
		v, k := g.NewVariableNode(e.Lambda, c), g.NewCheckNode(e.Rho)
		p := newPlainStep(g, e, c)
		for range 5 {
			k.Apply(checks, messages)
			v.Apply(messages, checks)
			p.check(plainChecks, plain)
			p.variable(plain, plainChecks)
			for i := range plain.even {
				// Rounding grows by up to e^20 under the damping.
				if d := math.Abs(messages.even[i]-plain.even[i]) * g.bulge[0]; d > 1e-8 {
					t.Fatalf("λ %s, ρ %s, %d points: node %d is off by %g", e.Lambda, e.Rho, g.points, i, d)
				}
			}
		}
	}
}

func TestApplyAllocatesNothing(t *testing.T) {
	g := grid(t, 256)
	messages, checks := g.Project(channel.BIAWGN{}.Density(.9)), g.NewDensity()
	v := g.NewVariableNode(distribution(t, "2:0.3,3:0.3,100:0.4"), messages)
	c := g.NewCheckNode(distribution(t, "8:0.5,9:0.5"))
	if n := testing.AllocsPerRun(20, func() {
		c.Apply(checks, messages)
		v.Apply(messages, checks)
		messages.Bhattacharyya()
		messages.Entropy()
		messages.ErrorProbability()
		v.DecisionError()
	}); n != 0 {
		t.Errorf("%g allocations per step", n)
	}
}

// A density on a grid of twice the points says the same where it is smooth.
func TestRefine(t *testing.T) {
	coarse, fine := grid(t, 128), grid(t, 256)
	for _, sigma := range []float64{.6, .9, 1.5} {
		c := channel.BIAWGN{}.Density(sigma)
		got, want := fine.Refine(coarse.Project(c)), fine.Project(c)
		if d := math.Abs(got.Bhattacharyya() - want.Bhattacharyya()); d > 1e-5 {
			t.Errorf("σ = %g: Bhattacharyya parameters differ by %g", sigma, d)
		}
		if d := math.Abs(got.Entropy() - want.Entropy()); d > 1e-5 {
			t.Errorf("σ = %g: entropies differ by %g", sigma, d)
		}
	}
	erasures := channel.BEC{}.Density(.3)
	if got := fine.Refine(coarse.Project(erasures)); math.Abs(got.Erased()-.3) > 1e-15 || math.Abs(got.Infinite()-.7) > 1e-15 {
		t.Errorf("erasures of .3: %g erased, %g known", got.Erased(), got.Infinite())
	}
}

package optimize

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// gonumBest solves the programme for λ on a fixed grid with gonum, by its
// dual: maximise α + βc subject to α + β/i ≤ Σ wₖ y^(i-1)/x, Σ w ≤ 1, with α
// and β split in two.
func gonumBest(rho ensembles.Distribution, rate float64, largest, points int) (float64, error) {
	rows, columns := largest, points+4+largest // degrees 2…largest, and Σw
	a, b, c := mat.NewDense(rows, columns, nil), make([]float64, rows), make([]float64, columns)
	for k := range points {
		x := (float64(k) + 0.5) / float64(points)
		y := erasureY(rho, x)
		for i := 2; i <= largest; i++ {
			a.Set(i-2, k, -math.Pow(y, float64(i-1))/x)
		}
		a.Set(largest-1, k, 1)
	}
	mean := rho.Integral() / (1 - rate)
	for i := 2; i <= largest; i++ {
		a.Set(i-2, points, 1)
		a.Set(i-2, points+1, -1)
		a.Set(i-2, points+2, 1/float64(i))
		a.Set(i-2, points+3, -1/float64(i))
		a.Set(i-2, points+4+i-2, 1)
	}
	c[points], c[points+1], c[points+2], c[points+3] = -1, 1, -mean, mean
	a.Set(largest-1, columns-1, 1)
	b[largest-1] = 1
	value, _, err := lp.Simplex(c, a, b, 1e-12, nil)
	return -1 / value, err
}

// The threshold of the best λ for a ρ agrees with gonum's to what the grid of
// the latter leaves, from above: it demands less.
func TestBestLambdaAgainstOracle(t *testing.T) {
	compared := 0
	for _, c := range []struct {
		rate    float64
		largest int
		rho     string
	}{
		{0.5, 6, "6:1"}, {0.5, 8, "6:0.6,7:0.4"}, {0.3, 8, "4:0.3,5:0.7"}, {0.75, 10, "14:1"},
		{0.5, 10, "4:0.2,6:0.3,9:0.5"}, {0.9, 12, "40:1"}, {0.2, 5, "3:0.4,4:0.6"},
	} {
		rho, err := ensembles.ParseDistribution(c.rho)
		if err != nil {
			t.Fatal(err)
		}
		p, err := Problem{Channel: channel.BEC{}, Rate: c.rate, VariableDegrees: DegreesUpTo(c.largest)}.sorted()
		if err != nil {
			t.Fatal(err)
		}
		found, err := newErasureDesigner(p).best(context.Background(), rho, p.VariableDegrees, nil)
		if err != nil {
			t.Fatal(err)
		}
		exact, err := (de.ExactEngine{}).Threshold(context.Background(), found.ensemble(), p.Channel)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(exact.Value-found.value) > 1e-10 {
			t.Errorf("%+v: %v by the programme, %v by the exact engine", c, found.value, exact.Value)
		}
		oracle, err := gonumBest(rho, c.rate, c.largest, 600)
		if err != nil {
			continue
		}
		compared++
		if found.value > oracle*(1+1e-9) || found.value < oracle*(1-1e-4) {
			t.Errorf("%+v: %v, oracle on a grid %v", c, found.value, oracle)
		}
	}
	if compared < 5 {
		t.Errorf("only %d compared", compared)
	}
}

// The derivatives by ρ that the multipliers give are those of finite
// differences, for both channels and all rows on λ₂.
func TestCheckGradient(t *testing.T) {
	ctx := context.Background()
	for _, f := range []channel.Family{channel.BEC{}, channel.BIAWGN{}} {
		for _, limits := range []Limits{{}, {StabilityMargin: 0.25}, {DegreeTwoParity: true}} {
			p, err := Problem{Channel: f, Rate: 0.6, VariableDegrees: DegreesUpTo(9), Limits: limits}.sorted()
			if err != nil {
				t.Fatal(err)
			}
			limit, _ := f.Inverse(p.Rate)
			// t of the programme at a fixed channel.
			var designer designer = newErasureDesigner(p)
			sigma := 0.
			if f.Name() == "biawgn" {
				designer, sigma = newGaussianDesigner(p, limit), 0.95*limit
			}
			at := func(rho ensembles.Distribution) (*design, *candidate) {
				c := &candidate{rho: rho, degrees: p.VariableDegrees, value: sigma}
				d := designer.at(c)
				o, err := d.solve(ctx, working{})
				if err != nil {
					t.Fatal(err)
				}
				c.optimum = o
				return d, c
			}
			shifted := func(h float64) ensembles.Distribution {
				return ensembles.Distribution{{Degree: 8, Fraction: 0.4 - h}, {Degree: 9, Fraction: 0.5}, {Degree: 12, Fraction: 0.1 + h}}
			}
			d, c := at(shifted(0))
			g := checkGradient(d, c, p.Rate, []int{8, 12})
			const h = 1e-5
			_, up := at(shifted(h))
			_, down := at(shifted(-h))
			if want, got := (up.t-down.t)/(2*h), g[1]-g[0]; math.Abs(want-got) > 1e-4*math.Abs(want)+1e-7 {
				t.Errorf("%s, %+v: derivative %v, by differences %v", f.Name(), limits, got, want)
			}
		}
	}
}

// The search over the mean check degree finds what a fine sweep finds.
func TestMeanAgainstSweep(t *testing.T) {
	ctx := context.Background()
	for _, c := range []struct {
		f       channel.Family
		rate    float64
		largest int
		checks  []int
	}{
		{channel.BEC{}, 0.5, 4, nil}, {channel.BEC{}, 0.05, 12, nil}, {channel.BEC{}, 0.95, 12, nil},
		{channel.BEC{}, 0.3, 20, []int{3, 5, 9}}, {channel.BIAWGN{}, 0.5, 9, nil}, {channel.BIAWGN{}, 0.8, 15, nil},
	} {
		p, err := Problem{Channel: c.f, Rate: c.rate, VariableDegrees: DegreesUpTo(c.largest), CheckDegrees: c.checks}.sorted()
		if err != nil {
			t.Fatal(err)
		}
		limit, _ := c.f.Inverse(p.Rate)
		var d designer = newErasureDesigner(p)
		if c.f.Name() == "biawgn" {
			d = newGaussianDesigner(p, limit)
		}
		low, high := p.meanRange()
		best, at := 0., 0.
		const steps = 300
		for k := range steps {
			mean := low * math.Pow(high/low, (float64(k)+0.5)/steps)
			if v, err := d.best(ctx, p.rhoAt(mean), p.VariableDegrees, nil); err == nil && v.value > best {
				best, at = v.value, mean
			}
		}
		r := mustSearch(t, p, Settings{})
		if r.Threshold.Value < best*(1-1e-9) {
			t.Errorf("%s, rate %v, largest degree %d: %v found, %v at mean check degree %v", c.f.Name(), c.rate, c.largest, r.Threshold.Value, best, at)
		}
	}
}

// With few distinct degrees the search finds what trying all sets finds, with
// the mean on a grid.
func TestDistinctAgainstAllSets(t *testing.T) {
	ctx := context.Background()
	for _, rate := range []float64{0.4, 0.7} {
		p, err := Problem{
			Channel: channel.BEC{}, Rate: rate, VariableDegrees: DegreesUpTo(12), CheckDegrees: []int{int(4 / (1 - rate)), int(4/(1-rate)) + 1},
			Limits: Limits{DistinctDegrees: 3},
		}.sorted()
		if err != nil {
			t.Fatal(err)
		}
		d := newErasureDesigner(p)
		best := 0.
		low, high := p.meanRange()
		for a := 2; a <= 12; a++ {
			for b := a + 1; b <= 12; b++ {
				for c := b + 1; c <= 12; c++ {
					for k := range 5 {
						v, err := d.best(ctx, p.rhoAt(low+(high-low)*float64(k)/4), []int{a, b, c}, nil)
						if err == nil {
							best = max(best, v.value)
						}
					}
				}
			}
		}
		r := mustSearch(t, p, Settings{})
		checkResult(t, p, r)
		if r.Threshold.Value < best*(1-1e-9) {
			t.Errorf("rate %v: %v found, %v exists", rate, r.Threshold.Value, best)
		}
	}
}

// A limit that is named as binding costs, and one that is not does not.
func TestBindingLimits(t *testing.T) {
	free := Problem{Channel: channel.BEC{}, Rate: 0.5, VariableDegrees: DegreesUpTo(12)}
	best := mustSearch(t, free, Settings{})
	for name, limit := range map[string]func(p *Problem, tight bool){
		limitEdges: func(p *Problem, tight bool) {
			p.Limits.EdgesPerBit = best.Ensemble.EdgesPerBit() * map[bool]float64{true: 0.9, false: 1.1}[tight]
		},
		limitStability: func(p *Problem, tight bool) {
			// With free ρ another local optimum may avoid the margin.
			p.CheckDegrees = []int{7}
			p.Limits.StabilityMargin = map[bool]float64{true: 0.3, false: 1e-12}[tight]
		},
		limitDistinct: func(p *Problem, tight bool) { p.Limits.DistinctDegrees = map[bool]int{true: 3, false: 11}[tight] },
		limitCheck: func(p *Problem, tight bool) {
			p.CheckDegrees = map[bool][]int{true: {7, 8}, false: nil}[tight]
		},
	} {
		for _, tight := range []bool{true, false} {
			p := free
			limit(&p, tight)
			r := mustSearch(t, p, Settings{})
			checkResult(t, p, r)
			if tight && !has(r.Binding, name) || !tight && name != limitStability && has(r.Binding, name) {
				t.Errorf("%s, tight %v: binding %v", name, tight, r.Binding)
			}
			if tight && r.Threshold.Value >= best.Threshold.Value {
				t.Errorf("%s costs nothing: %v, %v without", name, r.Threshold.Value, best.Threshold.Value)
			}
		}
	}
}

func has(list []string, v string) bool {
	for _, x := range list {
		if x == v {
			return true
		}
	}
	return false
}

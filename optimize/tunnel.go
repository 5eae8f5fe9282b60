package optimize

import (
	"context"
	"fmt"
	"math"
	"slices"

	"tannery/ensembles"
	"tannery/optimize/linprog"
)

// Given ρ, the best λ for a channel on which the messages are followed by one
// number solves a linear programme with a row for each point p of the decoding
// tunnel (Luby, Mitzenmacher, Shokrollahi & Spielman, IEEE Trans. Inf. Theory
// 47(2), 2001; Chung, Richardson & Urbanke, same issue):
//
//	minimise t   subject to  Σᵢ λᵢ F(p,i) ≤ t  for all p,
//	                         Σᵢ λᵢ = 1,  Σᵢ λᵢ/i = c,  λ ≥ 0,
//
// where F(p,i) is what a variable node of degree i makes of the messages at
// p, relative to what it must not exceed, and c = ∫ρ/(1-R) fixes the design
// rate. The rows are infinitely many and the columns may be thousands, but few
// of both matter: at the optimum the constraint touches at a few points, and
// as few degrees are used. The programme is solved for some points and
// degrees; then the points where it is violated most and the degrees that
// price out are added, until there are none (Hettich & Kortanek, SIAM Review
// 35(3), 1993, section 7; Dantzig & Wolfe, Operations Research 8, 1960).
type tunnel interface {
	// grid returns points in increasing order, dense enough that a local
	// maximum of Σ λᵢ F(p,i) lies between any three of which the middle one
	// is the highest, and none elsewhere.
	grid() []float64
	// at returns F(p,i).
	at(p float64, degree int) float64
	// column returns F(·,i) on the grid.
	column(degree int) []float64
	// price adds Σₖ wₖ F(pₖ,i) for all degrees, in increasing order, to out.
	price(points, weights []float64, degrees []int, out []float64)
	// byCheck returns the derivatives of Σ λᵢ F(p,i) by ρⱼ for each j given.
	byCheck(p float64, lambda ensembles.Distribution, checks []int) []float64
}

// degreeTwo is a row that limits λ₂ alone: λ₂·factor ≤ t, or λ₂ ≤ bound.
type degreeTwo struct {
	limit   string  // name of the user's limit that it is, "" if none
	factor  float64 // 0 if it is a bound
	bound   float64
	byCheck func(j int) float64 // derivative of the factor or bound by ρⱼ
	byMean  float64             // that by the mean LLR of the channel, where it has one
}

// design is the linear programme for one ρ and channel.
type design struct {
	tunnel
	degrees []int // allowed, increasing
	c       float64
	two     []degreeTwo
}

// optimum is the answer to a design.
type optimum struct {
	t      float64
	lambda ensembles.Distribution
	// The multipliers: weights of the points, which with those of the rows
	// λ₂·factor ≤ t sum to 1, those of the rows on λ₂, α of Σλᵢ = 1 and β of
	// Σλᵢ/i = c, so that α + βc - Σ(two·bound) = t.
	points, weights []float64
	two             []float64
	alpha, beta     float64

	working    working
	programmes int
	pivots     int
}

// working is the set of points and degrees that a design starts with.
type working struct {
	points  []float64
	degrees []int
}

const (
	// exchangeTolerance is the violation, relative to t, up to which points
	// and degrees are left out: twice what the solver allows a row.
	exchangeTolerance = 2e-11
	// exchangeRounds bounds the rounds; a dozen are usual. The certificate
	// tells how good an answer cut off there is.
	exchangeRounds = 120
	// exchangeDegrees bounds the degrees added in a round.
	exchangeDegrees = 8
	// firstPoints is the number of points to start with where nothing better
	// is known, firstRatio the ratio of successive degrees.
	firstPoints = 16
	firstRatio  = 1.3
)

// first returns a working set for a design of which nothing is known.
func (d *design) first() working {
	grid := d.grid()
	var w working
	for k := range firstPoints {
		w.points = append(w.points, grid[(2*k+1)*len(grid)/(2*firstPoints)])
	}
	next := 0.
	for i, degree := range d.degrees {
		if float64(degree) >= next || i == len(d.degrees)-1 {
			w.degrees = append(w.degrees, degree)
			next = firstRatio * float64(degree)
		}
	}
	return w
}

// solve finds the best λ. The error wraps ErrUnreachable if there is none.
func (d *design) solve(ctx context.Context, start working) (optimum, error) {
	if len(start.points) == 0 {
		start = d.first()
	}
	e := &exchange{design: d, program: linprog.Program{Goal: linprog.Minimize}}
	e.program.AddColumn(1)
	e.program.AddRow(linprog.Equal, 1, 0)
	e.program.AddRow(linprog.Equal, d.c, 0)
	for _, row := range d.two {
		if row.factor > 0 {
			e.program.AddRow(linprog.AtMost, 0, -1)
		} else {
			e.program.AddRow(linprog.AtMost, row.bound, 0)
		}
	}
	// The two smallest degrees and the largest make every rate that all of
	// them can, even with λ₂ limited.
	degrees := slices.Concat(start.degrees, d.degrees[:min(2, len(d.degrees))], d.degrees[len(d.degrees)-1:])
	slices.Sort(degrees)
	for _, degree := range slices.Compact(degrees) {
		if _, allowed := slices.BinarySearch(d.degrees, degree); allowed {
			if err := e.addDegree(degree); err != nil {
				return optimum{}, err
			}
		}
	}
	for _, p := range start.points {
		if err := e.addPoint(p); err != nil {
			return optimum{}, err
		}
	}
	for range exchangeRounds {
		if err := ctx.Err(); err != nil {
			return optimum{}, err
		}
		if err := e.resolve(); err != nil {
			return optimum{}, err
		}
		points, err := e.addViolated()
		if err != nil {
			return optimum{}, err
		}
		degrees, err := e.addPriced()
		if err != nil {
			return optimum{}, err
		}
		if !points && !degrees {
			break
		}
	}
	return e.optimum()
}

// exchange is the state of solve.
type exchange struct {
	*design
	program  linprog.Program
	solution linprog.Solution
	degrees  []int     // by column, from column 1
	points   []float64 // by row, from row 2+len(two)
	solved   int
	pivots   int
}

func (e *exchange) firstPoint() int { return 2 + len(e.two) }

func (e *exchange) addDegree(degree int) error {
	column := []float64{1, 1 / float64(degree)}
	for _, row := range e.two {
		v := 0.
		if degree == 2 {
			v = 1
			if row.factor > 0 {
				v = row.factor
			}
		}
		column = append(column, v)
	}
	for _, p := range e.points {
		column = append(column, e.at(p, degree))
	}
	e.degrees = append(e.degrees, degree)
	_, err := e.program.AddColumn(0, column...)
	return err
}

func (e *exchange) addPoint(p float64) error {
	row := []float64{-1}
	for _, degree := range e.degrees {
		row = append(row, e.at(p, degree))
	}
	e.points = append(e.points, p)
	_, err := e.program.AddRow(linprog.AtMost, 0, row...)
	return err
}

func (e *exchange) resolve() error {
	s, err := e.program.Solve()
	if err != nil {
		return err
	}
	e.solved++
	e.pivots += s.Pivots
	if s.Status != linprog.Optimal {
		return fmt.Errorf("the linear programme is %v: %w", s.Status, ErrUnreachable)
	}
	e.solution = s
	return nil
}

// lambda returns the degrees in use, in increasing order, with fractions.
func (e *exchange) lambda() []ensembles.Term {
	var terms []ensembles.Term
	for k, degree := range e.degrees {
		if v := e.solution.X[k+1]; v > 0 {
			terms = append(terms, ensembles.Term{Degree: degree, Fraction: v})
		}
	}
	slices.SortFunc(terms, func(a, b ensembles.Term) int { return a.Degree - b.Degree })
	return terms
}

// addViolated adds the points of local maxima that exceed t.
func (e *exchange) addViolated() (added bool, err error) {
	lambda := e.lambda()
	grid := e.grid()
	height := make([]float64, len(grid))
	for _, term := range lambda {
		for k, v := range e.column(term.Degree) {
			height[k] += term.Fraction * v
		}
	}
	at := func(p float64) float64 {
		sum := 0.
		for _, term := range lambda {
			sum += term.Fraction * e.at(p, term.Degree)
		}
		return sum
	}
	t := e.solution.X[0]
	// A maximum this far below t on the grid is not above it in between.
	const near = 0.01
	for k, h := range height {
		left, right := max(k-1, 0), min(k+1, len(grid)-1)
		if h < t*(1-near) || height[left] > h || height[right] >= h && right > k {
			continue
		}
		p := grid[k]
		if left < k && k < right {
			p, h = maximum(at, grid[left], grid[k], grid[right], height[left], h, height[right])
		}
		if h > t*(1+exchangeTolerance) {
			added = true
			if err := e.addPoint(p); err != nil {
				return false, err
			}
		}
	}
	return added, nil
}

// multipliers reads the weights of points and rows on λ₂, all ≥ 0.
func (e *exchange) multipliers() (points, weights, two []float64) {
	y := e.solution.Dual
	for i := range e.two {
		two = append(two, max(-y[2+i], 0))
	}
	// Points added since the programme was solved have no weight yet.
	for k, v := range y[e.firstPoint():] {
		if v < 0 {
			points, weights = append(points, e.points[k]), append(weights, -v)
		}
	}
	return points, weights, two
}

// addPriced adds degrees whose column prices out: those with
// α + β/i > Σₖ wₖ F(pₖ,i) + the weights on λ₂ if i = 2. Of a run of
// neighbouring degrees the best one is taken.
func (e *exchange) addPriced() (added bool, err error) {
	if len(e.degrees) == len(e.design.degrees) {
		return false, nil
	}
	points, weights, two := e.multipliers()
	gain := e.gains(points, weights, two, e.solution.Dual[0], e.solution.Dual[1], e.design.degrees)
	type priced struct {
		degree int
		gain   float64
	}
	var best []priced
	tolerance := exchangeTolerance * e.solution.X[0]
	for k, g := range gain {
		if g > tolerance && (k == 0 || gain[k-1] <= g) && (k == len(gain)-1 || gain[k+1] < g) {
			best = append(best, priced{e.design.degrees[k], g})
		}
	}
	slices.SortFunc(best, func(a, b priced) int {
		switch {
		case a.gain > b.gain:
			return -1
		case a.gain < b.gain:
			return 1
		}
		return a.degree - b.degree
	})
	for _, b := range best[:min(len(best), exchangeDegrees)] {
		if slices.Contains(e.degrees, b.degree) {
			continue
		}
		added = true
		if err := e.addDegree(b.degree); err != nil {
			return false, err
		}
	}
	return added, nil
}

// gains returns, for degrees in increasing order, α + β/i less what the column
// costs: how fast t falls with λᵢ.
func (d *design) gains(points, weights, two []float64, alpha, beta float64, degrees []int) []float64 {
	gain := make([]float64, len(degrees))
	d.price(points, weights, degrees, gain)
	for k, degree := range degrees {
		gain[k] = alpha + beta/float64(degree) - gain[k]
		if degree == 2 {
			for i, row := range d.two {
				f := row.factor
				if f == 0 {
					f = 1
				}
				gain[k] -= two[i] * f
			}
		}
	}
	return gain
}

// optimum reads the answer. λ is normalised only by rounding: the rows
// Σλᵢ = 1 and Σλᵢ/i = c hold to the last digits.
func (e *exchange) optimum() (optimum, error) {
	o := optimum{
		t:     e.solution.X[0],
		alpha: e.solution.Dual[0], beta: e.solution.Dual[1],
		programmes: e.solved, pivots: e.pivots,
	}
	o.points, o.weights, o.two = e.multipliers()
	var err error
	if o.lambda, err = ensembles.NewDistribution(e.lambda()...); err != nil {
		return o, err
	}
	// What was basic or tight is what a neighbouring design will need.
	for k, degree := range e.degrees {
		if e.solution.Basis.Columns[k+1] == linprog.Basic {
			o.working.degrees = append(o.working.degrees, degree)
		}
	}
	o.working.points = slices.Clone(o.points)
	if len(o.points) == 0 {
		o.working.points = e.points
	}
	return o, nil
}

// maximum finds the local maximum of f between a < b < c, of which b is the
// highest, by successive parabolas with a golden section step where they fail
// (Brent, Algorithms for Minimization without Derivatives, 1973, in short).
func maximum(f func(float64) float64, a, b, c, fa, fb, fc float64) (x, fx float64) {
	const (
		steps     = 40
		golden    = 0.381966011250105 // 2 less the golden ratio
		tolerance = 1e-7              // of the bracket: errors in f are of its square
	)
	smallest := tolerance * (c - a)
	for range steps {
		// The vertex of the parabola through the three points.
		p, q := (b-a)*(fb-fc), (b-c)*(fb-fa)
		next := b - ((b-a)*p-(b-c)*q)/(2*(p-q))
		wide := max(c-b, b-a)
		if !(next > a && next < c) || math.Abs(next-b) > wide/2 {
			next = b + golden*(c-b)
			if b-a > c-b {
				next = b - golden*(b-a)
			}
		}
		if math.Abs(next-b) < smallest {
			// So close to the top that f differs by rounding only.
			next = b + math.Copysign(smallest, c-2*b+a)
			if !(next > a && next < c) {
				break
			}
		}
		fn := f(next)
		switch {
		case fn > fb && next > b:
			a, fa, b, fb = b, fb, next, fn
		case fn > fb:
			c, fc, b, fb = b, fb, next, fn
		case next > b:
			c, fc = next, fn
		default:
			a, fa = next, fn
		}
		if c-a <= 4*smallest {
			break
		}
	}
	return b, fb
}

package linprog

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// proved is what Certify must stay below: relative rounding of sums of a few
// hundred terms, times the conditioning of the hardest instances here.
const proved = 1e-10

// mustSolve solves and certifies.
func mustSolve(t *testing.T, p *Program) Solution {
	t.Helper()
	s, err := p.Solve()
	if err != nil {
		t.Fatalf("%v (%d rows, %d columns)", err, p.Rows(), p.Columns())
	}
	c, err := Certify(p, s)
	if err != nil {
		t.Fatal(err)
	}
	if !(c.Worst() <= proved) {
		t.Fatalf("%v with certificate %+v\n%+v\n%+v", s.Status, c, p, s)
	}
	if s.Status != Optimal && !(c.Gap < 0) {
		t.Fatalf("%v is not proved: %+v", s.Status, c)
	}
	return s
}

func programOf(t testing.TB, goal Goal, cost []float64, a [][]float64, relation []Relation, rhs []float64) *Program {
	t.Helper()
	p := &Program{Goal: goal}
	for _, c := range cost {
		if _, err := p.AddColumn(c); err != nil {
			t.Fatal(err)
		}
	}
	for i, row := range a {
		if _, err := p.AddRow(relation[i], rhs[i], row...); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

func same(relation Relation, n int) []Relation {
	r := make([]Relation, n)
	for i := range r {
		r[i] = relation
	}
	return r
}

// oracle solves the programme with gonum, in standard form with slacks.
func oracle(p *Program) (float64, error) {
	m, n := p.Rows(), p.Columns()
	slacks := 0
	for _, r := range p.relation {
		if r != Equal {
			slacks++
		}
	}
	var bounded []int
	for j, u := range p.upper {
		if !math.IsInf(u, 1) {
			bounded = append(bounded, j)
		}
	}
	a := mat.NewDense(m+len(bounded), n+slacks+len(bounded), nil)
	b := make([]float64, m+len(bounded))
	c := make([]float64, n+slacks+len(bounded))
	for j, v := range p.cost {
		c[j] = v
		if p.Goal == Maximize {
			c[j] = -v
		}
	}
	at := n
	for i, row := range p.a {
		for j, v := range row {
			a.Set(i, j, v)
		}
		b[i] = p.rhs[i]
		switch p.relation[i] {
		case AtMost:
			a.Set(i, at, 1)
			at++
		case AtLeast:
			a.Set(i, at, -1)
			at++
		}
	}
	for e, j := range bounded {
		a.Set(m+e, j, 1)
		a.Set(m+e, at, 1)
		b[m+e] = p.upper[j]
		at++
	}
	value, _, err := lp.Simplex(c, a, b, 0, nil)
	if p.Goal == Maximize {
		value = -value
	}
	return value, err
}

// Worked examples from the literature, recalled.
func TestKnown(t *testing.T) {
	for _, c := range []struct {
		name, source string
		p            *Program
		status       Status
		objective    float64
	}{
		{
			"two products", "computed by hand: x = 2, y = 6",
			programOf(t, Maximize, []float64{3, 5}, [][]float64{{1, 0}, {0, 2}, {3, 2}}, same(AtMost, 3), []float64{4, 12, 18}),
			Optimal, 36,
		},
		{
			"Beale's cycle", "Beale, Naval Research Logistics Quarterly 2, 1955: cycles under the largest coefficient rule",
			programOf(t, Minimize, []float64{-0.75, 150, -0.02, 6},
				[][]float64{{0.25, -60, -0.04, 9}, {0.5, -90, -0.02, 3}, {0, 0, 1, 0}}, same(AtMost, 3), []float64{0, 0, 1}),
			Optimal, -0.05,
		},
		{
			"Chvátal's cycle", "Chvátal, Linear Programming, 1983, chapter 3",
			programOf(t, Maximize, []float64{10, -57, -9, -24},
				[][]float64{{0.5, -5.5, -2.5, 9}, {0.5, -1.5, -0.5, 1}, {1, 0, 0, 0}}, same(AtMost, 3), []float64{0, 0, 1}),
			Optimal, 1,
		},
		{
			"Marshall and Suurballe's cycle", "Naval Research Logistics Quarterly 16, 1969; unbounded along (1, 0, 1, 0)",
			programOf(t, Minimize, []float64{-10, 57, 9, 24},
				[][]float64{{0.5, -5.5, -2.5, 9}, {0.5, -1.5, -0.5, 1}}, same(AtMost, 2), []float64{0, 0}),
			Unbounded, 0,
		},
		{
			"no solution", "by hand: x ≤ 1 and x ≥ 2",
			programOf(t, Maximize, []float64{1}, [][]float64{{1}, {1}}, []Relation{AtMost, AtLeast}, []float64{1, 2}),
			Infeasible, 0,
		},
		{
			"equalities at odds", "by hand",
			programOf(t, Minimize, []float64{1, 1}, [][]float64{{1, 1}, {2, 2}}, same(Equal, 2), []float64{1, 3}),
			Infeasible, 0,
		},
		{
			"a redundant equality", "by hand",
			programOf(t, Minimize, []float64{1, 2}, [][]float64{{1, 1}, {2, 2}}, same(Equal, 2), []float64{1, 2}),
			Optimal, 1,
		},
		{"nothing", "by hand", &Program{}, Optimal, 0},
		{"no rows", "by hand", programOf(t, Maximize, []float64{1}, nil, nil, nil), Unbounded, 0},
		{
			"an empty row that is false", "by hand: 0 ≤ -1",
			programOf(t, Maximize, nil, [][]float64{{}}, same(AtMost, 1), []float64{-1}),
			Infeasible, 0,
		},
	} {
		t.Run(c.name, func(t *testing.T) {
			s := mustSolve(t, c.p)
			if s.Status != c.status {
				t.Fatalf("%v, want %v (%s)", s.Status, c.status, c.source)
			}
			if math.Abs(s.Objective-c.objective) > 1e-12 {
				t.Errorf("objective %v, want %v (%s)", s.Objective, c.objective, c.source)
			}
		})
	}
}

// Klee & Minty, How good is the simplex algorithm?, 1972, in the form of
// Chvátal (1983, chapter 4): the optimum is 100^(n-1), with only the last
// variable nonzero, and the entries span 2n powers of ten.
func TestKleeMinty(t *testing.T) {
	for n := 1; n <= 9; n++ {
		cost, rhs := make([]float64, n), make([]float64, n)
		a := make([][]float64, n)
		for i := range n {
			cost[i] = math.Pow(10, float64(n-1-i))
			rhs[i] = math.Pow(100, float64(i))
			a[i] = make([]float64, n)
			for j := range i {
				a[i][j] = 2 * math.Pow(10, float64(i-j))
			}
			a[i][i] = 1
		}
		s := mustSolve(t, programOf(t, Maximize, cost, a, same(AtMost, n), rhs))
		if want := rhs[n-1]; math.Abs(s.Objective-want) > 1e-12*want {
			t.Errorf("n = %d: %v, want %v", n, s.Objective, want)
		}
	}
}

// random returns a programme of a kind chosen by the generator: feasible or
// not, bounded or not, degenerate (small whole numbers, many zeros), badly
// scaled, with bounds.
func random(t testing.TB, r *rand.Rand) *Program {
	m, n := 1+r.IntN(12), 1+r.IntN(12)
	number := r.NormFloat64
	if r.IntN(2) == 0 {
		number = func() float64 { return float64(r.IntN(5) - 2) }
	}
	scale := func() float64 { return 1 }
	if r.IntN(3) == 0 {
		scale = func() float64 { return math.Pow(10, 6*r.Float64()-3) }
	}
	columnScale := make([]float64, n)
	for j := range columnScale {
		columnScale[j] = scale()
	}
	x := make([]float64, n) // a point that most rows are made to hold at
	for j := range x {
		x[j] = math.Abs(number()) / columnScale[j]
	}
	feasible := r.IntN(5) > 0
	a, relation, rhs := make([][]float64, m), make([]Relation, m), make([]float64, m)
	for i := range a {
		a[i] = make([]float64, n)
		f := scale()
		for j := range a[i] {
			a[i][j] = number() * f * columnScale[j]
			rhs[i] += a[i][j] * x[j]
		}
		relation[i] = Relation(r.IntN(3))
		if !feasible {
			rhs[i] = number() * f
		} else if relation[i] == AtMost {
			rhs[i] += f * math.Abs(number())
		} else if relation[i] == AtLeast {
			rhs[i] -= f * math.Abs(number())
		}
	}
	cost := make([]float64, n)
	for j := range cost {
		cost[j] = number() * columnScale[j]
	}
	p := programOf(t, Goal(r.IntN(2)), cost, a, relation, rhs)
	if r.IntN(2) == 0 {
		for j := range n {
			if err := p.SetUpper(j, 3*r.Float64()/columnScale[j]); err != nil {
				t.Fatal(err)
			}
		}
	}
	return p
}

// degenerate tells whether the programme is of the kind with small whole
// numbers, on which gonum cycles for ever: some entry is a zero.
func degenerate(p *Program) bool {
	for _, row := range p.a {
		for _, v := range row {
			if v == 0 {
				return true
			}
		}
	}
	return false
}

// Every answer must carry its own proof; where gonum finds an optimum of a
// programme that is not degenerate, ours must be the same.
func TestRandomAgainstOracle(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	count := map[Status]int{}
	compared := 0
	for trial := range 3000 {
		p := random(t, r)
		s := mustSolve(t, p)
		count[s.Status]++
		if s.Status != Optimal || degenerate(p) {
			continue
		}
		// gonum wants full row rank and more columns than rows, and says
		// otherwise by an error or a panic: its answers count, not its errors.
		value, err := func() (v float64, err error) {
			defer func() {
				if r := recover(); r != nil {
					err = fmt.Errorf("%v", r)
				}
			}()
			return oracle(p)
		}()
		if err != nil {
			continue
		}
		compared++
		if math.Abs(value-s.Objective) > 1e-8*(1+math.Abs(value)) {
			t.Fatalf("trial %d: %v, oracle %v", trial, s.Objective, value)
		}
	}
	t.Logf("%v, %d compared", count, compared)
	if compared < 300 || count[Infeasible] < 100 || count[Unbounded] < 100 {
		t.Errorf("too few of a kind: %v, %d compared", count, compared)
	}
}

// Whatever is changed, the answer from the last basis must be that from none.
func TestWarmStart(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for trial := range 400 {
		p := random(t, r)
		mustSolve(t, p)
		for range 6 {
			m, n := p.Rows(), p.Columns()
			var err error
			switch r.IntN(6) {
			case 0, 1:
				row := make([]float64, n)
				for j := range row {
					row[j] = r.NormFloat64()
				}
				_, err = p.AddRow(Relation(r.IntN(3)), r.NormFloat64(), row...)
			case 2:
				column := make([]float64, m)
				for i := range column {
					column[i] = r.NormFloat64()
				}
				_, err = p.AddColumn(r.NormFloat64(), column...)
			case 3:
				err = p.SetCost(r.IntN(n), r.NormFloat64())
			case 4:
				err = p.SetRHS(r.IntN(m), r.NormFloat64())
			case 5:
				if r.IntN(2) == 0 {
					p.Goal = 1 - p.Goal
				} else {
					err = p.SetCoefficient(r.IntN(m), r.IntN(n), r.NormFloat64())
				}
			}
			if err != nil {
				t.Fatal(err)
			}
			warm := mustSolve(t, p)
			cold := programOf(t, p.Goal, p.cost, p.a, p.relation, p.rhs)
			for j, u := range p.upper {
				cold.SetUpper(j, u)
			}
			s := mustSolve(t, cold)
			if s.Status != warm.Status && !(s.Status != Optimal && warm.Status != Optimal) {
				t.Fatalf("trial %d: %v from the last basis, %v from none", trial, warm.Status, s.Status)
			}
			if s.Status == Optimal && math.Abs(s.Objective-warm.Objective) > 1e-8*(1+math.Abs(s.Objective)) {
				t.Fatalf("trial %d: %v from the last basis, %v from none", trial, warm.Objective, s.Objective)
			}
			if err := cold.StartFrom(warm.Basis); err != nil {
				t.Fatal(err)
			}
			if again := mustSolve(t, cold); again.Status == Optimal && again.Pivots > 2 {
				t.Fatalf("trial %d: %d pivots from an optimal basis", trial, again.Pivots)
			}
		}
	}
}

// The multipliers are derivatives of the objective by the right sides.
func TestDualIsDerivative(t *testing.T) {
	p := programOf(t, Maximize, []float64{3, 5}, [][]float64{{1, 0}, {0, 2}, {3, 2}}, same(AtMost, 3), []float64{4, 12, 18})
	s := mustSolve(t, p)
	for i, b := range []float64{4, 12, 18} {
		if err := p.SetRHS(i, b+0.01); err != nil {
			t.Fatal(err)
		}
		moved := mustSolve(t, p)
		if got := (moved.Objective - s.Objective) / 0.01; math.Abs(got-s.Dual[i]) > 1e-9 {
			t.Errorf("row %d: multiplier %v, derivative %v", i, s.Dual[i], got)
		}
		if err := p.SetRHS(i, b); err != nil {
			t.Fatal(err)
		}
	}
}

// A certificate must not confirm what has been tampered with.
func TestTamperedIsFound(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	seen := 0
	for range 300 {
		p := random(t, r)
		s := mustSolve(t, p)
		if s.Status != Optimal || s.Objective == 0 {
			continue
		}
		seen++
		j := 0
		for math.Abs(p.cost[j]*s.X[j]) < 1e-3*math.Abs(s.Objective) {
			j++
		}
		s.X[j] *= 1 + 1e-4
		if c, err := Certify(p, s); err != nil || c.Worst() < 1e-9 {
			t.Fatalf("certificate %+v, %v of a wrong answer", c, err)
		}
	}
	if seen < 50 {
		t.Errorf("only %d seen", seen)
	}
}

func TestMisuse(t *testing.T) {
	p := programOf(t, Maximize, []float64{1, 1}, [][]float64{{1, 1}}, same(AtMost, 1), []float64{1})
	attempt := func(_ int, err error) error { return err }
	for name, err := range map[string]error{
		"short row":         attempt(p.AddRow(AtMost, 1, 1)),
		"long column":       attempt(p.AddColumn(1, 1, 2)),
		"NaN cost":          attempt(p.AddColumn(math.NaN(), 1)),
		"infinite entry":    attempt(p.AddRow(AtMost, 1, math.Inf(1), 0)),
		"infinite side":     p.SetRHS(0, math.Inf(1)),
		"unknown relation":  attempt(p.AddRow(Relation(7), 1, 1, 1)),
		"no such column":    p.SetCost(2, 1),
		"no such row":       p.SetRHS(-1, 1),
		"negative bound":    p.SetUpper(0, -1),
		"NaN coefficient":   p.SetCoefficient(0, 0, math.NaN()),
		"foreign basis":     p.StartFrom(Basis{}),
		"unbalanced basis":  p.StartFrom(Basis{make([]State, 2), make([]State, 1)}),
		"unsettled":         func() error { _, err := Certify(p, Solution{}); return err }(),
		"solution too long": func() error { _, err := Certify(p, Solution{Status: Optimal, X: make([]float64, 3)}); return err }(),
	} {
		if err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if s := mustSolve(t, p); s.Objective != 1 {
		t.Errorf("misuse changed the programme: %v", s.Objective)
	}
}

func ExampleProgram() {
	// Maximise 3x + 5y subject to x ≤ 4, 2y ≤ 12, 3x + 2y ≤ 18.
	var p Program
	p.AddColumn(3)
	p.AddColumn(5)
	p.AddRow(AtMost, 4, 1, 0)
	p.AddRow(AtMost, 12, 0, 2)
	p.AddRow(AtMost, 18, 3, 2)
	s, err := p.Solve()
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(s.Status, s.Objective, s.X, s.Dual)
	// A cut: the answer is repaired, not found anew.
	p.AddRow(AtMost, 7, 1, 1)
	s, _ = p.Solve()
	fmt.Println(s.Status, s.Objective, s.X, s.Pivots)
	// Output:
	// optimal 36 [2 6] [0 1.5 1]
	// optimal 33 [1 6] 1
}

package linprog

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// design returns a programme of the kind this package is for: the best λ on
// the degrees 2 to degrees+1 for a channel with erasure probability epsilon
// and check degree d, maximise Σ λᵢ/i subject to Σ λᵢ = 1 and
// ε Σ λᵢ y^(i-1) ≤ x at evenly spaced x, where y = 1-(1-x)^(d-1)
// (Luby, Mitzenmacher, Shokrollahi & Spielman, IEEE Trans. Inf. Theory 47(2),
// 2001).
func design(t testing.TB, degrees, points, d int, epsilon float64) (*Program, [][]float64, []float64) {
	cost := make([]float64, degrees)
	ones := make([]float64, degrees)
	for j := range cost {
		cost[j], ones[j] = 1/float64(j+2), 1
	}
	a, rhs, relation := [][]float64{ones}, []float64{1}, []Relation{Equal}
	for k := 1; k <= points; k++ {
		x := epsilon * float64(k) / float64(points)
		y := 1 - math.Pow(1-x, float64(d-1))
		row := make([]float64, degrees)
		for j := range row {
			row[j] = epsilon * math.Pow(y, float64(j+1))
		}
		a, rhs, relation = append(a, row), append(rhs, x), append(relation, AtMost)
	}
	return programOf(t, Maximize, cost, a, relation, rhs), a, rhs
}

// gonum's simplex method on the dual programme, minimise μ + Σ xₖwₖ subject
// to μ + Σ aₖᵢwₖ ≥ 1/i with μ split into two, agrees on every instance.
func TestDesignAgainstOracle(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	compared := 0
	for range 60 {
		degrees, points, d := 3+r.IntN(38), 20+r.IntN(380), 4+r.IntN(7)
		epsilon := (0.3 + 0.6*r.Float64()) / float64(d-1) * 2
		p, a, rhs := design(t, degrees, points, d, min(epsilon, 0.9))
		s := mustSolve(t, p)
		if s.Status != Optimal {
			t.Fatalf("%v", s.Status)
		}
		m, n := degrees, len(rhs)
		c, g, b := make([]float64, n+1+m), mat.NewDense(m, n+1+m, nil), make([]float64, m)
		copy(c, rhs)
		c[n] = -1
		for i := range m {
			for k := range n {
				g.Set(i, k, a[k][i])
			}
			g.Set(i, n, -1)
			g.Set(i, n+1+i, -1)
			b[i] = 1 / float64(i+2)
		}
		value, _, err := lp.Simplex(c, g, b, 0, nil)
		if err != nil {
			continue
		}
		compared++
		if math.Abs(value-s.Objective) > 1e-9 {
			t.Errorf("%d degrees, %d points, d = %d, ε = %v: %.12f, oracle %.12f", degrees, points, d, epsilon, s.Objective, value)
		}
	}
	if compared < 40 {
		t.Errorf("only %d compared", compared)
	}
}

func BenchmarkDesignCold(b *testing.B) {
	p, _, _ := design(b, 40, 400, 6, 0.48)
	pivots := 0
	for b.Loop() {
		p.work, p.from = nil, Basis{}
		s, err := p.Solve()
		if err != nil {
			b.Fatal(err)
		}
		pivots = s.Pivots
	}
	b.ReportMetric(float64(pivots), "pivots")
}

// A cost changed: the dictionary is built anew from the basis.
func BenchmarkDesignWarmCost(b *testing.B) {
	p, _, _ := design(b, 40, 400, 6, 0.48)
	p.Solve()
	pivots, k := 0, 0
	for b.Loop() {
		k++
		p.SetCost(5, 1.0/7+1e-3*float64(k%2))
		s, err := p.Solve()
		if err != nil {
			b.Fatal(err)
		}
		pivots += s.Pivots
	}
	b.ReportMetric(float64(pivots)/float64(b.N), "pivots")
}

// A cutting plane: from the optimum of 400 rows to that of 401. What is
// measured includes the solve of the 400 less that of BenchmarkDesignCold.
func BenchmarkDesignWarmRow(b *testing.B) {
	p, a, rhs := design(b, 40, 400, 6, 0.48)
	s, _ := p.Solve()
	worst := 1
	for i := range rhs {
		if s.Dual[i] > 0 && i > 0 {
			worst = i
		}
	}
	pivots := 0
	for b.Loop() {
		b.StopTimer()
		q := programOf(b, Maximize, p.cost, a, p.relation, rhs)
		q.StartFrom(s.Basis)
		q.Solve()
		q.AddRow(AtMost, rhs[worst]*0.999, a[worst]...)
		b.StartTimer()
		again, err := q.Solve()
		if err != nil {
			b.Fatal(err)
		}
		pivots += again.Pivots
	}
	b.ReportMetric(float64(pivots)/float64(b.N), "pivots")
}

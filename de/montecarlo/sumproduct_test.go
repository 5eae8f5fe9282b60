package montecarlo

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"tannery/ensembles"
	"tannery/ensembles/tanner"
)

func regularGraph(t testing.TB, dv, dc, length int, s tanner.Settings) *tanner.Graph {
	t.Helper()
	g, err := tanner.Build(context.Background(), ensembles.Realization{
		Length: length, Checks: length * dv / dc, Edges: length * dv,
		VariableNodes: ensembles.Counts{{Degree: dv, Nodes: length}},
		CheckNodes:    ensembles.Counts{{Degree: dc, Nodes: length * dv / dc}},
	}, s)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// ruleByDefinition combines messages pairwise by the exact identity
// y = sign·(min + ln(1+e^-(|a|+|b|)) - ln(1+e^-||a|-|b||)), for each edge over
// all the others.
func ruleByDefinition(x []float64) []float64 {
	out := make([]float64, len(x))
	for i := range x {
		y := math.Inf(1)
		for j, b := range x {
			if j == i {
				continue
			}
			sum, difference := math.Abs(y)+math.Abs(b), math.Abs(math.Abs(y)-math.Abs(b))
			m := min(math.Abs(y), math.Abs(b)) + math.Log1p(math.Exp(-sum))
			if !math.IsInf(difference, 1) {
				m -= math.Log1p(math.Exp(-difference))
			}
			y = math.Copysign(max(m, 0), y*b)
		}
		out[i] = min(max(y, -maxLLR), maxLLR)
	}
	return out
}

// ruleError bounds the error of a message in LLR: a unit in the last place of
// a float32 of its size, and the errors of exponential and logarithm, the
// former once for each edge.
func ruleError(y float64, degree int) float64 {
	return math.Abs(y)*0x1p-23 + logarithmError + float64(degree)*(exponentialError+1e-14)
}

func TestCheckRuleAgainstDefinition(t *testing.T) {
	random := rand.New(rand.NewPCG(6, 2))
	for i := range 5000 {
		degree := 1 + random.IntN(40)
		if i%2500 == 0 {
			degree = 1200 // beyond the range of products without rescaling
		}
		scale := math.Exp(random.Float64()*10 - 5)
		exact, x := make([]float64, degree), make([]float32, degree)
		for i := range x {
			x[i] = float32(scale * random.NormFloat64() / math.Ln2)
			exact[i] = min(max(float64(x[i])*math.Ln2, -maxLLR), maxLLR)
		}
		want := ruleByDefinition(exact)
		newCheckRule(degree).apply(x)
		for i, y := range x {
			if off := math.Abs(float64(y)*math.Ln2 - want[i]); !(off <= ruleError(want[i], degree)) {
				t.Fatalf("degree %d, scale %g: message %g, want %g, off by %g", degree, scale, float64(y)*math.Ln2, want[i], off)
			}
		}
	}
}

func TestCheckRuleOfErasures(t *testing.T) {
	x := []float32{3, 0, -7, maxOctaves}
	newCheckRule(4).apply(x)
	if x[0] != 0 || x[2] != 0 || x[3] != 0 || !(x[1] < 0) {
		t.Errorf("messages %v, want exact zeros except at the erased edge", x)
	}
	x = []float32{3, 0, -7, 0}
	newCheckRule(4).apply(x)
	for i, y := range x {
		if y != 0 {
			t.Errorf("message %d with two erasures: %v, want 0", i, y)
		}
	}
}

// On a graph without cycles sum-product gives the exact LLR of every bit: the
// ratio of the probabilities of all codewords in which it is 0 and 1
// (Gallager, Low-Density Parity-Check Codes, 1963).
func TestSumProductIsExactOnTrees(t *testing.T) {
	random := rand.New(rand.NewPCG(6, 3))
	for range 200 {
		// Each check node joins one old variable node and some new ones.
		var edges []tanner.Edge
		n := 1
		checks := 1 + random.IntN(4)
		for c := range checks {
			edges = append(edges, tanner.Edge{Variable: int32(random.IntN(n)), Check: int32(c)})
			for range 1 + random.IntN(3) {
				edges = append(edges, tanner.Edge{Variable: int32(n), Check: int32(c)})
				n++
			}
		}
		g, err := tanner.NewGraph(n, checks, edges)
		if err != nil {
			t.Fatal(err)
		}
		for _, schedule := range []Schedule{Flooding, Layered} {
			s := newSumProduct(g, schedule)
			s.reset(func() float64 { return 3 * random.NormFloat64() })
			for range 2 * checks {
				s.iterate()
			}
			zero, one := make([]float64, n), make([]float64, n)
		words:
			for word := range 1 << n {
				weight := 0.0
				for c := range checks {
					parity := 0
					for _, v := range g.VariablesOf(c) {
						parity ^= word >> v & 1
					}
					if parity != 0 {
						continue words
					}
				}
				for v := range n {
					weight -= float64(word>>v&1) * float64(s.llr[v]) * math.Ln2
				}
				for v := range n {
					if word>>v&1 == 0 {
						zero[v] += math.Exp(weight)
					} else {
						one[v] += math.Exp(weight)
					}
				}
			}
			for v := range n {
				want := math.Log(zero[v] / one[v])
				if have := float64(s.bits[v][s.current]) * math.Ln2; math.Abs(have-want) > 1e-5*(1+math.Abs(want)) {
					t.Fatalf("%s, bit %d of %d: LLR %g, want %g", schedule, v, n, have, want)
				}
			}
		}
	}
}

// Sending another codeword flips the signs of the LLRs and of all messages
// and changes nothing else, which is why zeros stand for all codewords.
func TestSumProductIsSymmetric(t *testing.T) {
	g := regularGraph(t, 3, 6, 60, tanner.Settings{Seed: 1})
	word := codeword(t, g)
	for _, schedule := range []Schedule{Flooding, Layered} {
		a, b := newSumProduct(g, schedule), newSumProduct(g, schedule)
		random := rand.New(rand.NewPCG(6, 4))
		a.reset(func() float64 { return 2 + 2*random.NormFloat64() })
		v := -1
		b.reset(func() float64 {
			v++
			if word[v] {
				return -float64(a.llr[v]) * math.Ln2
			}
			return float64(a.llr[v]) * math.Ln2
		})
		for i := range 20 {
			if a.satisfied() != b.satisfied() {
				t.Fatalf("%s: only one of them has found a codeword after %d iterations", schedule, i)
			}
			for v := range word {
				x, y := a.bits[v][a.current], b.bits[v][b.current]
				if word[v] {
					y = -y
				}
				// The conversion of the LLRs may round differently.
				if math.Abs(float64(x-y)) > 1e-3*math.Abs(float64(x))+1e-3 {
					t.Fatalf("%s: bit %d after %d iterations: %v and %v", schedule, v, i, x, y)
				}
			}
			a.iterate()
			b.iterate()
		}
	}
}

// codeword finds a codeword other than zero by elimination.
func codeword(t *testing.T, g *tanner.Graph) []bool {
	t.Helper()
	n := g.Variables()
	rows := make([][]bool, g.Checks())
	for c := range rows {
		rows[c] = make([]bool, n)
		for _, v := range g.VariablesOf(c) {
			rows[c][v] = true
		}
	}
	var leading []int
	for v := range n {
		r := len(leading)
		for c := r; c < len(rows); c++ {
			if rows[c][v] {
				rows[r], rows[c] = rows[c], rows[r]
				for d := range rows {
					if d != r && rows[d][v] {
						for u := range n {
							rows[d][u] = rows[d][u] != rows[r][u]
						}
					}
				}
				leading = append(leading, v)
				break
			}
		}
	}
	word := make([]bool, n)
	isLeading := make([]bool, n)
	for _, v := range leading {
		isLeading[v] = true
	}
	free := 0
	for isLeading[free] {
		free++
	}
	word[free] = true
	for r, v := range leading {
		word[v] = rows[r][free]
	}
	return word
}

func BenchmarkSumProduct(b *testing.B) {
	for _, c := range []struct {
		name     string
		dv, dc   int
		length   int
		schedule Schedule
	}{
		{"3,6/64800/flooding", 3, 6, 64800, Flooding},
		{"3,6/64800/layered", 3, 6, 64800, Layered},
		{"3,30/64800/flooding", 3, 30, 64800, Flooding},
		{"3,6/1000000/flooding", 3, 6, 1_000_000, Flooding},
	} {
		b.Run(c.name, func(b *testing.B) {
			g := regularGraph(b, c.dv, c.dc, c.length, tanner.Settings{Method: tanner.Randomized, Girth: 4})
			s := newSumProduct(g, c.schedule)
			random := rand.New(rand.NewPCG(1, 2))
			s.reset(func() float64 { return 2/(0.9*0.9) + 2/0.9*random.NormFloat64() })
			for b.Loop() {
				s.iterate()
			}
			b.ReportMetric(float64(g.Edges())*float64(b.N)/b.Elapsed().Seconds()/1e6, "Medges/s")
		})
	}
}

// What the memory allows: the traffic of an iteration on a graph too large
// for the caches, messages read and written and variables read, in order.
func BenchmarkMemory(b *testing.B) {
	messages, variables := make([]float32, 1<<25), make([]int32, 1<<25)
	for b.Loop() {
		for i, v := range variables {
			messages[i] += float32(v)
		}
	}
	b.ReportMetric(float64(len(messages))*float64(b.N)/b.Elapsed().Seconds()/1e6, "Medges/s")
}

// What the memory allows a decoder, whose variables lie all over it: an
// iteration on the graph of the largest BenchmarkSumProduct without the check
// rule.
func BenchmarkMemoryScattered(b *testing.B) {
	g := regularGraph(b, 3, 6, 1_000_000, tanner.Settings{Method: tanner.Randomized, Girth: 4})
	s := newSumProduct(g, Flooding)
	var block [blockEdges]float32
	for b.Loop() {
		for first := 0; first < len(s.messages); first += blockEdges {
			end := min(first+blockEdges, len(s.messages))
			for i, v := range s.variables[first:end] {
				block[i] = s.bits[v][0] - s.messages[first+i]
			}
			copy(s.messages[first:end], block[:])
			for i, v := range s.variables[first:end] {
				s.bits[v][1] += block[i]
			}
		}
	}
	b.ReportMetric(float64(g.Edges())*float64(b.N)/b.Elapsed().Seconds()/1e6, "Medges/s")
}

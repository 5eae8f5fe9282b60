package montecarlo

import (
	"math/rand/v2"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles/tanner"
)

// On the BEC sum-product and peeling leave the same bits erased after every
// iteration: the message-passing and the graph-reducing view of one decoder.
func TestPeelingEqualsSumProduct(t *testing.T) {
	g := regularGraph(t, 3, 6, 300, tanner.Settings{Seed: 1, Method: tanner.Randomized, Girth: 4})
	stuck, done := 0, 0
	for i := range 60 {
		epsilon := 0.38 + 0.001*float64(i)
		draw, err := newSource(channel.BEC{}, epsilon)
		if err != nil {
			t.Fatal(err)
		}
		for _, schedule := range []Schedule{Flooding, Layered} {
			s := newSumProduct(g, schedule)
			random := rand.New(rand.NewPCG(7, uint64(i)))
			s.reset(func() float64 { return draw(random) })
			p := newPeeling(g, draw)
			last := int64(-1)
			for limit := 1; ; limit++ {
				s.iterate()
				o, _ := p.trial(rand.New(rand.NewPCG(7, uint64(i))), limit, nil)
				if have := s.errors(); schedule == Flooding && have != o.bitErrors {
					t.Fatalf("ε = %g: %d bits erased after %d iterations of sum-product, %d by peeling", epsilon, have, limit, o.bitErrors)
				}
				if o.bitErrors == last {
					// Layered may be ahead, but ends with the same bits.
					if have := s.errors(); have != o.bitErrors {
						t.Fatalf("ε = %g, %s: %d bits erased at the end, %d by peeling", epsilon, schedule, have, o.bitErrors)
					}
					if last == 0 {
						done++
					} else {
						stuck++
					}
					break
				}
				last = o.bitErrors
			}
		}
	}
	if stuck == 0 || done == 0 {
		t.Errorf("%d decodings got stuck and %d succeeded: the sweep should have both", stuck, done)
	}
}

// Without a limit on iterations peeling ends where it would with a large one.
func TestPeelingWithoutLimit(t *testing.T) {
	g := regularGraph(t, 3, 6, 1200, tanner.Settings{Seed: 1, Method: tanner.Randomized})
	draw, _ := newSource(channel.BEC{}, 0.42)
	p := newPeeling(g, draw)
	for i := range uint64(50) {
		a, _ := p.trial(rand.New(rand.NewPCG(8, i)), 0, nil)
		b, _ := p.trial(rand.New(rand.NewPCG(8, i)), 1_000_000, nil)
		if a != b || a.iterations < 2 {
			t.Errorf("trial %d: %+v without limit, %+v with a large one", i, a, b)
		}
	}
}

func BenchmarkPeeling(b *testing.B) {
	for _, n := range []int{6000, 60000, 600000} {
		b.Run(regularName(n), func(b *testing.B) {
			g := regularGraph(b, 3, 6, n, tanner.Settings{Method: tanner.Randomized, Girth: 4})
			draw, _ := newSource(channel.BEC{}, 0.4)
			p := newPeeling(g, draw)
			random := rand.New(rand.NewPCG(1, 1))
			for b.Loop() {
				p.trial(random, 0, nil)
			}
			b.ReportMetric(b.Elapsed().Seconds()*1e9/float64(b.N)/float64(g.Edges()), "ns/edge")
		})
	}
}

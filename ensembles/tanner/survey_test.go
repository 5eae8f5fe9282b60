package tanner

import (
	"context"
	"math/rand/v2"
	"runtime"
	"slices"
	"testing"
)

// What a survey says is what the search does, also after edges have been
// exchanged.
func TestSurveyAgainstSearch(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 7))
	clear, rest := 0, 0
	for range 30 {
		r := satellite(100 * (1 + random.IntN(20)))
		s, err := layOut(r, false, random)
		if err != nil {
			t.Fatal(err)
		}
		if err := s.scatter(context.Background(), random); err != nil {
			t.Fatal(err)
		}
		p, y := newProbe(s), newSurvey(s)
		for length := int32(4); length <= 10; length += 2 {
			y.take(0, length)
			for range 4 {
				for v := range s.frozen {
					work := y.clear(v)
					if work == 0 {
						rest++
						continue
					}
					clear++
					before := p.work
					if _, _, found := p.cycleAt(v, length); found || p.work-before != work {
						t.Fatalf("length %d, node %d: surveyed as clear in %d steps; cycle found: %v in %d steps", length, v, work, found, p.work-before)
					}
				}
				if a, b := random.Int32N(s.movable()), random.Int32N(s.movable()); s.swappable(a, b) {
					s.swap(a, b)
					p.outdate(y, a, b)
				}
			}
		}
	}
	if clear == 0 || rest == 0 {
		t.Errorf("%d nodes clear and %d not: the sweep should have both", clear, rest)
	}
}

func TestGraphsAreTheSameForAnyNumberOfProcessors(t *testing.T) {
	build := func(processors int) *Graph {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(processors))
		g, err := Build(context.Background(), satellite(20000), Settings{Method: Randomized, Seed: 2})
		if err != nil {
			t.Fatal(err)
		}
		return g
	}
	if a, b := build(1), build(3); !slices.Equal(a.checkVar, b.checkVar) {
		t.Error("one and three processors give different graphs")
	}
}

// Levels of any size fit into the table, whatever size came before.
func TestMeetingsAtAnySize(t *testing.T) {
	f := &cycleFinder{}
	level := make([]step, 5000)
	for i := range level {
		level[i].node = int32(7 * i)
	}
	for n := 0; n <= len(level); n++ {
		if f.meet(level[:n]) {
			t.Fatalf("%d different nodes: one was met twice", n)
		}
	}
	level[4999] = level[123]
	if !f.meet(level) {
		t.Error("a node occurs twice: it was not noticed")
	}
}

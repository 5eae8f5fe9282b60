package optimize

import (
	"context"
	"encoding/json"
	"errors"
	"hash/fnv"
	"slices"
	"strings"
	"testing"

	"tannery/de/channel"
	"tannery/ensembles"
)

// limitedProblem goes through all phases of a search.
func limitedProblem(t testing.TB) Problem {
	t.Helper()
	p := Problem{Channel: channel.BEC{}, Rate: 0.5, VariableDegrees: []int{2, 3, 4, 7}, Limits: Limits{DistinctDegrees: 2}}
	p, err := p.sorted()
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// statesOf returns the states that a search writes.
func statesOf(t testing.TB, p Problem) [][]byte {
	t.Helper()
	var states [][]byte
	r := &run{settings: Settings{Workers: 2, Checkpoint: func(s []byte) { states = append(states, s) }}}
	j := &journey{Format: journeyFormat, Problem: "harbour"}
	for j.Phase != arrived {
		if err := j.advance(t.Context(), p, r); err != nil {
			t.Fatal(err)
		}
	}
	return states
}

// takeUp restores a state. One that is refused leaves all as it was; one that
// is taken can be written and taken again, and worked on: where live, by a
// whole piece of work, else by one that is interrupted at once.
func takeUp(t *testing.T, p Problem, state []byte, live bool) (taken bool) {
	t.Helper()
	j := &journey{Format: journeyFormat, Problem: "harbour"}
	if err := j.restore(state, p); err != nil {
		if !errors.Is(err, ErrCheckpoint) || j.Phase != beginning || j.Best != nil || len(j.Points) > 0 {
			t.Errorf("%s\n%v, %+v", state, err, j)
		}
		for _, word := range []string{"json", "struct", "strconv", "optimize."} {
			if strings.Contains(err.Error(), word) {
				t.Errorf("%s\n%v", state, err)
			}
		}
		return false
	}
	again, err := json.Marshal(j)
	if err != nil {
		t.Fatal(err)
	}
	if err := (&journey{Format: journeyFormat, Problem: "harbour"}).restore(again, p); err != nil {
		t.Errorf("%s\nis taken, but %v once written as\n%s", state, err, again)
	}
	ctx, end := context.WithCancel(t.Context())
	if !live {
		end()
	}
	defer end()
	r := &run{settings: Settings{Workers: 1}}
	j.adopt(p, r, j.Best)
	for _, at := range j.Points {
		j.adopt(p, r, at)
	}
	if j.Phase == arrived {
		return true
	}
	if err := j.advance(ctx, p, r); err != nil && ctx.Err() == nil && !errors.Is(err, ErrUnreachable) {
		t.Errorf("%s\n%v", state, err)
	}
	return true
}

// alterations are what a hostile hand may put in place of a value.
func alterations(value any) []any {
	switch v := value.(type) {
	case float64:
		return []any{-v, v + 1, 2 * v, 0.0, -1.0, 17.0, 1e6, 1e15, 1e300, -1e300, 1e-300, nil}
	case []any:
		return []any{nil, []any{}, append(slices.Clone(v), v...), v[:len(v)/2]}
	case map[string]any:
		return []any{nil, map[string]any{}}
	}
	return []any{nil}
}

// altered calls f with the tree as it is with each of its values altered.
func altered(tree any, at any, set func(any), f func(whole any)) {
	for _, other := range alterations(at) {
		set(other)
		f(tree)
	}
	set(at)
	switch v := at.(type) {
	case []any:
		for i := range v {
			altered(tree, v[i], func(x any) { v[i] = x }, f)
		}
	case map[string]any:
		for k := range v {
			altered(tree, v[k], func(x any) { v[k] = x }, f)
		}
	}
}

// Every state that a search writes is taken up; of each phase, none in which
// one value is altered brings down what takes it up.
func TestAlteredStates(t *testing.T) {
	p := limitedProblem(t)
	byPhase := map[phase][]byte{}
	for _, state := range statesOf(t, p) {
		if !takeUp(t, p, state, false) {
			t.Errorf("not taken up:\n%s", state)
		}
		var j journey
		if err := json.Unmarshal(state, &j); err != nil {
			t.Fatal(err)
		}
		byPhase[j.Phase] = state
	}
	if len(byPhase) < int(arrived-1) {
		t.Errorf("only %d phases", len(byPhase))
	}
	tried, taken := 0, 0
	for _, state := range byPhase {
		var tree any
		if err := json.Unmarshal(state, &tree); err != nil {
			t.Fatal(err)
		}
		altered(tree, tree, func(x any) {}, func(whole any) {
			text, err := json.Marshal(whole)
			if err != nil {
				t.Fatal(err)
			}
			tried++
			if takeUp(t, p, text, tried%499 == 0) {
				taken++
			}
		})
	}
	t.Logf("%d of %d altered states are taken up", taken, tried)
	if taken == 0 || taken == tried {
		t.Errorf("%d of %d altered states are taken up", taken, tried)
	}
}

// The farthest guesses that are taken up cost some runs, not the search.
func TestFarGuesses(t *testing.T) {
	for _, iterations := range []int{0, 4} {
		p := limitedProblem(t)
		p.Limits.Iterations = iterations
		limit, err := p.Channel.Inverse(p.Rate)
		if err != nil {
			t.Fatal(err)
		}
		for guess, want := range map[float64]bool{leastGuess / 2: false, leastGuess: true, 0.1: true, mostGuess: true, 3: false} {
			at := &point{Ensemble: ensembles.Regular(3, 6), Degrees: p.VariableDegrees, Radius: startRadius, Guess: []float64{guess * limit}}
			at.Distance = []float64{startBelow * at.Guess[0]}
			state, err := json.Marshal(journey{Format: journeyFormat, Problem: "harbour", Phase: refining, Points: []*point{at}})
			if err != nil {
				t.Fatal(err)
			}
			if got := takeUp(t, p, state, true); got != want {
				t.Errorf("guess of %v times the limit: taken up %v, want %v", guess, got, want)
			}
		}
	}
}

// What searches of other problems write is taken up, too.
func TestStatesAreTakenUp(t *testing.T) {
	for _, p := range []Problem{
		{Channel: channel.BEC{}, Rate: 0.75, VariableDegrees: []int{2, 3, 9}, CheckDegrees: []int{10, 11, 14}, Limits: Limits{EdgesPerBit: 3.1, DegreeTwoParity: true}},
		{Channel: channel.BIAWGN{}, Also: []channel.Family{channel.BEC{}}, Rate: 0.5, VariableDegrees: []int{2, 4}, Limits: Limits{StabilityMargin: 0.1}},
		{Channel: channel.BIAWGN{}, Rate: 0.5, VariableDegrees: []int{2, 3, 6}, Limits: Limits{Iterations: 3, TargetError: 1e-9, DistinctDegrees: 2}},
		{Channel: channel.BIAWGN{}, Rate: 0.5, VariableDegrees: []int{3}},
		{Channel: channel.BEC{}, Rate: 0.98, VariableDegrees: []int{2, 3, 40}},
	} {
		p, err := p.sorted()
		if err != nil {
			t.Fatal(err)
		}
		for _, state := range statesOf(t, p) {
			if !takeUp(t, p, state, false) {
				j := &journey{Format: journeyFormat, Problem: "harbour"}
				t.Errorf("%+v: %v\n%s", p, j.restore(state, p), state)
				break
			}
		}
	}
}

// FuzzRestore takes up states of any content; a share of those that are taken
// is worked on for real. Its seeds are states of each phase.
func FuzzRestore(f *testing.F) {
	p := limitedProblem(f)
	f.Add([]byte(`{"Format":1,"Problem":"harbour"}`))
	f.Add([]byte("kind: profile"))
	f.Fuzz(func(t *testing.T, state []byte) {
		h := fnv.New32()
		h.Write(state)
		takeUp(t, p, state, h.Sum32()%512 == 0)
	})
}

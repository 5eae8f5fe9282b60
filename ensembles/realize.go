package ensembles

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

const (
	// maxRoundings bounds how many roundings of one side are looked at, the
	// nearest first. It is all of them up to some ten degrees.
	maxRoundings = 1000
	// maxScored bounds how many realizations are scored, the nearest first:
	// scores may cost a millisecond each.
	maxScored = 200
	// From longLength code bits on one node more or less changes the
	// fractions of edges by less than a threshold shows, so that
	// maxScoredLong scores are enough.
	longLength    = 10_000
	maxScoredLong = 120
)

// Realize chooses whole numbers of nodes for a code of the given length.
//
// There are as many checks as bring the rate 1 - checks/length nearest to
// the design rate. The numbers of variable nodes are those of the profile
// rounded down or up. The numbers of check nodes follow from the sockets,
// which must be as many as at the variable nodes: they are those of the
// profile rounded down or up where these match, and otherwise shifted as
// little as possible (see tilted). Both sides use the degrees of the profile
// only, and every degree that deserves at least half a node keeps one where
// possible. Only where no rounding of the variable nodes can be matched in
// this way, as with a single check degree, does a neighbouring check degree
// come in: variable degrees decide the threshold most, so that they are left
// alone.
//
// Among the realizations that are best in these respects the one with the
// greatest score is chosen, such as the decoding threshold of the ensemble
// with exactly these counts. At most maxScored are scored, in order of the
// edges that end at other degrees than in the profile; equal scores leave
// the first. With a nil score it is the first. A score of NaN is the least.
// The outcome depends on nothing else, and is such that a graph without
// repeated edges exists.
func Realize(e Ensemble, length int, score func(Ensemble) float64) (Realization, error) {
	if _, err := New(e.Lambda, e.Rho); err != nil {
		return Realization{}, err
	}
	if length < 1 || length > MaxLength {
		return Realization{}, fmt.Errorf("length %d: must be from 1 to %d", length, MaxLength)
	}
	perBit := e.Rho.Integral() / e.Lambda.Integral() // checks
	checks := int(math.Round(float64(length) * math.Min(perBit, 1)))
	switch {
	case perBit >= 1:
		return Realization{}, fmt.Errorf("design rate %.6g: must be above 0", e.DesignRate())
	case checks < 1 || checks >= length:
		return Realization{}, fmt.Errorf("length %d: design rate %.6g gives %d checks; there must be at least one, and fewer than code bits", length, e.DesignRate(), checks)
	}
	variable, err := fitting(nodesOf(e.Lambda, length), "variable", checks, "checks", 1/perBit, length)
	if err != nil {
		return Realization{}, err
	}
	check, err := fitting(nodesOf(e.Rho, checks), "check", length, "code bits", 1, length)
	if err != nil {
		return Realization{}, err
	}
	candidates := candidatesOf(variable, check, length, checks)
	if len(candidates) == 0 {
		return Realization{}, fmt.Errorf("length %d: no whole numbers of nodes with these degrees make a graph in which no two nodes are joined twice; use a greater length or smaller degrees", length)
	}
	chosen := candidates[0]
	if score != nil {
		chosen = best(candidates, length, score)
	}
	return chosen.realization(length, checks), nil
}

// fitting leaves out the degrees that are larger than the number of nodes on
// the other side; it is an error if one of these deserves a node. perNode is
// the code length per node of the other side.
func fitting(n nodes, kind string, other int, others string, perNode float64, length int) (nodes, error) {
	for i, degree := range n.degree {
		if degree > other && n.target[i] >= deserving {
			largest := n.degree[len(n.degree)-1]
			return nodes{}, fmt.Errorf("length %d: %s degree %d needs as many %s, there are %d; use a length of at least %.0f",
				length, kind, largest, others, other, math.Ceil(float64(largest)*perNode))
		}
	}
	n = n.without(other)
	if len(n.degree) == 0 {
		return nodes{}, fmt.Errorf("length %d: all %s degrees are larger than the number of %s, %d", length, kind, others, other)
	}
	return n, nil
}

// candidate is a realization that may be chosen.
type candidate struct {
	variable, check Counts
	lost            int     // degrees that deserve a node and have none
	foreign         int     // check degrees that are not in the profile
	distance        float64 // edges at other degrees than in the profile
}

func (c candidate) realization(length, checks int) Realization {
	return Realization{Length: length, Checks: checks, Edges: c.variable.Sockets(), VariableNodes: c.variable, CheckNodes: c.check}
}

func (c candidate) compare(d candidate) int {
	return cmp.Or(c.compareKind(d), cmp.Compare(c.distance, d.distance))
}

func (c candidate) compareKind(d candidate) int {
	return cmp.Or(cmp.Compare(c.lost, d.lost), cmp.Compare(c.foreign, d.foreign))
}

// candidatesOf returns the candidates that lose the fewest degrees and, among
// these, have the fewest foreign ones, in order of distance.
func candidatesOf(variable, check nodes, length, checks int) []candidate {
	rounded := map[int][]Counts{} // roundings of the check nodes by their sockets
	for _, count := range check.roundings(checks, maxRoundings) {
		sockets := check.sockets(count)
		rounded[sockets] = append(rounded[sockets], check.counts(count))
	}
	roundings := variable.roundings(length, maxRoundings)
	candidates := combine(variable, check, roundings, func(sockets int) []Counts {
		matches := rounded[sockets]
		if count := check.match(checks, sockets); count != nil {
			matches = append(slices.Clip(matches), check.counts(count))
		}
		for _, count := range check.pairs(checks, sockets) {
			matches = append(slices.Clip(matches), check.counts(count))
		}
		return matches
	})
	// A loss that every rounding of the variable nodes has is no reason to
	// look for other check degrees.
	unavoidable := math.MaxInt
	for _, count := range roundings {
		unavoidable = min(unavoidable, variable.lost(count))
	}
	if len(candidates) == 0 || candidates[0].lost > unavoidable {
		nearest := roundings[:min(maxScored, len(roundings))]
		candidates = append(candidates, combine(variable, check, nearest, func(sockets int) []Counts {
			return check.matchWithNeighbour(checks, sockets, 2)
		})...)
		slices.SortStableFunc(candidates, candidate.compare)
	}
	for i, c := range candidates {
		if c.compareKind(candidates[0]) != 0 {
			return candidates[:i]
		}
	}
	return candidates
}

// combine joins every rounding of the variable nodes with the counts of check
// nodes that match its sockets, and returns those for which a graph exists.
func combine(variable, check nodes, roundings [][]int, match func(sockets int) []Counts) []candidate {
	var candidates []candidate
	matches := map[int][]candidate{}
	for _, count := range roundings {
		sockets := variable.sockets(count)
		known, found := matches[sockets]
		if !found {
			for _, counts := range match(sockets) {
				if !slices.ContainsFunc(known, func(c candidate) bool { return slices.Equal(c.check, counts) }) {
					known = append(known, checkCandidate(check, counts))
				}
			}
			matches[sockets] = known
		}
		for _, c := range known {
			c.variable = variable.counts(count)
			c.lost += variable.lost(count)
			c.distance += variable.distance(count)
			if graphical(c.variable, c.check) {
				candidates = append(candidates, c)
			}
		}
	}
	slices.SortStableFunc(candidates, candidate.compare)
	return candidates
}

func checkCandidate(check nodes, counts Counts) candidate {
	c := candidate{check: counts}
	count := make([]int, len(check.degree))
	for _, n := range counts {
		if i, found := slices.BinarySearch(check.degree, n.Degree); found {
			count[i] = n.Nodes
		} else {
			c.foreign++
			c.distance += float64(n.Degree * n.Nodes)
		}
	}
	c.lost = check.lost(count)
	c.distance += check.distance(count)
	return c
}

// best returns the candidate of greatest score, the first of several.
func best(candidates []candidate, length int, score func(Ensemble) float64) candidate {
	limit := maxScored
	if length > longLength {
		limit = maxScoredLong
	}
	chosen, greatest := candidates[0], math.Inf(-1)
	for _, c := range candidates[:min(limit, len(candidates))] {
		s := score(Ensemble{c.variable.edges(), c.check.edges()})
		if s > greatest {
			chosen, greatest = c, s
		}
	}
	return chosen
}

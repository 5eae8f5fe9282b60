package montecarlo

import (
	"math"

	"tannery/ensembles/tanner"
)

// Schedule is the order in which sum-product messages are updated.
type Schedule string

// The schedules. Flooding updates all messages at once, as density evolution
// assumes; Layered goes check by check and uses what is new at once (Hocevar,
// A reduced complexity decoder architecture via layered decoding of LDPC
// codes, IEEE SiPS 2004), which takes about half the iterations.
const (
	Flooding Schedule = "flooding"
	Layered  Schedule = "layered"
)

// sumProduct decodes by the sum-product algorithm in the LLR domain, with
// messages of float32. A message to a check is the total of its bit less the
// message that came from there, so that only totals and check-to-variable
// messages are stored and one pass over the edges does an iteration.
type sumProduct struct {
	start, variables []int32   // rows of the checks
	llr              []float32 // of the channel, in octaves
	messages         []float32 // from checks to variables, in the order of the rows
	// The LLR of each bit after the last iteration, in octaves, is
	// bits[v][current]; beside it, in the same line of the cache, the other
	// one is in the making.
	bits     [][2]float32
	current  int
	schedule Schedule
	rule     checkRule
	in, out  []float32 // messages in work
}

// blockEdges is how many edges are handled together: enough that fetching
// totals from all over the memory, which waits, overlaps; few enough for the
// nearest cache.
const blockEdges = 1024

func newSumProduct(g *tanner.Graph, schedule Schedule) *sumProduct {
	s := &sumProduct{
		llr:      make([]float32, g.Variables()),
		bits:     make([][2]float32, g.Variables()),
		messages: make([]float32, g.Edges()),
		schedule: schedule,
	}
	s.start, s.variables = g.CheckRows()
	widest := 0
	for c := range g.Checks() {
		widest = max(widest, len(g.VariablesOf(c)))
	}
	s.rule = newCheckRule(widest)
	s.in, s.out = make([]float32, widest), make([]float32, max(widest, blockEdges))
	return s
}

// reset begins a decoding with the LLRs that draw returns, natural
// logarithms, bit by bit.
func (s *sumProduct) reset(draw func() float64) {
	s.current = 0
	for v := range s.llr {
		s.llr[v] = float32(min(max(draw(), -maxLLR), maxLLR) / math.Ln2)
		s.bits[v][0] = s.llr[v]
	}
	clear(s.messages)
}

// iterate does one iteration.
func (s *sumProduct) iterate() {
	if s.schedule == Layered {
		s.iterateLayered()
		return
	}
	current, next := s.current&1, s.current&1^1 // below 2 to the compiler's eye
	for v, x := range s.llr {
		s.bits[v][next] = x
	}
	checks := len(s.start) - 1
	for c := 0; c < checks; {
		first := s.start[c]
		last := c + 1 // at least one check, and as many as fit
		for last < checks && s.start[last+1]-first <= blockEdges {
			last++
		}
		end := s.start[last]
		block, variables, messages := s.out[:end-first], s.variables[first:end], s.messages[first:end]
		for i, v := range variables {
			block[i] = s.bits[v][current] - messages[i]
		}
		for ; c < last; c++ {
			s.rule.apply(block[s.start[c]-first : s.start[c+1]-first])
		}
		copy(messages, block)
		for i, v := range variables {
			s.bits[v][next] += block[i]
		}
	}
	s.current = next
}

func (s *sumProduct) iterateLayered() {
	for c := range len(s.start) - 1 {
		first, end := s.start[c], s.start[c+1]
		variables, messages := s.variables[first:end], s.messages[first:end]
		in, out := s.in[:end-first], s.out[:end-first]
		for i, v := range variables {
			in[i] = s.bits[v][0] - messages[i]
		}
		copy(out, in)
		s.rule.apply(out)
		for i, v := range variables {
			s.bits[v][0] = in[i] + out[i]
		}
		copy(messages, out)
	}
}

// satisfied tells whether the signs of all totals form a codeword and no bit
// is undecided. It stops at the first check that fails, so that it costs
// little before the last iteration.
func (s *sumProduct) satisfied() bool {
	for c := range len(s.start) - 1 {
		parity := false
		for _, v := range s.variables[s.start[c]:s.start[c+1]] {
			t := s.bits[v][s.current]
			if t == 0 {
				return false
			}
			parity = parity != (t < 0)
		}
		if parity {
			return false
		}
	}
	return true
}

// errors counts the bits that are not decided for zero.
func (s *sumProduct) errors() (n int64) {
	for _, b := range s.bits {
		if !(b[s.current] > 0) {
			n++
		}
	}
	return n
}

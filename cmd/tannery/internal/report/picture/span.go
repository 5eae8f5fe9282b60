package picture

import "math"

// span is a range of values.
type span struct {
	low, high float64
	any       bool
}

func (s *span) hold(v float64) {
	if !s.any {
		s.low, s.high, s.any = v, v, true
	}
	s.low, s.high = math.Min(s.low, v), math.Max(s.high, v)
}

// padded returns the range with a share of it added on both sides; a single
// value gets a tenth of itself.
func (s span) padded(share float64) (low, high float64) {
	pad := share * (s.high - s.low)
	if pad <= 1e-9*math.Abs(s.high) {
		pad = math.Max(math.Abs(s.high)/10, 1e-9)
	}
	return s.low - pad, s.high + pad
}

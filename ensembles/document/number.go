package document

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Range is the interval of numbers allowed. Its String tells it in words.
type Range struct {
	Low, High         float64 // may be infinite: numbers are finite anyhow
	OpenLow, OpenHigh bool    // whether the ends themselves are excluded
}

// Finite allows every finite number.
var Finite = Range{Low: math.Inf(-1), High: math.Inf(1)}

// FromTo allows low, high and what lies between.
func FromTo(low, high float64) Range { return Range{Low: low, High: high} }

// Between allows what lies between low and high, without them.
func Between(low, high float64) Range { return Range{low, high, true, true} }

// AtLeast allows low and above.
func AtLeast(low float64) Range { return Range{Low: low, High: math.Inf(1)} }

// Above allows what is greater than low.
func Above(low float64) Range { return Range{Low: low, High: math.Inf(1), OpenLow: true} }

// Contains tells whether x is allowed; NaN and the infinities never are.
func (r Range) Contains(x float64) bool {
	return !math.IsNaN(x) && !math.IsInf(x, 0) &&
		(x > r.Low || x == r.Low && !r.OpenLow) && (x < r.High || x == r.High && !r.OpenHigh)
}

// String returns the range in words, such as "a number above 0 and below 1".
func (r Range) String() string {
	low, high := math.IsInf(r.Low, -1), math.IsInf(r.High, 1)
	if low && high {
		return "a finite number"
	}
	if !low && !high && !r.OpenLow && !r.OpenHigh {
		return fmt.Sprintf("a number from %v to %v", r.Low, r.High)
	}
	var parts []string
	if !low && r.OpenLow {
		parts = append(parts, fmt.Sprintf("above %v", r.Low))
	} else if !low {
		parts = append(parts, fmt.Sprintf("of at least %v", r.Low))
	}
	if !high && r.OpenHigh {
		parts = append(parts, fmt.Sprintf("below %v", r.High))
	} else if !high {
		parts = append(parts, fmt.Sprintf("of at most %v", r.High))
	}
	return "a number " + strings.Join(parts, " and ")
}

// Float returns a finite number within the range, written in decimal, with
// an exponent or without.
func (v Value) Float(r Range) float64 {
	text, ok := v.plain(r.String())
	if !ok {
		return 0
	}
	x, err := ParseFloat(text)
	if err != nil || !r.Contains(x) {
		v.refuse(r.String())
		return 0
	}
	return x
}

// ParseFloat accepts the numbers of JSON, and also a sign of plus and a
// point without digits on one of its sides, as YAML does. Underscores, other
// bases, leading zeros and the names of infinity are refused. The range is that
// of float64.
func ParseFloat(text string) (float64, error) {
	digits := strings.TrimLeft(text, "+-")
	if strings.Trim(text, "0123456789+-.eE") != "" || len(digits) > 1 && digits[0] == '0' && digits[1] >= '0' && digits[1] <= '9' {
		return 0, strconv.ErrSyntax
	}
	return strconv.ParseFloat(text, 64)
}

// Int returns a whole number from low to high, in plain decimal digits:
// neither a fraction, an exponent, another base, a leading zero nor quotes.
func (v Value) Int(low, high int) int {
	allowed := wholeNumber(low, high)
	text, ok := v.plain(allowed)
	if !ok {
		return 0
	}
	n, err := strconv.Atoi(text)
	if err != nil || strconv.Itoa(n) != text || n < low || n > high {
		v.refuse(allowed)
		return 0
	}
	return n
}

// Uint64 returns a whole number from 0 to 2⁶⁴-1, such as a seed, in plain
// decimal digits.
func (v Value) Uint64() uint64 {
	const allowed = "a whole number from 0 to 18446744073709551615"
	text, ok := v.plain(allowed)
	if !ok {
		return 0
	}
	n, err := strconv.ParseUint(text, 10, 64)
	if err != nil || strconv.FormatUint(n, 10) != text {
		v.refuse(allowed)
		return 0
	}
	return n
}

func wholeNumber(low, high int) string {
	switch {
	case low == high:
		return strconv.Itoa(low)
	case high == math.MaxInt:
		return fmt.Sprintf("a whole number of at least %d", low)
	}
	return fmt.Sprintf("a whole number from %d to %d", low, high)
}

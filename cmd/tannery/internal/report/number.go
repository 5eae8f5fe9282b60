package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Rounding for people is kept apart from precision for machines: JSON, CSV
// and YAML carry every digit, these functions only what a reader can use.

// maxDecimals is the largest number of digits after the point in a text.
const maxDecimals = 9

// Fixed returns v with the given number of digits after the point, without
// a minus sign on zero.
func Fixed(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if zero, err := strconv.ParseFloat(s, 64); err == nil && zero == 0 && s[0] == '-' {
		return s[1:]
	}
	return s
}

// Significant returns v with the given number of significant digits, with an
// exponent only where the plain form would be unreadable.
func Significant(v float64, digits int) string {
	if a := math.Abs(v); v != 0 && (a < 1e-4 || a >= 1e9) || math.IsInf(v, 0) || math.IsNaN(v) {
		return strconv.FormatFloat(v, 'g', digits, 64)
	}
	if v == 0 {
		return "0"
	}
	decimals := digits - 1 - int(math.Floor(math.Log10(math.Abs(v))))
	return Fixed(v, max(0, decimals))
}

// Plain returns a number given by the user as short as it can be written.
func Plain(v float64) string {
	if a := math.Abs(v); a != 0 && (a < 1e-4 || a >= 1e15) {
		return strings.Replace(strconv.FormatFloat(v, 'g', -1, 64), "e-0", "e-", 1)
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

// Trimmed returns v with at most the given number of digits after the point,
// without zeros at the end.
func Trimmed(v float64, decimals int) string {
	s := Fixed(v, decimals)
	if strings.Contains(s, ".") {
		s = strings.TrimSuffix(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// WithUncertainty returns "v ± u", v to the decimal place at which u has its
// first digit, u rounded up to that digit.
func WithUncertainty(v, u float64) string {
	if !(u > 0) {
		return Fixed(v, maxDecimals)
	}
	decimals := -int(math.Floor(math.Log10(u)))
	digit := math.Ceil(u*math.Pow10(decimals) - 1e-9)
	if digit >= 10 {
		digit, decimals = 1, decimals-1
	}
	if decimals > maxDecimals {
		digit, decimals = 1, maxDecimals
	}
	if decimals < 0 {
		digit, decimals = digit*math.Pow10(-decimals), 0
	}
	if decimals > 5 {
		return fmt.Sprintf("%s ± %de-%d", Fixed(v, decimals), int(digit), decimals)
	}
	return fmt.Sprintf("%s ± %s", Fixed(v, decimals), Fixed(digit*math.Pow10(-decimals), decimals))
}

// DecimalsAt returns how many digits after the point a value deserves whose
// uncertainty is u, from least to most.
func DecimalsAt(u float64, least, most int) int {
	if !(u > 0) {
		return most
	}
	return min(most, max(least, -int(math.Floor(math.Log10(u)))))
}

// atMost returns a bound for a small number: the power of ten it is below,
// 1e-9 at least.
func atMost(v float64) string {
	exponent := -maxDecimals
	for exponent < 0 && v > math.Pow10(exponent) {
		exponent++
	}
	return fmt.Sprintf("1e%d", exponent)
}

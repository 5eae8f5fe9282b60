package optimize

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Problem says which ensemble is wanted: the one that decodes on the worst
// channel of a family at a given rate, within the limits of a decoder.
type Problem struct {
	// Channel is the family of channels; required.
	Channel channel.Family
	// Also lists further families on which the ensemble must work: that with
	// the worst gap to capacity, in rate, counts. Only QuantizedDesign
	// supports them.
	Also []channel.Family
	// Rate is the design rate in information bits per code bit, strictly
	// between 0 and 1. The ensemble found has this rate up to rounding.
	Rate float64
	// VariableDegrees lists the degrees that variable nodes may have, in any
	// order; required. DegreesUpTo gives the usual list. Degree 1 is allowed
	// but never used by the methods here, as it has no threshold.
	VariableDegrees []int
	// CheckDegrees lists the degrees that check nodes may have, at least 2;
	// nil leaves them free.
	CheckDegrees []int
	// Limits are further limits of the decoder.
	Limits Limits
}

// Limits of a decoder; the zero value sets none.
type Limits struct {
	// EdgesPerBit is the largest mean variable degree, which is the decoder's
	// work per iteration; 0 for no limit.
	EdgesPerBit float64
	// DegreeTwoParity limits the nodes of degree 2 to fewer than the checks,
	// so that they can be joined in a chain instead of cycles, which make
	// codewords of low weight (common practice). For an ensemble it is
	// L₂ ≤ 1-R, that is λ₂ ≤ 2∫ρ.
	DegreeTwoParity bool
	// DistinctDegrees is the largest number of distinct variable degrees; 0
	// for no limit, otherwise at least 1.
	DistinctDegrees int
	// StabilityMargin is the least relative distance from instability,
	// λ₂ρ'(1)·B ≤ 1-StabilityMargin with the Bhattacharyya parameter B of the
	// channel at the threshold; from 0 to below 1.
	StabilityMargin float64
	// Iterations is the number of iterations within which the bit error
	// probability must fall to TargetError; 0 for no limit. Only
	// QuantizedDesign supports it.
	Iterations int
	// TargetError is the bit error probability to reach within Iterations;
	// 0 for DefaultTargetError.
	TargetError float64
}

// DefaultTargetError is the bit error probability that a decoder with a limited
// number of iterations must reach if nothing is said.
const DefaultTargetError = 1e-6

func (p Problem) targetError() float64 {
	if p.Limits.TargetError == 0 {
		return DefaultTargetError
	}
	return p.Limits.TargetError
}

// DegreesUpTo returns the degrees from 2 to largest.
func DegreesUpTo(largest int) []int {
	var degrees []int
	for d := 2; d <= largest; d++ {
		degrees = append(degrees, d)
	}
	return degrees
}

// ErrUnreachable is wrapped by the errors that say that no ensemble meets the
// problem's limits at its rate.
var ErrUnreachable = errors.New("no ensemble within the limits has this rate")

// ErrUnsupported is wrapped by the errors that say that a method cannot do
// what the problem asks.
var ErrUnsupported = errors.New("not supported by this method")

// sorted checks the problem and returns it with its degrees sorted, without
// repetition, and without variable degree 1.
func (p Problem) sorted() (Problem, error) {
	if p.Channel == nil {
		return p, errors.New("channel: must be given")
	}
	if !(p.Rate > 0 && p.Rate < 1) {
		return p, fmt.Errorf("rate %v: must be strictly between 0 and 1", p.Rate)
	}
	var err error
	if p.VariableDegrees, err = sortedDegrees("variable", p.VariableDegrees, 1); err != nil {
		return p, err
	}
	if len(p.VariableDegrees) > 0 && p.VariableDegrees[0] == 1 {
		p.VariableDegrees = p.VariableDegrees[1:]
	}
	if len(p.VariableDegrees) == 0 {
		return p, errors.New("variable degrees: must list at least one degree of 2 or more")
	}
	if p.CheckDegrees, err = sortedDegrees("check", p.CheckDegrees, 2); err != nil {
		return p, err
	}
	l := p.Limits
	switch {
	case !(l.EdgesPerBit >= 0) || math.IsInf(l.EdgesPerBit, 0):
		return p, fmt.Errorf("edges per bit %v: must be positive, or 0 for no limit", l.EdgesPerBit)
	case l.DistinctDegrees < 0:
		return p, fmt.Errorf("distinct degrees %d: must be positive, or 0 for no limit", l.DistinctDegrees)
	case !(l.StabilityMargin >= 0 && l.StabilityMargin < 1):
		return p, fmt.Errorf("stability margin %v: must be from 0 to below 1", l.StabilityMargin)
	case !(l.TargetError >= 0 && l.TargetError < 0.5):
		return p, fmt.Errorf("target error %v: must be from 0 to below 0.5", l.TargetError)
	case l.Iterations < 0:
		return p, fmt.Errorf("iterations %d: must be positive, or 0 for no limit", l.Iterations)
	}
	low, high := p.meanRange()
	if low > high {
		return p, p.unreachable()
	}
	return p, nil
}

func sortedDegrees(which string, degrees []int, least int) ([]int, error) {
	s := slices.Compact(slices.Sorted(slices.Values(degrees)))
	if len(s) > 0 && (s[0] < least || s[len(s)-1] > ensembles.MaxDegree) {
		wrong := s[0]
		if wrong >= least {
			wrong = s[len(s)-1]
		}
		return nil, fmt.Errorf("%s degree %d: must be from %d to %d", which, wrong, least, ensembles.MaxDegree)
	}
	return s, nil
}

// meanRange returns the least and largest mean check degree with which the
// rate can be reached: the mean variable degree is (1-R) times that.
func (p Problem) meanRange() (low, high float64) {
	v := p.VariableDegrees
	largest := float64(v[len(v)-1])
	if l := p.Limits.EdgesPerBit; l > 0 {
		largest = min(largest, l)
	}
	low, high = float64(v[0])/(1-p.Rate), largest/(1-p.Rate)
	least, most := 2., float64(ensembles.MaxDegree)
	if c := p.CheckDegrees; len(c) > 0 {
		least, most = float64(c[0]), float64(c[len(c)-1])
	}
	return widen(max(low, least), min(high, most))
}

// widen lets a range that is empty only by rounding hold one point.
func widen(low, high float64) (float64, float64) {
	if low > high && low <= high*(1+1e-12) {
		return high, high
	}
	return low, high
}

// unreachable says which rates the degrees allow.
func (p Problem) unreachable() error {
	v := p.VariableDegrees
	least, most := float64(v[0]), float64(v[len(v)-1])
	if l := p.Limits.EdgesPerBit; l > 0 {
		if l < least {
			return fmt.Errorf("edges per bit %v: must be at least the smallest variable degree, %d: %w", l, v[0], ErrUnreachable)
		}
		most = min(most, l)
	}
	low, high := 1-most/2, 1.
	if c := p.CheckDegrees; len(c) > 0 {
		low, high = 1-most/float64(c[0]), 1-least/float64(c[len(c)-1])
	}
	return fmt.Errorf("rate %v: these degrees allow rates from %.6g to %.6g: %w", p.Rate, max(low, 0), max(high, 0), ErrUnreachable)
}

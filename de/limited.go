package de

import (
	"context"
	"errors"
	"fmt"
	"math"

	"tannery/de/channel"
	"tannery/ensembles"
)

// ErrUnreachable is wrapped by the error of Limited when the target is missed
// even on the best channel of the family.
var ErrUnreachable = errors.New("the target cannot be reached")

const (
	// limitedTolerance is the relative width of the bracket at which the
	// root finding of Limited ends.
	limitedTolerance = 1e-10
	// leastError stands for bit error probabilities below it, down to 0,
	// whose logarithm would be -Inf.
	leastError = 1e-300
	// limitedSteps bounds the traces of one root finding: bisection alone
	// would need 34 for the tolerance and a few to find a bracket.
	limitedSteps = 200
)

const (
	// limitedPoints is the number of points of the finer of the two grids on
	// which Limited evolves quantised densities.
	limitedPoints = 1024
	// limitedGain is by how much the difference of the two is widened: small
	// error probabilities settle slowly, at first by less than half from one
	// grid to the next. TestLimitedUncertainty holds it against finer grids.
	limitedGain = 2
)

// Limited returns the largest channel parameter at which the bit error
// probability reaches the target in at most the given number of iterations,
// as the length goes to infinity: the threshold of a decoder that stops there.
// The target lies from 1e-30, where traces that converge end, to below 1/2, and
// iterations is at least 1. It is ErrUnreachable if the best channel fails.
//
// It works for any engine, on the law that the bit error probability after a
// number of iterations increases with the parameter (degradation; Richardson &
// Urbanke, IEEE Trans. Inf. Theory 47(2), 2001). The root of its logarithm is
// found by the Illinois rule (Dowell & Jarratt, BIT 11, 1971), safeguarded by
// bisection. Iterations of the result counts the evolution steps.
//
// Quantised densities are evolved on two grids, and the uncertainty covers
// their difference.
func Limited(ctx context.Context, engine Engine, e ensembles.Ensemble, f channel.Family, iterations int, target float64) (Threshold, error) {
	q, quantized := engine.(QuantizedEngine)
	if !quantized {
		return limitedBy(ctx, engine, e, f, iterations, target, math.NaN())
	}
	q.tracePoints = limitedPoints / 2
	coarse, err := limitedBy(ctx, q, e, f, iterations, target, math.NaN())
	if err != nil {
		return coarse, err
	}
	q.tracePoints = limitedPoints
	fine, err := limitedBy(ctx, q, e, f, iterations, target, coarse.Value)
	fine.Uncertainty += limitedGain*math.Abs(fine.Value-coarse.Value) + gridError(limitedPoints/2)*fine.Value
	fine.Iterations += coarse.Iterations
	return fine, err
}

// limitedBy is Limited by the traces of one engine, with a guess, or NaN.
func limitedBy(ctx context.Context, engine Engine, e ensembles.Ensemble, f channel.Family, iterations int, target, guess float64) (Threshold, error) {
	if iterations < 1 {
		return Threshold{}, fmt.Errorf("iterations %d: must be at least 1", iterations)
	}
	if !(target >= negligibleError && target < 0.5) {
		return Threshold{}, fmt.Errorf("target error %v: must be at least %g and below 0.5", target, negligibleError)
	}
	out := Threshold{Method: engine.Method()}
	// excess is positive where the target is missed.
	excess := func(parameter float64) (float64, error) {
		trace, err := engine.Trace(ctx, e, f, parameter, iterations)
		if err != nil {
			return 0, err
		}
		last := trace.Points[len(trace.Points)-1]
		out.Iterations += last.Iteration
		return math.Log(math.Max(last.BitErrorProbability, leastError) / target), nil
	}

	low, high, fLow, fHigh, found, err := bracketNear(guess, f, excess)
	if !found && err == nil {
		low, high, fLow, fHigh, err = bracket(e, f, excess)
	}
	if err != nil {
		return Threshold{}, err
	}
	if fLow > 0 {
		return Threshold{}, fmt.Errorf("%w: bit error probability %.3g after %d iterations on the best channel, %s = %g; the target is %g",
			ErrUnreachable, target*math.Exp(fLow), iterations, f.Parameter(), low, target)
	}
	if fHigh <= 0 {
		// The whole family reaches the target.
		out.Value = high
		return out, nil
	}
	reached := low // the largest parameter known to reach the target
	width := high - low
	for side, step := 0, 0; high-low > limitedTolerance*high && step < limitedSteps; step++ {
		middle := (low*fHigh - high*fLow) / (fHigh - fLow)
		// Every third step must have halved the bracket.
		if step%3 == 2 {
			if high-low > width/2 {
				middle = low + (high-low)/2
				side = 0
			}
			width = high - low
		}
		// Stay off the ends, so that both close in.
		margin := limitedTolerance / 4 * high
		middle = math.Min(math.Max(middle, low+margin), high-margin)
		v, err := excess(middle)
		if err != nil {
			return Threshold{}, err
		}
		if v <= 0 {
			low, fLow, reached = middle, v, middle
			if side < 0 {
				fHigh /= 2
			}
			side = -1
		} else {
			high, fHigh = middle, v
			if side > 0 {
				fLow /= 2
			}
			side = 1
		}
	}
	out.Value = reached
	out.Uncertainty = high - reached
	return out, nil
}

// bracketNear returns two parameters near the guess between which the excess
// changes sign, if they are found.
func bracketNear(guess float64, f channel.Family, excess func(float64) (float64, error)) (low, high, fLow, fHigh float64, found bool, err error) {
	best, worst := f.Range()
	low, high = guess*(1-nearGuess), guess*(1+nearGuess)
	if !(low > best && high < worst) {
		return 0, 0, 0, 0, false, nil
	}
	if fLow, err = excess(low); err != nil || fLow > 0 {
		return 0, 0, 0, 0, false, err
	}
	fHigh, err = excess(high)
	return low, high, fLow, fHigh, fHigh > 0, err
}

// nearGuess is how near to the value on one grid that on another is expected,
// relative to it.
const nearGuess = 1e-5

// bracket returns two parameters between which the excess changes sign, as
// close as the Shannon limit tells, or the ends of the family.
func bracket(e ensembles.Ensemble, f channel.Family, excess func(float64) (float64, error)) (low, high, fLow, fHigh float64, err error) {
	best, worst := f.Range()
	start, err := f.Inverse(e.DesignRate())
	if err != nil { // no limit at this rate: anything inside the range will do
		start = 1
		if !math.IsInf(worst, 1) {
			start = best + (worst-best)/2
		}
	}
	value, err := excess(start)
	if err != nil {
		return 0, 0, 0, 0, err
	}
	low, high, fLow, fHigh = start, start, value, value
	for fHigh <= 0 && high < worst {
		low, fLow = high, fHigh
		high = math.Min(worst, best+2*(high-best))
		if high > maxParameter {
			return low, low, fLow, fLow, nil
		}
		if fHigh, err = excess(high); err != nil {
			return 0, 0, 0, 0, err
		}
	}
	for fLow > 0 && low > best {
		high, fHigh = low, fLow
		low = best + (low-best)/2
		if low-best < minParameter {
			low = best
		}
		if fLow, err = excess(low); err != nil {
			return 0, 0, 0, 0, err
		}
	}
	return low, high, fLow, fHigh, nil
}

// Parameters above maxParameter count as the end of a family without one, and
// those within minParameter of the best as the best.
const (
	maxParameter = 1e6
	minParameter = 1e-6
)

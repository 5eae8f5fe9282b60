package de

import (
	"context"

	"tannery/de/channel"
	"tannery/ensembles"
)

// Method names an analysis by which thresholds are found.
type Method string

// The methods. Exact is a closed recursion and holds on the BEC only;
// Gaussian and GaussianFit are approximations for the BI-AWGN channel;
// Quantized evolves quantised message densities on any channel.
const (
	Exact       Method = "exact"
	Gaussian    Method = "gaussian"     // with the exact φ
	GaussianFit Method = "gaussian-fit" // with the approximate φ printed by Chung, Richardson & Urbanke (2001)
	Quantized   Method = "quantized"
)

// Engine measures ensembles by one method of analysis. Engines are safe for
// concurrent use. Threshold and Trace return an error for a channel that the
// method does not cover (ErrChannel) and when ctx ends.
type Engine interface {
	Method() Method
	// Threshold finds the largest channel parameter at which decoding
	// succeeds as the length and the number of iterations go to infinity.
	Threshold(ctx context.Context, e ensembles.Ensemble, f channel.Family) (Threshold, error)
	// Trace evolves the ensemble at one channel parameter for at most the
	// given number of iterations, or until it converges or stalls.
	Trace(ctx context.Context, e ensembles.Ensemble, f channel.Family, parameter float64, iterations int) (Trace, error)
}

// Threshold is the outcome of Engine.Threshold.
type Threshold struct {
	Method Method
	// Value is the threshold as a parameter of the channel family: decoding
	// succeeds below it.
	Value float64
	// Uncertainty is how far Value may be from what the method converges to:
	// grid, stopping rule and extrapolation together. It does not speak of
	// how far an approximation is from the truth.
	Uncertainty float64
	// Critical lists the places where the tunnel closes at the threshold,
	// the tightest first.
	Critical []Critical
	// Iterations is the number of evolution steps spent.
	Iterations int
	Warnings   []string
}

// Critical is a place where the decoding tunnel is tightest.
type Critical struct {
	// Entropy of the variable-to-check messages there, in bits; on the BEC
	// the erasure probability. Zero is the stability condition.
	Entropy float64
	// Slack is the relative distance by which the tunnel stays open there at
	// the threshold; 0 where it closes.
	Slack float64
}

// Trace is an evolution at one channel parameter.
type Trace struct {
	Method    Method
	Parameter float64
	// Points holds the state after each iteration; Points[0] is the channel.
	Points []Point
	// Outcome tells how the evolution ended.
	Outcome Outcome
	// Narrowest indexes the point of least relative progress in
	// Bhattacharyya parameter, -1 if there is none between the ends.
	Narrowest int
}

// Outcome tells how an evolution ended.
type Outcome string

// The outcomes. Converged is declared only where it is certain that the
// error probability tends to zero; Stalled when a fixed point is reached;
// Exhausted when the iterations allowed came first.
const (
	Converged Outcome = "converged"
	Stalled   Outcome = "stalled"
	Exhausted Outcome = "exhausted"
)

// Point is the state of an evolution after an iteration. Probabilities and
// entropies are from 0 to 1; a message of LLR 0 counts as half an error.
type Point struct {
	Iteration int
	// ErrorProbability, Entropy (bits) and Bhattacharyya describe the
	// messages from variable nodes to check nodes.
	ErrorProbability float64
	Entropy          float64
	Bhattacharyya    float64
	// CheckEntropy is that of the messages from check nodes to variable
	// nodes which these caused, in bits.
	CheckEntropy float64
	// BitErrorProbability is that of the decision on a bit, which uses all
	// its incoming messages after this iteration.
	BitErrorProbability float64
}

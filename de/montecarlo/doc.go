// Package montecarlo measures a code by decoding trials on its Tanner graph:
// bit and frame error rates with confidence intervals, and the error
// probability after each iteration, to be held against density evolution.
//
// Every trial sends the codeword of zeros. On a channel whose output is
// symmetric, with a decoder that treats signs symmetrically, the probability
// of error is the same for every codeword (Richardson & Urbanke, IEEE Trans.
// Inf. Theory 47(2), 2001, Lemma 1), so that this loses nothing and no
// encoder is needed. A bit whose final LLR is zero is undecided and counts as
// an error, since a decision by the sign of zero would favour the codeword
// sent.
package montecarlo

package channel

import (
	"errors"
	"fmt"
	"math"
)

// Link is a source of independent bits that is to be sent over a channel.
type Link struct {
	// BitRate is the source's, in bits per second, above 0.
	BitRate float64
	// BitProbability is that of a source bit to be 1, from 0 to 1: 1/2 for
	// bits that cannot be compressed.
	BitProbability float64
	// SymbolRate is the channel's, in symbols per second, above 0.
	SymbolRate float64
	// Capacity is the channel's, in bits per symbol, from 0 up.
	Capacity float64
}

// LinkBudget tells what the channel of a Link does with its source, by the
// separation theorem (Shannon, A mathematical theory of communication, Bell
// System Technical Journal 27, 1948).
type LinkBudget struct {
	// SourceEntropy is in bits per source bit, from 0 to 1.
	SourceEntropy float64
	// EntropyRate is the source's, and CapacityRate the channel's, in bits
	// per second.
	EntropyRate, CapacityRate float64
	// Fits tells whether EntropyRate ≤ CapacityRate: whether the source,
	// compressed ideally, can be sent with arbitrarily few errors.
	Fits bool
	// CodeRate is the rate in bits per symbol that sends the compressed
	// source in time; RawCodeRate does so for the source as it is.
	CodeRate, RawCodeRate float64
	// LargestCodeRate is the largest at which errors can be made arbitrarily
	// few, in bits per symbol: the capacity.
	LargestCodeRate float64
	// Margin is LargestCodeRate - CodeRate in bits per symbol, negative if
	// the source does not fit; MarginRate is the same in bits per second.
	Margin, MarginRate float64
	// LowestBitErrorRate is that of the source bits as received: 0 if the
	// source fits, else the d with BitRate·(h(p)-h(d)) = CapacityRate.
	LowestBitErrorRate float64
}

// Budget works out the link. Its errors tell, all at once, which fields are
// out of their range.
func (l Link) Budget() (LinkBudget, error) {
	positive := func(x float64) bool { return x > 0 && !math.IsInf(x, 1) }
	var errs []error
	if !positive(l.BitRate) {
		errs = append(errs, fmt.Errorf("source bit rate %v: must be above 0 and finite", l.BitRate))
	}
	if !(l.BitProbability >= 0 && l.BitProbability <= 1) {
		errs = append(errs, fmt.Errorf("source bit probability %v: must be from 0 to 1", l.BitProbability))
	}
	if !positive(l.SymbolRate) {
		errs = append(errs, fmt.Errorf("symbol rate %v: must be above 0 and finite", l.SymbolRate))
	}
	if l.Capacity != 0 && !positive(l.Capacity) {
		errs = append(errs, fmt.Errorf("capacity %v: must be at least 0 and finite", l.Capacity))
	}
	if err := errors.Join(errs...); err != nil {
		return LinkBudget{}, err
	}
	b := LinkBudget{
		SourceEntropy:   BinaryEntropy(l.BitProbability),
		CapacityRate:    l.SymbolRate * l.Capacity,
		LargestCodeRate: l.Capacity,
		RawCodeRate:     l.BitRate / l.SymbolRate,
	}
	b.EntropyRate = l.BitRate * b.SourceEntropy
	b.CodeRate = b.EntropyRate / l.SymbolRate
	b.Fits = b.EntropyRate <= b.CapacityRate
	b.Margin = b.LargestCodeRate - b.CodeRate
	b.MarginRate = b.CapacityRate - b.EntropyRate
	if !b.Fits {
		// h(d) = h(p) - C; for fair bits 1-h(d) is known better than h(d).
		kept := b.CapacityRate / l.BitRate
		b.LowestBitErrorRate = crossover(kept+(1-b.SourceEntropy), b.SourceEntropy-kept)
	}
	return b, nil
}

package montecarlo

import (
	"math/rand/v2"
)

// outcome is that of one trial.
type outcome struct {
	bitErrors  int64
	iterations int64
	undetected bool // the decoder stopped at another codeword
}

// decoder makes trials. It is used by one goroutine at a time.
type decoder interface {
	// trial draws what the channel does and decodes, in at most limit
	// iterations (0: as many as it takes). It returns false if stop did so
	// and there is no outcome.
	trial(random *rand.Rand, limit int, stop func() bool) (outcome, bool)
}

var (
	_ decoder = (*peeling)(nil)
	_ decoder = (*iterative)(nil)
)

// newDecoder returns the decoder for the trials: peeling on the BEC, where it
// is equivalent to sum-product, otherwise sum-product.
func (t Trials) newDecoder() (decoder, error) {
	draw, err := newSource(t.Family, t.Parameter)
	if err != nil {
		return nil, err
	}
	if isBEC(t.Family) {
		return newPeeling(t.Graph, draw), nil
	}
	return &iterative{newSumProduct(t.Graph, t.Schedule), draw}, nil
}

// iterative decodes by sum-product until the decisions form a codeword.
type iterative struct {
	*sumProduct
	draw source
}

// trial implements decoder.
func (d *iterative) trial(random *rand.Rand, limit int, stop func() bool) (outcome, bool) {
	d.reset(func() float64 { return d.draw(random) })
	var o outcome
	for ; !d.satisfied(); o.iterations++ {
		if limit > 0 && o.iterations == int64(limit) {
			o.bitErrors = d.errors()
			return o, true
		}
		if stop() {
			return outcome{}, false
		}
		d.iterate()
	}
	o.bitErrors = d.errors()
	o.undetected = o.bitErrors > 0
	return o, true
}

package density

import "tannery/ensembles"

// VariableNode turns the density of messages from check nodes into that of
// messages from variable nodes of the degree distribution λ: the mixture over
// degrees i of the sum of the channel's LLR and i-1 independent messages. In
// the even functions g sums are convolutions, done by cosine transforms and
// powers per frequency.
//
// A VariableNode holds working space: use one per goroutine.
type VariableNode struct {
	grid     *Grid
	edges    polynomial // λ
	nodes    polynomial // Σ Lᵢ z^i = z·Σ Lᵢ z^(i-1)
	cosine   *cosine
	channel  []float64 // transform of the channel's g
	incoming []float64 // transform of the incoming messages' g
	errors   []float64 // weights of a transform in the error probability
}

// NewVariableNode returns the operation for the edge-perspective distribution
// lambda, with channel as the density of the channel's LLR.
func (g *Grid) NewVariableNode(lambda ensembles.Distribution, channel *Density) *VariableNode {
	v := &VariableNode{
		grid:     g,
		edges:    newPolynomial(lambda),
		nodes:    newPolynomial(lambda.Nodes()),
		cosine:   newCosine(g.points),
		channel:  make([]float64, g.points+1),
		incoming: make([]float64, g.points+1),
		errors:   make([]float64, g.points+1),
	}
	v.SetChannel(channel)
	// The error probability is Σ wₖgₖ with g the inverse transform. As the
	// transform counts inner values twice, so do the weights of its adjoint.
	for k, w := range g.errorWeight {
		if k > 0 && k < g.points {
			w /= 2
		}
		v.errors[k] = w / float64(2*g.points)
	}
	v.cosine.transform(v.errors, v.errors)
	for k := 1; k < g.points; k++ {
		v.errors[k] *= 2
	}
	return v
}

// SetChannel replaces the density of the channel's LLR by another of the
// operation's grid.
func (v *VariableNode) SetChannel(channel *Density) {
	v.cosine.transform(v.channel, channel.even)
}

// Apply sets dst to the density of the outgoing messages for incoming ones of
// density src; both of the operation's grid, and may be the same.
func (v *VariableNode) Apply(dst, src *Density) {
	v.cosine.transform(v.incoming, src.even)
	spectrum := dst.even
	n := v.grid.points
	for k := 0; k < n; k += 4 {
		z, c, s := v.incoming[k:k+4], v.channel[k:k+4], spectrum[k:k+4]
		y0, y1, y2, y3 := v.edges.atFour(z[0], z[1], z[2], z[3])
		s[0], s[1], s[2], s[3] = y0*c[0], y1*c[1], y2*c[2], y3*c[3]
	}
	spectrum[n] = v.edges.at(v.incoming[n]) * v.channel[n]
	v.cosine.transform(spectrum, spectrum)
	scale := 1 / float64(2*v.grid.points)
	for k := range spectrum {
		spectrum[k] *= scale
	}
	dst.settle()
}

// DecisionError returns the error probability of the decision on a bit, which
// adds the channel's LLR and all incoming messages, for the incoming messages
// of the last Apply. The fractions over nodes are used.
func (v *VariableNode) DecisionError() float64 {
	sum := 0.0
	for k, z := range v.incoming {
		sum += v.errors[k] * v.channel[k] * z * v.nodes.at(z)
	}
	return sum
}

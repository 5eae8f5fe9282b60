package de

import (
	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// Evolution evolves the message density of an ensemble on one channel, step
// by step (density evolution: Richardson & Urbanke, IEEE Trans. Inf. Theory
// 47(2), 2001). It allocates nothing after it is made. Use one per goroutine.
type Evolution struct {
	// Messages is the density of the messages from variable nodes to check
	// nodes, at first that of the channel. Checks is that of the messages
	// from check nodes to variable nodes in the last step.
	Messages, Checks *density.Density

	variable *density.VariableNode
	check    *density.CheckNode
}

// NewEvolution starts an evolution on the grid, on a channel whose LLR has
// the density c.
func NewEvolution(e ensembles.Ensemble, g *density.Grid, c channel.Density) *Evolution {
	messages := g.Project(c)
	return &Evolution{
		Messages: messages,
		Checks:   g.NewDensity(),
		variable: g.NewVariableNode(e.Lambda, messages),
		check:    g.NewCheckNode(e.Rho),
	}
}

// Step does one iteration: check nodes, then variable nodes.
func (v *Evolution) Step() {
	v.check.Apply(v.Checks, v.Messages)
	v.variable.Apply(v.Messages, v.Checks)
}

// DecisionError returns the error probability of the decision on a bit after
// the last Step, which must have been done.
func (v *Evolution) DecisionError() float64 { return v.variable.DecisionError() }

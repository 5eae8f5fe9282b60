package optimize

import (
	"fmt"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// withMargin lowers a threshold to the largest parameter at which the
// ensemble has the margin of stability asked for: beyond it decoding still
// succeeds, but not within the limits.
func withMargin(t de.Threshold, e ensembles.Ensemble, p Problem) de.Threshold {
	m := p.Limits.StabilityMargin
	slope := e.Lambda.Fraction(2) * e.Rho.Derivative(1)
	if m == 0 || slope == 0 {
		return t
	}
	bound := channel.ParameterAtBhattacharyya(p.Channel, min((1-m)/slope, 1))
	if bound >= t.Value {
		return t
	}
	t.Warnings = append(t.Warnings, fmt.Sprintf(
		"the stability margin %g binds: decoding alone succeeds up to %s = %.6g", m, p.Channel.Parameter(), t.Value))
	t.Value = bound
	t.Critical = []de.Critical{{Entropy: 0}}
	return t
}

package report

import (
	"fmt"

	"tannery/cmd/tannery/internal/report/picture"
	"tannery/ensembles"
)

// subject says of what a picture of the evolution is.
func (r *Trace) subject() string {
	at := fmt.Sprintf("%s on %s at %s = %s", r.Name, r.Channel, r.Symbol, short(r.Value))
	if r.EbN0DB != nil {
		at += fmt.Sprintf(" (Eb/N0 %s dB)", Fixed(*r.EbN0DB, 3))
	}
	return at + ", method " + r.Method
}

// endEntropy is the message entropy, in bits, below which a narrow tunnel is a
// matter of the stability condition at its end, and no place to mark.
const endEntropy = 1e-4

// narrowestIndex is -1 where the tunnel has no narrowest place to mark.
func (r *Trace) narrowestIndex() int {
	if r.Narrowest == nil || r.Outcome == "stalled" || r.Points[*r.Narrowest].Entropy < endEntropy {
		return -1
	}
	return *r.Narrowest
}

// TunnelPicture draws the evolution as an EXIT chart in entropies.
func (r *Trace) TunnelPicture() picture.Picture {
	t := picture.Tunnel{Subject: r.subject(), Narrowest: r.narrowestIndex(), Stalled: r.Outcome == "stalled"}
	for _, p := range r.Points {
		t.States = append(t.States, picture.TunnelState{Variable: p.Entropy, Check: p.CheckEntropy})
	}
	return t.Picture()
}

// ErrorPicture draws the error probabilities against iterations.
func (r *Trace) ErrorPicture() picture.Picture {
	e := picture.Errors{Subject: r.subject(), Narrowest: r.narrowestIndex()}
	for i, p := range r.Points {
		if i > 0 && p.ErrorProbability > 0 && p.ErrorProbability < roundedBelow && p.ErrorProbability >= r.Points[i-1].ErrorProbability {
			// From the first rise on there is nothing but rounding.
			break
		}
		e.States = append(e.States, picture.ErrorState{Iteration: p.Iteration, Message: p.ErrorProbability, Bit: p.BitErrorProbability})
	}
	return e.Picture()
}

// roundedBelow is the error probability below which a rise is one of rounding.
const roundedBelow = 1e-8

// DegreePicture draws the degree profile of an ensemble.
func DegreePicture(name string, e ensembles.Ensemble) picture.Picture {
	return picture.Degrees{Subject: name, Variable: shares(e.Lambda), Check: shares(e.Rho)}.Picture()
}

func shares(d ensembles.Distribution) []picture.DegreeShare {
	nodes := d.Nodes()
	all := make([]picture.DegreeShare, len(d))
	for i, t := range d {
		all[i] = picture.DegreeShare{Degree: t.Degree, Edges: t.Fraction, Nodes: nodes[i].Fraction}
	}
	return all
}

package report

import (
	"fmt"
	"math"
	"strings"
)

// The tunnel in text is seen from above: one row per step down in entropy,
// as wide as an iteration there makes progress.
const (
	tunnelRows  = 16
	tunnelWidth = 44 // columns between the walls where all is won at once
	// leastProgress is the progress at which the walls meet: narrower
	// tunnels take more iterations than anybody has.
	leastProgress = 1e-4
)

// Tunnel draws the evolution: the relative fall of the Bhattacharyya
// parameter in an iteration, on a logarithmic scale, against the entropy of
// the messages. It needs two points at least.
func (r *Trace) Tunnel(t *Text) {
	if len(r.Points) < 2 {
		return
	}
	t.Heading("Tunnel: how far one iteration gets, by message entropy")
	marked := r.marked()
	top := r.Points[0].Entropy
	last := -1
	for row := range tunnelRows {
		high := top * float64(tunnelRows-row) / tunnelRows
		low := top * float64(tunnelRows-row-1) / tunnelRows
		i := r.tightestBetween(low, high)
		if marked >= 0 && r.Points[marked].Entropy <= high && r.Points[marked].Entropy > low {
			i = marked
		}
		if i < 0 { // passed over in one iteration: the row shows that one
			i = r.lastAbove(high)
		}
		if i == last && i == marked {
			continue
		}
		last = i
		progress := r.progress(i)
		mark := ""
		if i == marked {
			mark = "narrowest"
			if r.Outcome == "stalled" {
				mark = "closed"
			}
		}
		fmt.Fprintf(&t.b, "  %8.4f  %s %7s  %s", math.Min(high, r.Points[i].Entropy), walls(progress), percent(progress), mark)
		trimRight(&t.b)
		t.b.WriteByte('\n')
		if mark == "closed" {
			break
		}
	}
}

// trimRight ends the line without spaces.
func trimRight(b *strings.Builder) {
	text := strings.TrimRight(b.String(), " ")
	b.Reset()
	b.WriteString(text)
}

// marked is the index of the narrowest place or of the fixed point; -1 if
// there is neither.
func (r *Trace) marked() int {
	if r.Outcome == "stalled" {
		return len(r.Points) - 2
	}
	return r.narrowestIndex()
}

// progress is the share of the Bhattacharyya parameter that the iteration
// after a point takes away.
func (r *Trace) progress(i int) float64 {
	before, after := r.Points[i].Bhattacharyya, r.Points[i+1].Bhattacharyya
	if !(before > 0) {
		return 1
	}
	return math.Min(1, math.Max(0, 1-after/before))
}

// tightestBetween returns the point of least progress with its entropy above
// low and at most high; -1 if there is none.
func (r *Trace) tightestBetween(low, high float64) int {
	best := -1
	for i, p := range r.Points[:len(r.Points)-1] {
		if p.Entropy > low && p.Entropy <= high && (best < 0 || r.progress(i) < r.progress(best)) {
			best = i
		}
	}
	return best
}

// lastAbove returns the last point, but for the end, with an entropy of at
// least high.
func (r *Trace) lastAbove(high float64) int {
	for i := len(r.Points) - 2; i > 0; i-- {
		if r.Points[i].Entropy >= high {
			return i
		}
	}
	return 0
}

// walls draws a cross-section.
func walls(progress float64) string {
	open := 0
	if progress > leastProgress {
		share := 1 - math.Log(progress)/math.Log(leastProgress)
		open = 2 * int(math.Round(share*tunnelWidth/2))
	}
	wall := strings.Repeat("#", (tunnelWidth-open)/2+1)
	return wall + strings.Repeat(" ", open) + wall
}

func percent(v float64) string {
	switch v *= 100; {
	case v >= 10:
		return Fixed(v, 0) + " %"
	case v >= 0.01:
		return Significant(v, 2) + " %"
	case v > 0:
		return "<0.01 %"
	}
	return "0 %"
}

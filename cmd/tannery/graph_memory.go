package main

import (
	"fmt"

	"tannery/ensembles"
)

// bytesPerEdge is what building a graph takes at most at a time: measured 46
// for 30 million edges of degrees 3 and 6, the nodes included.
const bytesPerEdge = 48

// fits returns an error if building the graph would take more than the memory
// available: better said at once than ended by the system after minutes.
func fits(r ensembles.Realization, available int64) error {
	if need := int64(r.Edges) * bytesPerEdge; need > available {
		return fmt.Errorf("length %d: %d edges take about %.3g GB of memory, and %.3g GB are available", r.Length, r.Edges, float64(need)/1e9, float64(available)/1e9)
	}
	return nil
}

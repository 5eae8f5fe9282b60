package main

import (
	"runtime"
	"strings"
	"testing"

	"tannery/ensembles"
)

func TestGraphsThatDoNotFit(t *testing.T) {
	r := ensembles.Realization{Length: 300_000_000, Edges: 900_000_000}
	if err := fits(r, 50e9); err != nil {
		t.Error(err)
	}
	const want = "length 300000000: 900000000 edges take about 43.2 GB of memory, and 24 GB are available"
	if err := fits(r, 24e9); err == nil || err.Error() != want {
		t.Errorf("%v; want %s", err, want)
	}
	available, known := availableMemory()
	if runtime.GOOS == "linux" && (!known || available < 1<<20 || available > 1<<50) {
		t.Errorf("%d bytes available, %v", available, known)
	}
	if !known || available > 2_100_000_000*bytesPerEdge {
		t.Skip("the longest graph fits, or nobody knows")
	}
	if code, _, stderr := command(t, "", strings.Fields("build --lambda 3:1 --rho 6:1 --length 700000000 -o -")...); code != exitFailed || !strings.Contains(stderr, "edges take about 101 GB") {
		t.Errorf("code %d, %s", code, stderr)
	}
}

package report

import "fmt"

// Graph is what was found out about the Tanner graph of a parity-check matrix.
type Graph struct {
	Length     int      `json:"length"` // variable nodes: columns
	Checks     int      `json:"checks"` // rows
	Edges      int      `json:"edges"`
	DesignRate float64  `json:"design_rate"`
	Girth      int      `json:"girth"` // 0 without any cycle
	Cycles     int64    `json:"shortest_cycles"`
	CyclesMean float64  `json:"shortest_cycles_per_variable"`
	CyclesMost int64    `json:"most_shortest_cycles"` // through one variable node
	Gap        int      `json:"encoding_gap"`         // rows outside the approximate triangle
	Rank       *int     `json:"rank"`                 // over GF(2), null if it was left out
	Rate       *float64 `json:"rate"`                 // 1 - rank/length
	Digest     string   `json:"digest"`
}

// rows writes the graph for people.
func (g *Graph) rows(t *Text) {
	t.Row("size", "%s × %s, %s", counted(int64(g.Checks), "check"), counted(int64(g.Length), "code bit"), counted(int64(g.Edges), "one"))
	if g.Girth == 0 {
		t.Row("girth", "no cycles")
	} else {
		t.Row("girth", "%d, with %s of that length", g.Girth, counted(g.Cycles, "cycle"))
		t.Row("per variable node", "%s of them on average, %d at most", Significant(g.CyclesMean, 3), g.CyclesMost)
	}
	switch {
	case g.Rank == nil:
		t.Row("rank", "not computed, --rank asks for it; design rate %s", Trimmed(g.DesignRate, 9))
	case *g.Rank == g.Checks:
		t.Row("rank", "%d, full; rate %s as designed", *g.Rank, Trimmed(*g.Rate, 9))
	default:
		t.Row("rank", "%d, %d less than rows; rate %s, designed %s", *g.Rank, g.Checks-*g.Rank, Trimmed(*g.Rate, 9), Trimmed(g.DesignRate, 9))
	}
	t.Row("encoding", "approximate triangle with a gap of %d", g.Gap)
}

// counted is a number with what is counted, in the plural unless there is one.
func counted(n int64, what string) string {
	if n != 1 {
		what += "s"
	}
	return fmt.Sprintf("%d %s", n, what)
}

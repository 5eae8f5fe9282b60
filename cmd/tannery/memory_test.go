package main

import (
	"io"
	"runtime"
	"strings"
	"testing"
)

// However much a small input promises, reading it costs little: what it says
// about sizes is not believed before the content is there.
func TestSmallInputsCostLittle(t *testing.T) {
	const (
		small = 1 << 10
		most  = 8 << 20 // bytes allocated in all, most of it by the command itself
	)
	laughs := "kind: profile\nversion: 1\na: &a [x, x, x, x, x, x, x, x, x]\n"
	for c := 'b'; c < 'k'; c++ {
		p := string(c - 1)
		laughs += string(c) + ": &" + string(c) + " [" + strings.TrimSuffix(strings.Repeat("*"+p+", ", 9), ", ") + "]\n"
	}
	const threshold = "threshold - --channel bec"
	for _, c := range []struct{ name, args, stdin string }{
		{"nothing", threshold, ""},
		{"aliases of aliases", threshold, laughs},
		{"deep brackets", threshold, strings.Repeat("[", small)},
		{"deep maps", threshold, "lambda: " + strings.Repeat("{a: ", small/4)},
		{"a large degree", threshold, "kind: profile\nversion: 1\nlambda: {999999999999999999: 1}\nrho: {6: 1}\n"},
		{"a large degree that is allowed", threshold, "kind: profile\nversion: 1\nlambda: {1000000: 1}\nrho: {1000000: 1}\n"},
		{"large counts", "build - -o -", "kind: profile\nversion: 1\nlambda: {3: 1}\nrho: {6: 1}\nrealization: {length: 1000000000, checks: 500000000, edges: 3000000000, variable_nodes: {3: 1000000000}, check_nodes: {6: 500000000}}\n"},
		{"a large number", threshold, "kind: profile\nversion: 1\nlambda: {3: 1e" + strings.Repeat("9", small) + "}\nrho: {6: 1}\n"},
		{"a brief of many degrees", "search - --evaluations 1", "kind: brief\nversion: 1\nchannel: bec\nrate: 0.5\nvariable_degrees: {max: 99999999999}\n"},
		{"a matrix of promises", "profile -", "%%MatrixMarket matrix coordinate pattern general\n1000000000 1000000000 2000000000\n1 1\n"},
		{"a matrix of wide promises", "profile -", "%%MatrixMarket matrix coordinate pattern general\n2147483647 2147483647 2147483647\n1 1\n"},
		{"a symmetric matrix of promises", "profile -", "%%MatrixMarket matrix coordinate integer symmetric\n1073741823 1073741823 1073741823\n1 1 1\n"},
		{"a long line", "profile -", "%%MatrixMarket matrix coordinate pattern general\n" + strings.Repeat("1", 100*small)},
		{"a channel of one long row", "limit --matrix -", strings.Repeat("0.1,", small)},
		{"a channel of commas", "limit --channel - --rate 0.5", strings.Repeat(",", small)},
		{"a curve of promises", "report ru01-r50-d3 --channel bec --simulation -", `{"schema":"tannery/simulate/1","length":99999999999999999999,"points":[`},
	} {
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		code := run(t.Context(), strings.Fields(c.args), strings.NewReader(c.stdin), io.Discard, io.Discard)
		runtime.ReadMemStats(&after)
		if code != exitUsage && c.name != "a large degree that is allowed" {
			t.Errorf("%s: exit code %d", c.name, code)
		}
		if cost := after.TotalAlloc - before.TotalAlloc; cost > most {
			t.Errorf("%s: %d bytes of input cost %d of memory", c.name, len(c.stdin), cost)
		}
	}
}

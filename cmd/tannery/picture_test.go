package main

import (
	"bytes"
	"os"
	"strings"
	"testing"
)

// Pictures go into files by their endings, the same bytes each time.
func TestPicturesOfCommands(t *testing.T) {
	t.Chdir(t.TempDir())
	for _, c := range []struct{ args, file, begins string }{
		{"trace ru01-r50-d3 --channel bec --parameter 0.429 --plot tunnel.svg", "tunnel.svg", "<?xml"},
		{"trace ru01-r50-d3 --channel bec --parameter 0.429 --plot tunnel.png", "tunnel.png", "\x89PNG"},
		{"trace ru01-r50-d3 --channel bec --parameter 0.45 --plot errors.SVG --picture errors", "errors.SVG", "<?xml"},
		{"trace ru01-r50-d3 --channel bec --parameter 0 --plot degrees.svg --picture degrees", "degrees.svg", "<?xml"},
		{"compare ru01-r50-d3 ru01-r50-d4 s99-r50-d13 --channel bec --plot edges.svg", "edges.svg", "<?xml"},
		{"compare ru01-r50-d3 en302307-r50-d8 --channel biawgn --method gaussian --plot gaps.png --picture gaps", "gaps.png", "\x89PNG"},
	} {
		var first []byte
		for range 2 {
			succeed(t, "", strings.Fields(c.args)...)
			content, err := os.ReadFile(c.file)
			if err != nil {
				t.Fatal(err)
			}
			if !bytes.HasPrefix(content, []byte(c.begins)) {
				t.Errorf("%s: begins with %q", c.args, content[:8])
			}
			if first != nil && !bytes.Equal(first, content) {
				t.Errorf("%s: other bytes the second time", c.args)
			}
			first = content
		}
	}
}

// The tunnel in text keeps within 80 columns and has no colours.
func TestTunnelInText(t *testing.T) {
	for _, parameter := range []string{"0", "1e-9", "0.1", "0.4294", "0.45", "1"} {
		out := succeed(t, "", "trace", "ru01-r50-d3", "--channel", "bec", "--parameter", parameter, "--draw")
		for line := range strings.Lines(out) {
			if n := len([]rune(strings.TrimRight(line, "\n"))); n > 80 || strings.Contains(line, "\x1b") || strings.TrimRight(line, " \n")+"\n" != line {
				t.Errorf("ε = %s: line %q", parameter, line)
			}
		}
		if parameter == "0.4294" && !strings.Contains(out, "narrowest\n") || parameter == "0.45" && !strings.Contains(out, "closed\n") {
			t.Errorf("ε = %s: no place is marked\n%s", parameter, out)
		}
	}
}

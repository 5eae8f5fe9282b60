package main

import (
	"encoding/json"
	"encoding/xml"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// buoysPage is a report with everything but measured rates: a profile that was
// searched for a brief, at two lengths.
func buoysPage(t *testing.T) string {
	t.Helper()
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	return succeed(t, "", "report", "../../testdata/profiles/buoys.yaml", "--length", "1000", "--length", "2048")
}

// outline lists headings, tables with their headers, figures and sections of
// a page, with the depth of sections as indentation.
func outline(t *testing.T, page string) string {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(page))
	d.Strict, d.AutoClose, d.Entity = false, xml.HTMLAutoClose, xml.HTMLEntity
	var b strings.Builder
	depth, text := 0, ""
	inSVG := 0
	for {
		token, err := d.Token()
		if err == io.EOF {
			return b.String()
		}
		if err != nil {
			t.Fatal(err)
		}
		line := func(format string, args ...any) {
			b.WriteString(strings.Repeat("  ", depth) + fmt.Sprintf(format, args...) + "\n")
		}
		switch e := token.(type) {
		case xml.StartElement:
			text = ""
			switch e.Name.Local {
			case "main", "header", "section":
				line("%s%s", e.Name.Local, attribute(e, "aria-labelledby", " by "))
				depth++
			case "figure":
				line("figure%s", attribute(e, "id", " "))
			case "svg":
				inSVG++
				if !strings.Contains(attribute(e, "role", "")+attribute(e, "aria-label", ""), "img") || len(attribute(e, "aria-label", "")) < 20 {
					t.Errorf("a picture without role or label: %v", e.Attr)
				}
			case "th":
				if s := attribute(e, "scope", ""); s != "col" && s != "row" {
					t.Errorf("a table header without scope")
				}
			case "script", "iframe", "object", "embed", "audio", "video":
				t.Errorf("the page has a %s", e.Name.Local)
			}
			for _, a := range e.Attr {
				if (a.Name.Local == "src" || a.Name.Local == "href") && !strings.HasPrefix(a.Value, "data:") && !strings.HasPrefix(a.Value, "#") {
					t.Errorf("%s loads %s", e.Name.Local, a.Value)
				}
			}
		case xml.EndElement:
			switch e.Name.Local {
			case "main", "header", "section":
				depth--
			case "h1", "h2", "h3", "h4":
				line("%s %s", e.Name.Local, strings.TrimSpace(text))
			case "th":
				if b := strings.TrimSpace(text); b != "" && inSVG == 0 && !regexp.MustCompile(`^[0-9]+$`).MatchString(b) {
					line("th %s", b)
				}
			case "caption":
				line("table")
			case "svg":
				inSVG--
			}
		case xml.CharData:
			text += string(e)
		}
	}
}

func attribute(e xml.StartElement, name, prefix string) string {
	for _, a := range e.Attr {
		if a.Name.Local == name {
			return prefix + a.Value
		}
	}
	return ""
}

// The structure of the page is kept in testdata/golden/report.txt.
func TestReportStructure(t *testing.T) {
	file, err := filepath.Abs("../../testdata/golden/report.txt")
	if err != nil {
		t.Fatal(err)
	}
	got := outline(t, buoysPage(t))
	want, err := os.ReadFile(file)
	if err != nil && !*update {
		t.Fatal(err)
	}
	if got == string(want) {
		return
	}
	if *update {
		if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	t.Errorf("the structure differs from %s\n%s", file, firstDifference(string(want), got))
}

// Headings go down one level at a time.
func TestReportHeadingsAreInOrder(t *testing.T) {
	page := buoysPage(t)
	level := 0
	for _, h := range regexp.MustCompile(`<h([1-6])`).FindAllStringSubmatch(page, -1) {
		n := int(h[1][0] - '0')
		if n > level+1 {
			t.Errorf("heading %d follows %d", n, level)
		}
		level = n
	}
	if n := strings.Count(page, "<h1"); n != 1 {
		t.Errorf("%d headings of the first level", n)
	}
}

func TestReportIsReproducible(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	args := strings.Fields("report ru01-r50-d3 --channel bec --length 1000")
	if a, b := succeed(t, "", args...), succeed(t, "", args...); a != b {
		t.Error("the same report twice has other bytes")
	}
}

// The command in the provenance makes the same report again, from profiles
// given in any way.
func TestReportCommandMakesItAgain(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	for _, args := range []string{
		"report ru01-r50-d3 --channel bec --length 1000 --parameter 0.42",
		"report --lambda 2:0.3,3:0.7 --rho 6:1 --channel biawgn --method gaussian --neighbours 2 --es-n0 -1.5",
	} {
		page := succeed(t, "", strings.Fields(args)...)
		line := regexp.MustCompile(`<pre>(tannery report [^<]*)</pre>`).FindStringSubmatch(page)
		if line == nil {
			t.Fatalf("%s: no command on the page", args)
		}
		words, err := split(line[1])
		if err != nil {
			t.Fatal(err)
		}
		if again := succeed(t, "", words[1:]...); again != page {
			t.Errorf("%s: %s makes another page\n%s", args, line[1], firstDifference(page, again))
		}
	}
}

// What the user writes into titles and file names does not become markup.
func TestReportEscapes(t *testing.T) {
	profile := "kind: profile\nversion: 1\ntitle: '<script>alert(1)</script> & <b>'\nlambda: {3: 1}\nrho: {6: 1}\n"
	page := succeed(t, profile, "report", "-", "--channel", "bec", "--neighbours", "0")
	if strings.Contains(page, "<script") || strings.Contains(page, "<b>") || !strings.Contains(page, "&lt;script&gt;") {
		t.Error("the title became markup")
	}
}

// Profiles that lack one thing or another still get their page.
func TestReportOfOddProfiles(t *testing.T) {
	for _, args := range []string{
		"report en302307-r50-d8 --channel bec",                               // no threshold, counts in the catalogue
		"report --lambda 3:1 --rho 3:1 --channel bec",                        // rate 0
		"report --lambda 2:1 --rho 50:1 --channel biawgn --method gaussian",  // no neighbours
		"report --lambda 2:1 --rho 3:1 --channel bec",                        // cycle code
		"report ru01-r50-d3 --channel bec --parameter 0.6 --neighbours 0",    // stalls
		"report ru01-r50-d3 --channel bec --parameter 0 --neighbours 0",      // no noise
		"report cfru01-r50-d8000 --channel biawgn --method gaussian-fit",     // many degrees
		"report lmss01-r50-d101 --channel bec --neighbours 100 --length 500", // many neighbours, short
	} {
		page := succeed(t, "", strings.Fields(args)...)
		outline(t, page)
		for _, bad := range []string{"NaN", "+Inf", "-Inf", "%!", "&lt;nil&gt;"} {
			if strings.Contains(page, bad) {
				t.Errorf("%s: the page has %s", args, bad)
			}
		}
	}
}

func TestReportJSON(t *testing.T) {
	var page struct {
		Schema, Answer string
		Threshold      struct{ Threshold float64 }
		Trace          struct{ Points []any }
		Neighbours     struct{ Rows []any }
		Realizations   []struct{ Length int }
		Provenance     struct{ Command string }
	}
	text := succeed(t, "", strings.Fields("report ru01-r50-d3 --channel bec --length 1000 --json")...)
	if err := json.Unmarshal([]byte(text), &page); err != nil {
		t.Fatal(err)
	}
	if page.Schema != "tannery/report/1" || page.Threshold.Threshold < 0.429 || len(page.Trace.Points) < 40 || len(page.Neighbours.Rows) < 3 || page.Realizations[0].Length != 1000 || page.Provenance.Command == "" {
		t.Errorf("%.2000s", text)
	}
	want := "At its design rate of 0.5, ru01-r50-d3 decodes on bec up to ε = 0.429440, 0.070560 from the Shannon limit 0.500000."
	if page.Answer != want {
		t.Errorf("answer %q, want %q", page.Answer, want)
	}
}

func TestReportFile(t *testing.T) {
	t.Chdir(t.TempDir())
	out := succeed(t, "", strings.Fields("report ru01-r50-d3 --channel bec -o page.html")...)
	content, err := os.ReadFile("page.html")
	if err != nil || !strings.HasPrefix(string(content), "<!DOCTYPE html>") || !strings.Contains(out, "page.html") {
		t.Errorf("%v, %q", err, out)
	}
	if len(content) > 1<<20 {
		t.Errorf("the page has %d bytes", len(content))
	}
	code, _, stderr := command(t, "", strings.Fields("report ru01-r50-d3 --channel bec -o nowhere/page.html")...)
	if code != exitFailed || !strings.Contains(stderr, "nowhere/page.html: cannot be written") {
		t.Errorf("code %d, %q", code, stderr)
	}
}

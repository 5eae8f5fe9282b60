package main

import (
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"strconv"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "rewrite README.md and testdata/golden with what the commands answer now")

// seconds matches a running time, the only thing in an answer that changes
// from one run to the next.
var seconds = regexp.MustCompile(`\b[0-9.]+ s\b`)

// phases matches where the time went, of which small parts are left out.
var phases = regexp.MustCompile(`(?m)^  time went to .*\n( {26}.*\n)*`)

// typed runs a command as a person at a shell would have typed it and
// returns what the screen shows.
func typed(t *testing.T, line string) string {
	t.Helper()
	line, target, redirected := strings.Cut(line, " > ")
	words, err := split(line)
	if err != nil {
		t.Fatalf("%s: %v", line, err)
	}
	switch words[0] {
	case "cat":
		content, err := os.ReadFile(words[1])
		if err != nil {
			t.Fatal(err)
		}
		return string(content)
	case "tannery":
		if len(words) > 1 && (words[1] == "search" || words[1] == "simulate" || words[1] == "build") {
			words = append(words, "--no-progress") // at a terminal a bar, which disappears
		}
		code, stdout, stderr := command(t, "", words[1:]...)
		if redirected {
			if err := os.WriteFile(target, []byte(stdout), 0o600); err != nil {
				t.Fatal(err)
			}
			stdout = ""
		}
		screen := stdout + stderr
		if code != exitDone {
			screen += "exit code " + string(rune('0'+code)) + "\n"
		}
		return phases.ReplaceAllString(seconds.ReplaceAllString(screen, "0.1 s"), "")
	}
	t.Fatalf("%s: only tannery and cat are run", line)
	return ""
}

// split takes a command line apart at spaces, with 'single' quotes.
func split(line string) ([]string, error) {
	var words []string
	for i, part := range strings.Split(line, "'") {
		if i%2 == 1 {
			words = append(words, part)
		} else {
			words = append(words, strings.Fields(part)...)
		}
	}
	return words, nil
}

// rerun runs every command of a text with console blocks,
//
//	$ tannery limit …
//
// and returns the text with the answers of today.
func rerun(t *testing.T, text string) string {
	var out strings.Builder
	inside, skipping := false, false
	for _, line := range strings.SplitAfter(text, "\n") {
		bare := strings.TrimSuffix(line, "\n")
		switch {
		case bare == "```console":
			inside, skipping = true, false
		case bare == "```":
			inside, skipping = false, false
		case inside && strings.HasPrefix(bare, "$ "):
			skipping = true
			out.WriteString(line)
			out.WriteString(typed(t, bare[2:]))
			continue
		}
		if !skipping {
			out.WriteString(line)
		}
	}
	return out.String()
}

// TestReadme runs the commands of README.md in an empty folder and compares
// what they answer with what it shows.
func TestReadme(t *testing.T) {
	if runtime.GOARCH != "amd64" {
		t.Skip("where products and sums are rounded together, a search ends in another profile that is as good")
	}
	compare(t, "../../README.md", true)
}

// TestGolden does the same for the answers kept in testdata/golden.
func TestGolden(t *testing.T) {
	files, err := filepath.Glob("../../testdata/golden/*.md")
	if err != nil || len(files) == 0 {
		t.Fatalf("no golden files: %v", err)
	}
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".md"), func(t *testing.T) { compare(t, file, false) })
	}
}

func compare(t *testing.T, file string, needsFolder bool) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	file, err := filepath.Abs(file)
	if err != nil {
		t.Fatal(err)
	}
	repository := filepath.Dir(file)
	if !needsFolder {
		repository = filepath.Join(repository, "..", "..")
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	folder := t.TempDir()
	if err := os.Symlink(filepath.Join(repository, "testdata"), filepath.Join(folder, "testdata")); err != nil {
		t.Fatal(err)
	}
	t.Chdir(folder)
	got := rerun(t, string(want))
	if masked(got) == masked(string(want)) {
		return
	}
	if *update {
		if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	t.Errorf("%s: differs from what the commands answer (go test ./cmd/tannery -update rewrites it)\n%s", file, firstDifference(masked(string(want)), masked(got)))
}

// digits matches numbers that are written with all their digits. The last
// ones differ between processors, as some round products and sums together.
var digits = regexp.MustCompile(`\b\d+(\.\d{9,})?(\.\d+e-\d+|e-\d+)?\b`)

// masked rounds such numbers to nine digits after the point, so that
// uncertainties that are all rounding become 0.
func masked(text string) string {
	return digits.ReplaceAllStringFunc(text, func(s string) string {
		v, err := strconv.ParseFloat(s, 64)
		if err != nil || !strings.ContainsAny(s, ".e") {
			return s
		}
		return strconv.FormatFloat(v, 'f', 9, 64)
	})
}

// firstDifference shows the first line that is not the same.
func firstDifference(want, got string) string {
	w, g := strings.Split(want, "\n"), strings.Split(got, "\n")
	for i := range min(len(w), len(g)) {
		if w[i] != g[i] {
			return "want: " + w[i] + "\n got: " + g[i]
		}
	}
	return "one is longer than the other"
}

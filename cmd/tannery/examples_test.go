package main

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/spf13/cobra"
)

// shell runs the lines of examples as a reader's shell would, as far as
// examples go: pipes, > into a file, \ before a line end, and ~.
type shell struct {
	t *testing.T
	// programs stand for those of the reader that examples call.
	programs map[string]func(stdin string) string
}

func newShell(t *testing.T) shell {
	return shell{t, map[string]func(string) string{
		"draw-profile":     func(string) string { return profileText },
		"construct-matrix": func(string) string { return "" },
		"use-matrix":       func(string) string { return "" },
		"man":              func(string) string { return "" },
	}}
}

// run executes one line and returns what stands on the screen after it.
func (s shell) run(line string) string {
	s.t.Helper()
	line, target, redirected := strings.Cut(line, " > ")
	stdin := ""
	for part := range strings.SplitSeq(line, " | ") {
		stdin = s.command(strings.TrimSpace(part), stdin)
	}
	if redirected {
		if err := os.WriteFile(strings.TrimSpace(target), []byte(stdin), 0o600); err != nil {
			s.t.Fatal(err)
		}
	}
	return stdin
}

func (s shell) command(line, stdin string) string {
	s.t.Helper()
	words, err := split(line)
	if err != nil {
		s.t.Fatal(err)
	}
	for i, w := range words {
		if rest, ok := strings.CutPrefix(w, "~/"); ok {
			words[i] = filepath.Join(os.Getenv("HOME"), rest)
		}
	}
	if words[0] == "mkdir" {
		if err := os.MkdirAll(words[len(words)-1], 0o700); err != nil {
			s.t.Fatal(err)
		}
		return ""
	}
	if program, ok := s.programs[words[0]]; ok {
		return program(stdin)
	}
	if words[0] != "tannery" {
		s.t.Errorf("%s: no such program", line)
		return ""
	}
	// That searches end is tested elsewhere: here they need only find something.
	limits := [][]string{nil}
	if len(words) > 1 && words[1] == "search" && !slices.Contains(words, "--help") {
		limits = [][]string{{"--time", "2s"}, {"--time", "60s"}} // for a busy machine
	}
	for i, limit := range limits {
		var stdout, stderr bytes.Buffer
		code := run(s.t.Context(), append(words[1:], limit...), strings.NewReader(stdin), io.Writer(&stdout), &stderr)
		if code == exitUnreached && i+1 < len(limits) {
			continue
		}
		if code != exitDone {
			s.t.Errorf("%s\nexit code %d: %s", line, code, stderr.String())
		}
		return stdout.String()
	}
	return ""
}

// lines joins continued lines and drops comments.
func lines(example string) []string {
	var all []string
	for line := range strings.SplitSeq(strings.ReplaceAll(example, "\\\n", " "), "\n") {
		if line = strings.TrimSpace(line); line != "" && !strings.HasPrefix(line, "#") {
			all = append(all, line)
		}
	}
	return all
}

// TestExamples runs the examples of every command's help, from top to bottom
// in one folder that has the files of the harbour.
func TestExamples(t *testing.T) {
	testdata, err := filepath.Abs("../../testdata")
	if err != nil {
		t.Fatal(err)
	}
	root := newRoot()
	for _, c := range append(root.Commands(), root) {
		if c.Name() == "completion" || c.Hidden {
			continue
		}
		t.Run(c.Name(), func(t *testing.T) {
			folder := t.TempDir()
			t.Chdir(folder)
			t.Setenv("HOME", folder)
			stock(t, c, testdata)
			commands := lines(c.Example)
			if len(commands) == 0 {
				t.Error("no example")
			}
			shell := newShell(t)
			for _, line := range commands {
				shell.run(line)
			}
		})
	}
}

// stock puts the files that examples name into the folder: harbour.yaml is a
// brief where briefs are read, a profile elsewhere.
func stock(t *testing.T, c *cobra.Command, testdata string) {
	t.Helper()
	harbour := "profiles/harbour.yaml"
	if strings.Contains(c.Use, "BRIEF") {
		harbour = "briefs/harbour.yaml"
	}
	for name, source := range map[string]string{"harbour.yaml": harbour, "buoy.csv": "channels/buoy.csv", "receiver.csv": "channels/receiver.csv", "buoys.mtx": "matrices/buoys.mtx"} {
		content, err := os.ReadFile(filepath.Join(testdata, source))
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(name, content, 0o600); err != nil {
			t.Fatal(err)
		}
	}
}

// TestFirstMinute: without a command the program says what it does, and shows
// three commands, which TestExamples runs.
func TestFirstMinute(t *testing.T) {
	out := succeed(t, "")
	if n := len(lines(newRoot().Example)); n != 3 {
		t.Errorf("%d commands to begin with, want 3", n)
	}
	for _, line := range lines(newRoot().Example) {
		if !strings.Contains(out, strings.Fields(line)[1]) {
			t.Errorf("no %s in\n%s", line, out)
		}
	}
	if rows := strings.Count(out, "\n"); rows > 48 {
		t.Errorf("%d lines, more than a screen", rows)
	}
}

func TestManualPages(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1796119200")
	folder := t.TempDir()
	succeed(t, "", "man", folder)
	for _, c := range newRoot().Commands() {
		if c.Name() == "completion" || c.Hidden {
			continue
		}
		content, err := os.ReadFile(filepath.Join(folder, "tannery-"+c.Name()+".1"))
		if err != nil {
			t.Error(err)
			continue
		}
		for _, want := range []string{".TH", ".SH EXAMPLE", "tannery " + c.Name()} {
			if !strings.Contains(strings.ReplaceAll(string(content), `\-`, "-"), want) {
				t.Errorf("%s: no %q in its page", c.Name(), want)
			}
		}
	}
	if code, _, stderr := command(t, "", "man", filepath.Join(folder, "nowhere")); code != exitUsage || !strings.Contains(stderr, "found no folder") {
		t.Errorf("code %d, %q", code, stderr)
	}
}

package main

import (
	"io/fs"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

var (
	// testFunction matches what a test file defines.
	testFunction = regexp.MustCompile(`(?m)^func ((?:Test|Benchmark|Fuzz)[A-Z]\w*)\(`)
	// testName matches a mention of it.
	testName = regexp.MustCompile(`\b(?:Test|Benchmark|Fuzz)[A-Z]\w+`)
	// testPlace matches names and the folder of their package, as in
	// `TestA`, `TestB` in `de/channel`.
	testPlace = regexp.MustCompile("((?:`(?:Test|Benchmark|Fuzz)[A-Z]\\w+`,?\\s+)+)in\\s+`([\\w/]+)`")
)

// misplaced returns the tests and benchmarks that a text names and that are not
// where it says, given the names in each folder. Where it must, it says where.
func misplaced(text string, folders map[string]map[string]bool, must bool) []string {
	var wrong []string
	rest := text
	for _, match := range testPlace.FindAllStringSubmatch(text, -1) {
		for _, name := range testName.FindAllString(match[1], -1) {
			if !folders[match[2]][name] {
				wrong = append(wrong, name+" in "+match[2])
			}
		}
		rest = strings.Replace(rest, match[0], "", 1)
	}
	for _, name := range testName.FindAllString(rest, -1) {
		somewhere := slices.ContainsFunc(slices.Collect(maps.Values(folders)), func(names map[string]bool) bool { return names[name] })
		if must || !somewhere {
			wrong = append(wrong, name)
		}
	}
	return wrong
}

// Every test and benchmark that the documentation names as its witness is
// there, in the package that it says.
func TestDocumentedTestsExist(t *testing.T) {
	const root = "../.."
	folders := map[string]map[string]bool{}
	err := filepath.WalkDir(root, func(path string, entry fs.DirEntry, err error) error {
		if err != nil || !strings.HasSuffix(path, "_test.go") {
			return err
		}
		content, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		folder, err := filepath.Rel(root, filepath.Dir(path))
		folder = filepath.ToSlash(folder)
		for _, match := range testFunction.FindAllSubmatch(content, -1) {
			if folders[folder] == nil {
				folders[folder] = map[string]bool{}
			}
			folders[folder][string(match[1])] = true
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range []string{"README.md", "DEVELOPERS.md"} {
		text := string(content(t, filepath.Join(root, file)))
		if testPlace.FindString(text) == "" && file == "README.md" {
			t.Errorf("%s says of no test where it is", file)
		}
		for _, name := range misplaced(text, folders, file == "README.md") {
			t.Errorf("%s names %s: not there, or not said where", file, name)
		}
	}
}

func TestMisplaced(t *testing.T) {
	folders := map[string]map[string]bool{"de": {"TestNeck": true, "BenchmarkStep": true}, "de/channel": {"TestLimits": true}}
	for _, c := range []struct {
		text string
		must bool
		want string
	}{
		{"| x | `TestNeck`, `BenchmarkStep` in `de`, `TestLimits` in `de/channel` |", true, ""},
		{"`TestNeck`,\n`BenchmarkStep`\nin `de`", true, ""},
		{"| x | `TestNeck`, `TestLimits` in `de` |", true, "TestLimits in de"},
		{"`TestNeck` in `de/channel`", true, "TestNeck in de/channel"},
		{"`TestNeck` in `none`", true, "TestNeck in none"},
		{"`TestNeck` by itself", true, "TestNeck"},
		{"`TestNeck` by itself, and `TestGone`", false, "TestGone"},
	} {
		if got := strings.Join(misplaced(c.text, folders, c.must), ", "); got != c.want {
			t.Errorf("%s: %q, want %q", c.text, got, c.want)
		}
	}
}

// block matches a block of code with its language.
var block = regexp.MustCompile("(?ms)^```(\\w*)\n(.*?)^```$")

// inShell makes the commands of a block of README.md run without their work:
// searches end at once, for which the exit code is 3, and what go is to do is
// only told. Each tells its line.
const inShell = `set -eu
tannery() {
	code=0
	"$TANNERY" "$@" --time 1ns --quiet >&2 || code=$?
	[ "$code" = 3 ] || exit 1
	echo "tannery $*"
}
go() {
	if [ "$1 $2" = "run ./cmd/tannery" ]; then
		shift 2
		tannery "$@"
	else
		echo "go $*"
	fi
}
`

// The shell blocks of README.md run: their searches accept what they are given
// and write the profiles that the table beside them is about, and the tests are
// those that every change must pass. All other blocks are run by TestReadme.
func TestReadmeInShell(t *testing.T) {
	sh, err := exec.LookPath("sh")
	if err != nil {
		t.Skip("no shell here")
	}
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	testdata, err := filepath.Abs("../../testdata")
	if err != nil {
		t.Fatal(err)
	}
	folder := t.TempDir()
	if err := os.MkdirAll(filepath.Join(folder, "testdata", "profiles"), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink(filepath.Join(testdata, "briefs"), filepath.Join(folder, "testdata", "briefs")); err != nil {
		t.Skip("no symbolic links here: ", err)
	}
	readme := string(content(t, "../../README.md"))
	var ran []string
	for _, b := range block.FindAllStringSubmatch(readme, -1) {
		switch b[1] {
		case "console":
		case "sh":
			cmd := exec.CommandContext(t.Context(), sh, "-c", inShell+b[2])
			cmd.Dir = folder
			cmd.Env = append(os.Environ(), "TANNERY="+self, asTannery+"=1")
			var stderr strings.Builder
			cmd.Stderr = &stderr
			out, err := cmd.Output()
			if err != nil || len(out) == 0 {
				t.Errorf("%s%v, %s%s", b[2], err, out, stderr.String())
			}
			ran = append(ran, strings.Split(strings.TrimSpace(string(out)), "\n")...)
		default:
			t.Errorf("a block of %q, which no test runs", b[1])
		}
	}
	ci := strings.Split(strings.TrimSpace(string(content(t, "../../.ci/run"))), "\n")
	var profiles []string
	for _, line := range ran {
		words := strings.Fields(line)
		switch last := words[len(words)-1]; {
		case words[0] == "go" && line != ci[len(ci)-1]:
			t.Errorf("%s: .ci/run ends with %s", line, ci[len(ci)-1])
		case slices.Contains(words, "-o"):
			profiles = append(profiles, last)
		}
	}
	var want []string
	for _, row := range resultsRow.FindAllStringSubmatch(readme, -1) {
		want = append(want, "testdata/profiles/biawgn-r50-d"+row[1]+".yaml")
	}
	if len(want) == 0 || !slices.Equal(profiles, want) {
		t.Errorf("the shell blocks write %v, the table is about %v", profiles, want)
	}
}

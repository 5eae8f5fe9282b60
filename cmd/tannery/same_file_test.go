package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// A checkpoint is one file by whatever name: its lock also keeps away those who
// come by a symbolic link or another path.
func TestCheckpointInUseByAnotherName(t *testing.T) {
	folder := t.TempDir()
	state := filepath.Join(folder, "state")
	line := strings.Fields("simulate " + buoysMatrix + " --channel bec --parameter 0.44 --frames 20 -q --checkpoint " + state)
	if err := os.WriteFile(state, []byte("whatever"), 0o600); err != nil {
		t.Fatal(err)
	}
	lock, ok, err := lockFile(state + ".lock")
	if err != nil || !ok {
		t.Fatal(ok, err)
	}
	defer unlockFile(lock)
	elsewhere := filepath.Join(t.TempDir(), "link")
	if err := os.Symlink(state, elsewhere); err != nil {
		t.Skip("no symbolic links here: ", err)
	}
	beside := filepath.Join(t.TempDir(), "folder")
	if err := os.Symlink(folder, beside); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{state, elsewhere, filepath.Join(beside, "state"), folder + "/./state"} {
		line[len(line)-1] = name
		code, stdout, stderr := command(t, "", line...)
		if code != exitUsage || stdout != "" || !strings.Contains(stderr, name+": found in use by another process") {
			t.Errorf("%s: code %d, stdout %q, stderr %q", name, code, stdout, stderr)
		}
	}
}

// No command line makes one file of two, or writes over what it reads; a
// profile may get its node counts in place.
func TestSameFileTwice(t *testing.T) {
	folder := t.TempDir()
	at := func(name string) string { return filepath.Join(folder, name) }
	for name, source := range map[string]string{
		"buoys.mtx": buoysMatrix, "link.yaml": "../../testdata/profiles/harbour.yaml", "brief.yaml": "../../testdata/briefs/harbour.yaml",
		"rates.json": "../../testdata/simulations/buoys-2048.json",
	} {
		if err := os.WriteFile(at(name), content(t, source), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Symlink(at("buoys.mtx"), at("alias.svg")); err != nil {
		t.Skip("no symbolic links here: ", err)
	}
	before := content(t, at("buoys.mtx"))
	for args, want := range map[string]string{
		"search brief.yaml -o brief.yaml":                                                                     "--output: found brief.yaml, which is read; allowed: another file",
		"search brief.yaml --checkpoint ./brief.yaml":                                                         "--checkpoint: found ./brief.yaml, which is read; allowed: another file",
		"sweep brief.yaml --plot s.svg --checkpoint s.svg":                                                    "--checkpoint and --plot: found the same file, s.svg; allowed: two",
		"simulate buoys.mtx --channel bec --parameter 0.4 --plot alias.svg":                                   "--plot: found alias.svg, which is read; allowed: another file",
		"simulate buoys.mtx --channel bec --parameter 0.4 --checkpoint " + at("buoys.mtx"):                    "--checkpoint: found " + at("buoys.mtx") + ", which is read; allowed: another file",
		"profile buoys.mtx -o buoys.mtx":                                                                      "--output: found buoys.mtx, which is read; allowed: another file",
		"build link.yaml --length 100 -o link.yaml":                                                           "--output: found link.yaml, which is read; allowed: another file",
		"report link.yaml -o link.yaml":                                                                       "--output: found link.yaml, which is read; allowed: another file",
		"report ru01-r50-d3 --channel bec --simulation rates.json -o rates.json":                              "--output: found rates.json, which is read; allowed: another file",
		"search --channel biawgn --rate 0.5 -o new.yaml --checkpoint " + strings.Repeat("./", 3) + "new.yaml": "--checkpoint and --output: found the same file, ./././new.yaml; allowed: two",
	} {
		t.Run(args, func(t *testing.T) {
			t.Chdir(folder)
			code, stdout, stderr := command(t, "", strings.Fields(args)...)
			if code != exitUsage || stdout != "" || stderr != "tannery: "+want+"\n" {
				t.Errorf("code %d, stdout %q, stderr %q; want %s", code, stdout, stderr, want)
			}
		})
	}
	if string(content(t, at("buoys.mtx"))) != string(before) {
		t.Error("the matrix has changed")
	}
	t.Chdir(folder)
	succeed(t, "", strings.Fields("export link.yaml --length 1000 --channel bec -q -o link.yaml")...)
	if text := string(content(t, "link.yaml")); !strings.Contains(text, "realization:") {
		t.Errorf("no node counts in\n%s", text)
	}
}

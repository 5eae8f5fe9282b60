package main

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"testing"
)

func TestOutputAppearsWhole(t *testing.T) {
	folder := t.TempDir()
	for _, c := range []struct {
		name string
		make func(path string) error
	}{
		{"new.yaml", func(string) error { return nil }},
		{"old.yaml", func(path string) error { return os.WriteFile(path, []byte("before"), 0o640) }},
		{"link.yaml", func(path string) error { return os.Symlink(filepath.Join(folder, "old.yaml"), path) }},
	} {
		path := filepath.Join(folder, c.name)
		if err := c.make(path); err != nil {
			t.Fatal(err)
		}
		before, existed := os.Lstat(path)
		out, err := openOutput("--output", path)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if after, err := os.Lstat(path); (existed == nil) != (err == nil) || existed == nil && after.Size() != before.Size() {
			t.Errorf("%s: looking whether it can be written changed it", c.name)
		}
		if err := out.write([]byte(c.name)); err != nil {
			t.Errorf("%s: %v", c.name, err)
		}
		if got, _ := os.ReadFile(path); string(got) != c.name {
			t.Errorf("%s: holds %q", c.name, got)
		}
		if after, _ := os.Lstat(path); existed == nil && after.Mode() != before.Mode() {
			t.Errorf("%s: mode %v became %v", c.name, before.Mode(), after.Mode())
		}
	}
	entries, err := os.ReadDir(folder)
	if err != nil || len(entries) != 3 {
		t.Errorf("%d entries in the folder (%v), want 3: %v", len(entries), err, entries)
	}
}

func TestOutputThatCannotBeWritten(t *testing.T) {
	folder := t.TempDir()
	file := filepath.Join(folder, "file")
	if err := os.WriteFile(file, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	dangling := filepath.Join(folder, "dangling")
	if err := os.Symlink("nowhere", dangling); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ path, want string }{
		{folder, ": cannot be written: is a directory"},
		{filepath.Join(folder, "no", "such"), ": cannot be written: no such file or directory"},
		{filepath.Join(file, "below"), ": cannot be written: not a directory"},
		{dangling, ": cannot be written: is a symbolic link to nowhere, which does not exist"},
	} {
		_, err := openOutput("--output", c.path)
		if err == nil || err.Error() != "--output "+c.path+c.want {
			t.Errorf("%s: %v; want %q", c.path, err, c.want)
		}
		if exitCode(t.Context(), err) != exitFailed {
			t.Errorf("%s: exit code %d, want 1", c.path, exitCode(t.Context(), err))
		}
	}
	var usage usageError
	if _, err := openOutput("--output", ""); !errors.As(err, &usage) {
		t.Errorf("an empty name: %v", err)
	}
}

func TestProtectedFileIsNotReplaced(t *testing.T) {
	if os.Geteuid() == 0 {
		t.Skip("the superuser may write to everything")
	}
	path := filepath.Join(t.TempDir(), "protected")
	if err := os.WriteFile(path, nil, 0o400); err != nil {
		t.Fatal(err)
	}
	if _, err := openOutput("--output", path); !errors.Is(err, fs.ErrPermission) {
		t.Errorf("%v, want permission denied", err)
	}
}

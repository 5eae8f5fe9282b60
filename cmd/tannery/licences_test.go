package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// licencePhrases is how the permissive licences that we accept begin, or what
// only they say.
var licencePhrases = map[string]string{
	"MIT":             "Permission is hereby granted, free of charge",
	"BSD":             "Redistribution and use in source and binary forms",
	"BSD, fonts OFL":  "Redistribution and use in source and binary forms",
	"Apache 2.0":      "Apache License",
	"CC BY 4.0":       "Creative Commons Attribution 4.0 International Public License",
	"FreeType or GPL": "The FreeType License, which is similar to the original BSD license",
}

// Every module that goes into the program stands in the table of DEVELOPERS.md
// with a permissive licence, which is the one that the module carries; and no
// other does.
func TestLicences(t *testing.T) {
	text, err := os.ReadFile("../../DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	listed := map[string]string{}
	for _, row := range regexp.MustCompile("(?m)^\\| `([^`]+)` \\| ([^|]+) \\|$").FindAllStringSubmatch(string(text), -1) {
		if strings.Contains(row[1], ".") && strings.Contains(row[1], "/") && !strings.HasSuffix(row[1], "/") {
			listed[row[1]] = row[2]
		}
	}
	out, err := exec.Command("go", "list", "-deps", "-f", "{{with .Module}}{{if not .Main}}{{.Path}} {{.Dir}}{{end}}{{end}}", ".").Output()
	if err != nil {
		t.Skip("the go command does not list modules here: ", err)
	}
	var used []string
	for line := range strings.Lines(string(out)) {
		path, folder, ok := strings.Cut(strings.TrimSpace(line), " ")
		if !ok || slices.Contains(used, path) {
			continue
		}
		used = append(used, path)
		licence, ok := listed[path]
		phrase, accepted := licencePhrases[licence]
		if !ok || !accepted {
			t.Errorf("%s: listed with the licence %q, want one of the permissive ones that are accepted", path, licence)
			continue
		}
		files, err := filepath.Glob(filepath.Join(folder, "LICENSE*"))
		if err != nil || !slices.ContainsFunc(files, func(file string) bool {
			content, err := os.ReadFile(file)
			return err == nil && strings.Contains(strings.Join(strings.Fields(string(content)), " "), phrase)
		}) {
			t.Errorf("%s: its licence does not say %q", path, phrase)
		}
	}
	for path := range listed {
		if !slices.Contains(used, path) {
			t.Errorf("%s: listed, but not in the program", path)
		}
	}
	if len(used) < 5 {
		t.Errorf("only %d modules found", len(used))
	}
}

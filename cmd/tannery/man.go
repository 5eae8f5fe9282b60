package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/cobra/doc"
)

func newMan() *cobra.Command {
	return &cobra.Command{
		Use:   "man FOLDER",
		Short: "manual pages, one for each command, into a folder",
		Example: `# for man(1) of this user
mkdir -p ~/.local/share/man/man1
tannery man ~/.local/share/man/man1
man tannery-search`,
		Long: `The pages are made from the same texts as --help. Their date is today's, or that
of SOURCE_DATE_EPOCH.`,
		Args: atMost(1, "one folder"),
		ValidArgsFunction: func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
			return nil, cobra.ShellCompDirectiveFilterDirs
		},
		RunE: runMan,
	}
}

func runMan(cmd *cobra.Command, args []string) error {
	if len(args) == 0 {
		return usagef("folder: missing; allowed: a folder for the manual pages")
	}
	if args[0] == "" {
		return usagef("folder \"\": must be the name of a folder that exists")
	}
	if info, err := os.Stat(args[0]); err != nil || !info.IsDir() {
		return usagef("%s: found no folder; allowed: a folder that exists", args[0])
	}
	pages, err := manualPages(cmd.Root())
	if err != nil {
		return err
	}
	for _, p := range pages {
		file, err := openOutput("", filepath.Join(args[0], p.name))
		if err != nil {
			return err
		}
		if err := file.write(p.text); err != nil {
			return err
		}
	}
	return nil
}

// manualPage is a page with the name of its file.
type manualPage struct {
	name string
	text []byte
}

// manualPages renders the page of the program and those of its commands.
func manualPages(root *cobra.Command) ([]manualPage, error) {
	date := now()
	var pages []manualPage
	for _, c := range append([]*cobra.Command{root}, root.Commands()...) {
		if c != root && (!c.IsAvailableCommand() || c.Name() == "completion") {
			continue
		}
		c.DisableAutoGenTag = true
		var b bytes.Buffer
		header := &doc.GenManHeader{Section: "1", Date: &date, Source: program, Manual: "degree profiles for Tanner graphs"}
		if err := doc.GenMan(c, header, &b); err != nil {
			return nil, fmt.Errorf("manual page of %s: %w", c.CommandPath(), err)
		}
		pages = append(pages, manualPage{strings.ReplaceAll(c.CommandPath(), " ", "-") + ".1", b.Bytes()})
	}
	return pages, nil
}

package main

import (
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report/picture"
)

// pictureOption writes a picture of the answer into a file.
type pictureOption struct {
	plot    string
	picture nameOption
}

// newPictureOption knows the names of the pictures; the first is the default.
func newPictureOption(names ...string) pictureOption {
	return pictureOption{picture: nameOption{names: names, value: names[0]}}
}

func (o *pictureOption) addPicture(cmd *cobra.Command, usage string) {
	cmd.Flags().StringVar(&o.plot, "plot", "", "picture into `FILE`, SVG or PNG by its ending")
	cmd.Flags().Var(&o.picture, "picture", "which picture: "+usage)
	complete(cmd, "picture", o.picture.names)
	if err := cmd.MarkFlagFilename("plot", picture.Formats...); err != nil {
		panic(err) // an option that does not exist
	}
}

// asked tells whether a picture is wanted.
func (o *pictureOption) asked(cmd *cobra.Command) bool { return cmd.Flags().Changed("plot") }

// plotFile is a picture file that can be written.
type plotFile struct {
	file   *outputFile
	format string
}

// open finds out whether the picture can be written; nil if none is wanted.
func (o *pictureOption) open(cmd *cobra.Command) (*plotFile, error) {
	if !o.asked(cmd) {
		if cmd.Flags().Changed("picture") {
			return nil, usagef("--picture: needs --plot beside it")
		}
		return nil, nil
	}
	format := strings.ToLower(strings.TrimPrefix(filepath.Ext(o.plot), "."))
	known := false
	for _, f := range picture.Formats {
		known = known || f == format
	}
	if !known {
		return nil, usagef("--plot: found %q; allowed: a file name that ends in .%s", o.plot, strings.Join(picture.Formats, " or ."))
	}
	file, err := openOutput("--plot", o.plot)
	if err != nil {
		return nil, err
	}
	return &plotFile{file, format}, nil
}

// write renders the picture and stores it whole.
func (f *plotFile) write(p picture.Picture) error {
	content, err := p.Render(f.format)
	if err != nil {
		return err
	}
	return f.file.write(content)
}

// atTerminal tells whether standard output is a terminal.
func atTerminal(cmd *cobra.Command) bool {
	w := cmd.OutOrStdout()
	if pipe, ok := w.(*pipeWriter); ok {
		w = pipe.w
	}
	return isTerminal(w)
}

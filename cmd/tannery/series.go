package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"time"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"tannery/cmd/tannery/internal/brief"
	"tannery/optimize"
)

// seriesCell is one search of a series.
type seriesCell struct {
	name   string // of its profile's file, and in progress
	brief  brief.Brief
	beyond error // why no ensemble can meet the brief; nil if one may
}

// seriesOptions are the options of commands that do several searches, one
// after the other, each on all processors.
type seriesOptions struct {
	*searchOptions
	profiles string // folder for the profiles
	csv      bool
	pictureOption
}

func (o *seriesOptions) add(cmd *cobra.Command, picture string, varied ...string) {
	o.searchOptions.add(cmd)
	for _, name := range append([]string{"output"}, varied...) {
		if err := cmd.Flags().MarkHidden(name); err != nil {
			panic(err) // an option that does not exist
		}
	}
	cmd.Flags().Lookup("checkpoint").Usage = "`FILE` for the searches that are done: the same command continues behind them"
	cmd.Flags().StringVar(&o.profiles, "profiles", "", "`FOLDER` for the profiles, made if it is not there")
	cmd.Flags().BoolVar(&o.csv, "csv", false, "answer with CSV, one line per search")
	o.addPicture(cmd, picture)
}

// check refuses what a series cannot do.
func (o *seriesOptions) check(cmd *cobra.Command, args []string, varied ...string) error {
	if o.csv && asJSON(cmd) {
		return usagef("--csv and --json: only one of the two")
	}
	if cmd.Flags().Changed("profiles") && o.profiles == "" {
		return usagef("--profiles \"\": must be the name of a folder")
	}
	if len(args) > 0 && args[0] == "-" {
		return usagef("-: found standard input; allowed: a file, because the brief is read for each search")
	}
	for _, name := range append([]string{"output"}, varied...) {
		if cmd.Flags().Changed(name) {
			return usagef("--%s: found in %s; allowed: what %s --help lists", name, cmd.CommandPath(), cmd.CommandPath())
		}
	}
	return nil
}

// vary sets an option of search to one item of the list that the series takes
// by an option of its own.
func (o *seriesOptions) vary(cmd *cobra.Command, option, item, list string) error {
	err := cmd.Flags().Set(option, item)
	var refused *pflag.InvalidValueError
	if errors.As(err, &refused) {
		return usagef("--%s: found %q; allowed: in a list with commas, %w", list, item, refused.Unwrap())
	}
	return err
}

// search does the cells that the checkpoint does not have yet, and returns the
// rows of all. Where it is interrupted the error says so, and what is done is
// kept.
func (o *seriesOptions) search(cmd *cobra.Command, command string, cells []seriesCell) ([]seriesRecord, error) {
	kept, records, err := o.resume(cmd, command, cells)
	if err != nil {
		return nil, err
	}
	done := false
	defer func() {
		if failed := kept.close(done); failed != nil {
			warn(cmd, []string{failed.Error()})
		}
	}()
	if err := o.folder(cmd, cells); err != nil {
		return nil, err
	}
	for i := range cells {
		if i >= len(records) {
			record, err := o.one(cmd, cells[i], i, len(cells))
			if err != nil {
				return records, err
			}
			records = append(records, record)
			if kept != nil {
				state, err := json.Marshal(records)
				if err != nil {
					return records, err
				}
				kept.keep(state)
			}
		}
		if err := o.store(cells[i], records[i]); err != nil {
			return records, err
		}
	}
	done = true
	return records, nil
}

// resume opens the checkpoint, if there is one, and returns what is done.
func (o *seriesOptions) resume(cmd *cobra.Command, command string, cells []seriesCell) (*checkpoint, []seriesRecord, error) {
	if !cmd.Flags().Changed("checkpoint") {
		return nil, nil, nil
	}
	var briefs []json.RawMessage
	for _, c := range cells {
		method, err := searchMethod(c.brief)
		if err != nil {
			return nil, nil, err
		}
		head, err := checkpointHead(c.brief, method)
		if err != nil {
			return nil, nil, err
		}
		briefs = append(briefs, head.Brief)
	}
	asked, err := json.Marshal(map[string]any{"command": command, "searches": briefs})
	if err != nil {
		return nil, nil, err
	}
	kept, state, err := openState(o.checkpoint, checkpointFile{Kind: seriesKind, Version: checkpointVersion, Program: program, Brief: asked})
	if err != nil || state == nil {
		return kept, nil, err
	}
	records, err := recordsIn(state, cells)
	if err != nil {
		kept.close(false)
		return nil, nil, usagef("%s: found a damaged checkpoint; allowed: that of this series, another --checkpoint, or to remove the file and start anew", o.checkpoint)
	}
	if !quiet(cmd) {
		fmt.Fprintf(cmd.ErrOrStderr(), "tannery: continuing from %s: %d of %d searches are done\n", o.checkpoint, len(records), len(cells))
	}
	return kept, records, nil
}

// unreachable is the status of a search whose brief no ensemble meets.
const unreachable = "unreachable"

// one does one search. That nothing can be found is a row that says so.
func (o *seriesOptions) one(cmd *cobra.Command, c seriesCell, i, n int) (seriesRecord, error) {
	b, row := c.brief, c.row()
	if c.beyond != nil {
		row.Status, row.Note = unreachable, c.beyond.Error()
		return seriesRecord{Row: row}, nil
	}
	method, err := searchMethod(b)
	if err != nil {
		return seriesRecord{}, err
	}
	shown := newProgress(cmd.ErrOrStderr(), o.noProgress || quiet(cmd), b.Time)
	defer context.AfterFunc(cmd.Context(), shown.ending)()
	start := time.Now()
	result, err := optimize.Search(cmd.Context(), problemOf(b), optimize.Settings{
		Method: method, Seed: b.Seed, Time: b.Time, Evaluations: b.Evaluations, Workers: workers(b),
		Recorder: &seriesProgress{searchProgress{shown, b.Families[0]}, fmt.Sprintf("%d of %d, %s", i+1, n, c.name), i, n},
	})
	shown.finish()
	if cmd.Context().Err() != nil {
		return seriesRecord{}, context.Cause(cmd.Context())
	}
	row.Seconds = time.Since(start).Seconds()
	if err != nil {
		if !errors.Is(err, optimize.ErrUnreachable) {
			return seriesRecord{}, searchError(cmd.Context(), err, nil)
		}
		row.Status, row.Note = unreachable, err.Error()
		return seriesRecord{Row: row}, nil
	}
	p, err := foundProfile(b, result)
	if err != nil {
		return seriesRecord{}, err
	}
	row.Status = result.Status.String()
	text, err := p.Encode()
	return seriesRecord{withProfile(row, p), string(text)}, err
}

func largestDegree(b brief.Brief) int {
	v := problemOf(b).VariableDegrees
	return v[len(v)-1]
}

// folder makes the folder for the profiles, if one is asked for, and finds out
// whether they can be written there and are no files that the command line
// names.
func (o *seriesOptions) folder(cmd *cobra.Command, cells []seriesCell) error {
	if o.profiles == "" {
		return nil
	}
	if err := os.MkdirAll(o.profiles, 0o777); err != nil {
		return outputError("--profiles", o.profiles, err)
	}
	for _, c := range cells {
		path := o.profileOf(c)
		for _, named := range append(cmd.Flags().Args(), o.checkpoint) {
			if sameFile(path, named) {
				return usagef("--profiles %s: found %s, which is read or written for something else; allowed: another folder", o.profiles, path)
			}
		}
		if _, err := openOutput("--profiles", path); err != nil {
			return err
		}
	}
	return nil
}

// profileOf is the file for the profile of a cell.
func (o *seriesOptions) profileOf(c seriesCell) string {
	return filepath.Join(o.profiles, c.name+".yaml")
}

// store writes a cell's profile into the folder.
func (o *seriesOptions) store(c seriesCell, r seriesRecord) error {
	if o.profiles == "" || r.Profile == "" {
		return nil
	}
	out, err := openOutput("--profiles", o.profileOf(c))
	if err != nil {
		return err
	}
	return out.write([]byte(r.Profile))
}

// seriesProgress shows the progress of one search as that of its place in the
// series.
type seriesProgress struct {
	searchProgress
	name string
	i, n int
}

// Progress shows the name of the search as its phase.
func (s *seriesProgress) Progress(p optimize.Progress) {
	p.Phase = s.name
	p.Fraction = (float64(s.i) + p.Fraction) / float64(s.n)
	s.searchProgress.Progress(p)
}

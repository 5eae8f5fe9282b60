package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"strings"

	"tannery/cmd/tannery/internal/report"
	"tannery/ensembles/document"
)

// briefLines lays a brief out as lines of dotted keys and values, in its own
// order, without the keys that say what kind of file it is.
func briefLines(t document.Tree) ([]report.Asked, error) {
	lines := []report.Asked{}
	if t.IsZero() {
		return lines, nil
	}
	text, err := t.MarshalJSON()
	if err != nil {
		return nil, err
	}
	decoder := json.NewDecoder(bytes.NewReader(text))
	decoder.UseNumber()
	if err := flatten(decoder, "", &lines); err != nil {
		return nil, fmt.Errorf("brief of the profile: %w", err)
	}
	kept := lines[:0]
	for _, l := range lines {
		if l.Key != "kind" && l.Key != "version" {
			l.Key = strings.ReplaceAll(l.Key, "_", " ")
			kept = append(kept, l)
		}
	}
	return kept, nil
}

// flatten reads one value; mappings become dotted keys, lists one value with
// commas.
func flatten(d *json.Decoder, path string, lines *[]report.Asked) error {
	token, err := d.Token()
	if err != nil {
		return err
	}
	switch token {
	case json.Delim('{'):
		for d.More() {
			key, err := d.Token()
			if err != nil {
				return err
			}
			inner := fmt.Sprint(key)
			if path != "" {
				inner = path + ", " + inner
			}
			if err := flatten(d, inner, lines); err != nil {
				return err
			}
		}
		_, err = d.Token()
		return err
	case json.Delim('['):
		var items []report.Asked
		for d.More() {
			if err := flatten(d, "", &items); err != nil {
				return err
			}
		}
		values := make([]string, len(items))
		for i, item := range items {
			values[i] = item.Value
		}
		*lines = append(*lines, report.Asked{Key: path, Value: strings.Join(values, ", ")})
		_, err = d.Token()
		return err
	}
	*lines = append(*lines, report.Asked{Key: path, Value: fmt.Sprint(token)})
	return nil
}

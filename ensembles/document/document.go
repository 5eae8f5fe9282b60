// Package document reads YAML (and with it JSON) strictly and reports every
// problem at once, each with its file, line, column, key, the value found and
// what is allowed. It is shared by profiles, briefs and measured densities.
//
// A reader asks a Document for the keys it knows and for the type and range
// of each value. Problems are collected on the way; Err returns them all,
// together with the keys that nobody asked for:
//
//	doc := document.Parse("brief.yaml", data)
//	root := doc.Kind("brief", 1)
//	rate := root.Required("rate").Float(document.Between(0, 1))
//	link := root.Optional("link").Mapping()
//	if err := doc.Err(); err != nil { … }
//
// Refused wherever they occur: duplicate keys, a second document, anchors,
// aliases, merge keys, explicit tags, integers written in any way but plain
// decimal digits, and numbers that are not finite.
package document

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"gopkg.in/yaml.v3"
)

const (
	// MaxSize is the largest document in bytes. The YAML tree takes some
	// hundred times the text, so this bounds memory to a few hundred MB.
	MaxSize = 4 << 20
	// MaxDepth is how deep mappings and lists may nest.
	MaxDepth = 32
)

// Document is a YAML document on its way into typed values, with the
// problems found so far. It is not safe for concurrent use.
type Document struct {
	name     string
	root     *yaml.Node // nil if the text could not be read at all
	problems Problems
	warnings []string
	mappings []*Mapping          // handed out, to find keys nobody asked for
	refused  map[*yaml.Node]bool // reported already; accessors stay silent
}

// Parse reads one YAML document. The name stands for the file in messages.
// Problems, even of syntax, are kept for Err.
func Parse(name string, data []byte) *Document {
	d := &Document{name: name, refused: map[*yaml.Node]bool{}}
	if len(data) > MaxSize {
		d.report(Problem{Line: 1, Column: 1, Found: "more than " + size(MaxSize), Allowed: "at most " + size(MaxSize)})
		return d
	}
	decoder := yaml.NewDecoder(bytes.NewReader(data))
	var first, second yaml.Node
	err := decode(decoder, &first)
	switch {
	case errors.Is(err, io.EOF):
		d.report(Problem{Line: 1, Column: 1, Found: "an empty document", Allowed: "a mapping of keys to values"})
		return d
	case err != nil:
		d.report(syntaxProblem(data, err))
		return d
	}
	d.root = first.Content[0]
	d.checkStructure(d.root, "", 1)
	switch err := decode(decoder, &second); {
	case err == nil:
		d.report(Problem{Line: second.Line, Column: second.Column, Found: "a second document", Allowed: "one document"})
	case !errors.Is(err, io.EOF):
		d.report(syntaxProblem(data, err))
	}
	return d
}

// Read reads one YAML document from r, at most MaxSize bytes of it, as Parse
// does. An error of r itself becomes a problem too.
func Read(name string, r io.Reader) *Document {
	data, err := io.ReadAll(io.LimitReader(r, MaxSize+1))
	if err != nil {
		d := &Document{name: name}
		d.report(Problem{Found: err.Error(), Allowed: "a readable file"})
		return d
	}
	return Parse(name, data)
}

// decode guards against a panic in the YAML library, which is its way to
// fail on inputs it did not foresee.
func decode(decoder *yaml.Decoder, into *yaml.Node) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = fmt.Errorf("yaml: %v", p)
		}
	}()
	return decoder.Decode(into)
}

// Root returns the document's top mapping. The key $schema, by which editors
// find the JSON Schema, is allowed there.
func (d *Document) Root() *Mapping {
	if d.root == nil {
		return &Mapping{}
	}
	m := Value{doc: d, node: d.root}.Mapping()
	if schema := m.Optional("$schema"); schema.Present() {
		_ = schema.String()
	}
	return m
}

// Kind returns the top mapping of a document that must say what it is, with
// the keys kind and version. If it says that it is of another kind, this is
// the only thing reported about its contents.
func (d *Document) Kind(kind string, version int) *Mapping {
	m := d.Root()
	stated := m.Required("kind")
	stated.Choice(kind)
	if stated.Present() && stated.Faulty() {
		d.mappings = nil
		return &Mapping{}
	}
	m.Required("version").Int(version, version)
	return m
}

// Err returns all problems found so far, in the order of the file, as an
// error of type Problems: those of the values asked for, and all keys that
// nobody asked for. It is nil if there are none.
func (d *Document) Err() error {
	problems := slices.Clone(d.problems)
	for _, m := range d.mappings {
		problems = append(problems, m.unknownKeys()...)
	}
	if len(problems) == 0 {
		return nil
	}
	slices.SortStableFunc(problems, comparePositions)
	return slices.Compact(problems)
}

// Warnings returns what was said by Value.Warn, each with its position.
func (d *Document) Warnings() []string { return slices.Clone(d.warnings) }

func (d *Document) report(p Problem) {
	p.File = d.name
	d.problems = append(d.problems, p)
}

// size writes a number of bytes that is a multiple of 1 MiB.
func size(bytes int) string { return fmt.Sprintf("%d MiB", bytes>>20) }

// join appends a key to a dotted path.
func join(path, key string) string {
	if key == "" || strings.ContainsAny(key, ". \t\n:") {
		key = quote(key)
	}
	if path == "" {
		return key
	}
	return path + "." + key
}

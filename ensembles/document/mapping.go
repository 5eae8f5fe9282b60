package document

import (
	"strconv"
	"strings"

	"gopkg.in/yaml.v3"
)

// Mapping is a mapping of a document. Asking for a key makes it known; keys
// of which nobody asked are reported by Document.Err. The zero Mapping is
// empty and silent: it stands where a problem was reported already, so that
// no second one follows from the first.
type Mapping struct {
	value Value
	known []string
}

// Required returns the value of a key that must be there. If it is missing,
// the accessor of its type says so.
func (m *Mapping) Required(key string) Value {
	v := m.Optional(key)
	v.required = true
	return v
}

// Optional returns the value of a key that may be missing: the accessors of
// a missing value return zero silently, and Present is false.
func (m *Mapping) Optional(key string) Value {
	if m.value.doc == nil {
		return Value{}
	}
	m.Known(key)
	v := Value{doc: m.value.doc, path: join(m.value.path, key), parent: m.value.node}
	for i := 0; i < len(m.value.node.Content); i += 2 {
		if k := m.value.node.Content[i]; k.Kind == yaml.ScalarNode && k.Value == key {
			v.node, v.key = m.value.node.Content[i+1], k
			break
		}
	}
	return v
}

// Known declares keys that are allowed though their values are not asked for
// this time, because another key makes them irrelevant.
func (m *Mapping) Known(keys ...string) {
	for _, key := range keys {
		if !contains(m.known, key) {
			m.known = append(m.known, key)
		}
	}
}

// Value returns the mapping as a value, to report a problem of the whole.
func (m *Mapping) Value() Value { return m.value }

// Present tells whether the mapping is there and is one.
func (m *Mapping) Present() bool { return m.value.doc != nil }

// Entry is a key of digits with its value.
type Entry struct {
	Key   int
	Value Value
}

// ByDegree returns the entries of a mapping whose keys are whole numbers
// from low to high, such as degrees, in the order of the file; at least one
// must be there. Keys within double quotes are allowed too, because JSON
// knows no others. If a key is refused the whole is Faulty, and the other
// entries are returned for their own problems to be found. what describes
// the mapping in messages.
func (v Value) ByDegree(low, high int, what string) []Entry {
	if !v.expect(yaml.MappingNode, what) {
		return nil
	}
	if len(v.node.Content) == 0 {
		v.Refuse("an empty mapping", what)
	}
	var entries []Entry
	for i := 0; i < len(v.node.Content); i += 2 {
		key, value := v.node.Content[i], v.node.Content[i+1]
		if key.Kind != yaml.ScalarNode || v.doc.refused[key] {
			v.doc.refused[v.node] = true // what is left says nothing of the whole
			continue
		}
		at := Value{doc: v.doc, node: value, key: key, parent: v.node, path: join(v.path, key.Value), required: true}
		n, err := strconv.Atoi(key.Value)
		if err != nil || strconv.Itoa(n) != key.Value || n < low || n > high || key.Style&^(yaml.DoubleQuotedStyle|yaml.FlowStyle) != 0 {
			v.doc.report(Problem{Line: key.Line, Column: key.Column, Key: v.path,
				Found: "the key " + describe(key), Allowed: wholeNumber(low, high)})
			v.doc.refused[v.node] = true
			continue
		}
		entries = append(entries, Entry{n, at})
	}
	return entries
}

// unknownKeys reports the keys that were not asked for, each with the
// nearest of those that are known.
func (m *Mapping) unknownKeys() Problems {
	var problems Problems
	for i := 0; i < len(m.value.node.Content); i += 2 {
		key := m.value.node.Content[i]
		if key.Kind != yaml.ScalarNode || contains(m.known, key.Value) || m.value.doc.refused[key] {
			continue
		}
		allowed := strings.Join(visible(m.known), ", ")
		if near := nearest(key.Value, m.known); near != "" {
			allowed = near + " (nearest of " + allowed + ")"
		}
		problems = append(problems, Problem{File: m.value.doc.name, Line: key.Line, Column: key.Column,
			Key: join(m.value.path, key.Value), Found: "an unknown key", Allowed: allowed})
	}
	return problems
}

// visible leaves out $schema, which is for editors.
func visible(keys []string) []string {
	var out []string
	for _, key := range keys {
		if !strings.HasPrefix(key, "$") {
			out = append(out, key)
		}
	}
	return out
}

func contains(keys []string, key string) bool {
	for _, k := range keys {
		if k == key {
			return true
		}
	}
	return false
}

package document

import (
	"fmt"

	"gopkg.in/yaml.v3"
)

// IsList tells whether the value is a list, for those that may be one or a
// single item.
func (v Value) IsList() bool { return v.node != nil && v.node.Kind == yaml.SequenceNode }

// List returns the values of a list, which may be empty. what describes the
// list in messages.
func (v Value) List(what string) []Value {
	if !v.expect(yaml.SequenceNode, what) {
		return nil
	}
	items := make([]Value, len(v.node.Content))
	for i, n := range v.node.Content {
		items[i] = Value{doc: v.doc, node: n, parent: v.node, path: fmt.Sprintf("%s[%d]", v.path, i), required: true}
	}
	return items
}

// Ints returns a list of at least one whole number from low to high, all
// different.
func (v Value) Ints(low, high int) []int {
	what := "a list of different numbers, each " + wholeNumber(low, high)
	list := v.filled(what)
	var out []int
	seen := map[int]bool{}
	for _, item := range list {
		n := item.Int(low, high)
		switch {
		case item.Faulty():
		case seen[n]:
			item.Refuse(fmt.Sprintf("%d a second time", n), "each number once")
		default:
			seen[n] = true
			out = append(out, n)
		}
	}
	return out
}

// Floats returns a list of at least one number, each within the range.
func (v Value) Floats(r Range) []float64 {
	var out []float64
	for _, item := range v.filled("a list, each item " + r.String()) {
		out = append(out, item.Float(r))
	}
	return out
}

// Strings returns a list of texts, which may be empty.
func (v Value) Strings() []string {
	var out []string
	for _, item := range v.List("a list of texts") {
		out = append(out, item.String())
	}
	return out
}

func (v Value) filled(what string) []Value {
	list := v.List(what)
	if list != nil && len(list) == 0 {
		v.Refuse("an empty list", what)
	}
	return list
}

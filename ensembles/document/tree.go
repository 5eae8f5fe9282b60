package document

import (
	"bytes"
	"encoding/json"
	"fmt"
	"strconv"

	"gopkg.in/yaml.v3"
)

// Tree is a YAML value kept as it was read, without its comments, such as a
// brief within the profile it led to. The zero Tree is no value. Treat it as
// immutable.
type Tree struct{ node *yaml.Node }

// Tree returns the value, whatever it is, as a Tree; all keys within it are
// allowed.
func (v Value) Tree() Tree {
	if v.doc == nil || v.node == nil || v.doc.refused[v.node] {
		return Tree{}
	}
	return Tree{clean(v.node)}
}

// TreeOf makes a Tree of a Go value, as yaml.Marshal would write it.
func TreeOf(value any) (Tree, error) {
	var n yaml.Node
	if err := n.Encode(value); err != nil {
		return Tree{}, fmt.Errorf("cannot be written as YAML: %w", err)
	}
	return Tree{clean(&n)}, nil
}

// ParseTree makes a Tree of a document, which must obey the rules that hold
// for all documents. The name stands for the file in messages.
func ParseTree(name string, data []byte) (Tree, error) {
	d := Parse(name, data)
	if err := d.Err(); err != nil {
		return Tree{}, err
	}
	return Tree{clean(d.root)}, nil
}

// IsZero tells whether there is no value.
func (t Tree) IsZero() bool { return t.node == nil }

// Equal tells whether both are written the same.
func (t Tree) Equal(u Tree) bool {
	a, errA := t.YAML()
	b, errB := u.YAML()
	return errA == nil && errB == nil && bytes.Equal(a, b)
}

// YAML returns the value as a document of its own.
func (t Tree) YAML() ([]byte, error) {
	if t.node == nil {
		return nil, nil
	}
	return Marshal(t.node)
}

// MarshalYAML returns the value as it was read.
func (t Tree) MarshalYAML() (any, error) { return t.node, nil }

// MarshalJSON returns the value as JSON, keys in the same order.
func (t Tree) MarshalJSON() ([]byte, error) {
	if t.node == nil {
		return []byte("null"), nil
	}
	return MarshalJSON(t.node)
}

// clean copies a node without positions and comments. Flow mappings and
// lists stay so; texts in blocks become quoted.
func clean(n *yaml.Node) *yaml.Node {
	c := &yaml.Node{Kind: n.Kind, Style: n.Style &^ yaml.TaggedStyle, Tag: n.Tag, Value: n.Value}
	switch {
	case n.Kind != yaml.ScalarNode:
	case delicate(n.Value) || n.Style&(yaml.LiteralStyle|yaml.FoldedStyle) != 0:
		c.Style, c.Tag = yaml.DoubleQuotedStyle, "!!str"
	case n.Style&quotedStyles == 0:
		c.Tag = "" // follows from the text
		if c.Value == "" {
			c.Value = "null" // so that there is something where it stands alone
		}
	}
	for _, child := range n.Content {
		c.Content = append(c.Content, clean(child))
	}
	return c
}

// Marshal writes a node as a YAML document with an indent of 2.
func Marshal(n *yaml.Node) ([]byte, error) {
	var b bytes.Buffer
	e := yaml.NewEncoder(&b)
	e.SetIndent(2)
	if err := e.Encode(n); err != nil {
		return nil, err
	}
	if err := e.Close(); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// MarshalJSON writes a node as JSON on one line, keys in the order of the
// node. Numbers keep their digits where JSON allows them; anything that JSON
// does not know becomes a string.
func MarshalJSON(n *yaml.Node) ([]byte, error) {
	var b bytes.Buffer
	if err := writeJSON(&b, n); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

func writeJSON(b *bytes.Buffer, n *yaml.Node) error {
	switch n.Kind {
	case yaml.MappingNode:
		b.WriteByte('{')
		for i := 0; i < len(n.Content); i += 2 {
			if i > 0 {
				b.WriteByte(',')
			}
			writeJSONString(b, n.Content[i].Value)
			b.WriteByte(':')
			if err := writeJSON(b, n.Content[i+1]); err != nil {
				return err
			}
		}
		b.WriteByte('}')
	case yaml.SequenceNode:
		b.WriteByte('[')
		for i, item := range n.Content {
			if i > 0 {
				b.WriteByte(',')
			}
			if err := writeJSON(b, item); err != nil {
				return err
			}
		}
		b.WriteByte(']')
	case yaml.ScalarNode:
		writeJSONScalar(b, n)
	default:
		return fmt.Errorf("a YAML node of kind %d cannot be written as JSON", n.Kind)
	}
	return nil
}

func writeJSONScalar(b *bytes.Buffer, n *yaml.Node) {
	text := n.Value
	switch n.ShortTag() {
	case "!!null":
		b.WriteString("null")
		return
	case "!!bool":
		if text == "true" || text == "false" {
			b.WriteString(text)
			return
		}
	case "!!int", "!!float":
		if json.Valid([]byte(text)) {
			b.WriteString(text)
			return
		}
		if x, err := ParseFloat(text); err == nil {
			b.WriteString(strconv.FormatFloat(x, 'g', -1, 64))
			return
		}
	}
	writeJSONString(b, text)
}

func writeJSONString(b *bytes.Buffer, text string) {
	quoted, _ := json.Marshal(text) // strings always marshal
	b.Write(quoted)
}

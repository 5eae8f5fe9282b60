package document

import (
	"math"
	"strconv"
	"strings"
	"time"
	"unicode"

	"gopkg.in/yaml.v3"
)

// Build makes a mapping to be written, field by field in order. The zero
// value is an empty mapping.
type Build struct{ node yaml.Node }

// Node returns the mapping.
func (b *Build) Node() *yaml.Node {
	b.node.Kind, b.node.Tag = yaml.MappingNode, "!!map"
	return &b.node
}

// Flow makes the mapping be written on one line.
func (b *Build) Flow() *Build {
	b.node.Style = yaml.FlowStyle
	return b
}

// Add appends a key with its value.
func (b *Build) Add(key string, value *yaml.Node) *Build {
	b.node.Content = append(b.node.Content, textNode(key), value)
	return b
}

// Text appends a key with text, quoted where it would be read as something
// else.
func (b *Build) Text(key, text string) *Build { return b.Add(key, textNode(text)) }

// Int appends a key with a whole number.
func (b *Build) Int(key string, n int) *Build { return b.Add(key, IntNode(n)) }

// Uint64 appends a key with a whole number, such as a seed.
func (b *Build) Uint64(key string, n uint64) *Build {
	return b.Add(key, &yaml.Node{Kind: yaml.ScalarNode, Value: strconv.FormatUint(n, 10)})
}

// Time appends a key with a point in time in the form of RFC 3339.
func (b *Build) Time(key string, t time.Time) *Build {
	return b.Add(key, &yaml.Node{Kind: yaml.ScalarNode, Value: t.Format(time.RFC3339Nano)})
}

// Float appends a key with a finite number.
func (b *Build) Float(key string, x float64) *Build { return b.Add(key, FloatNode(x)) }

// Entry appends a key of digits with its value.
func (b *Build) Entry(key int, value *yaml.Node) *Build {
	b.node.Content = append(b.node.Content, IntNode(key), value)
	return b
}

// IntNode returns a whole number to be written.
func IntNode(n int) *yaml.Node {
	return &yaml.Node{Kind: yaml.ScalarNode, Value: strconv.Itoa(n)}
}

// FloatNode returns a finite number to be written, with the fewest digits
// that read back to the same bits.
func FloatNode(x float64) *yaml.Node {
	return &yaml.Node{Kind: yaml.ScalarNode, Value: FormatFloat(x)}
}

// FormatFloat writes a finite number with the fewest digits that read back
// to the same bits: without an exponent where a person would leave it out,
// and otherwise in the one form (1.0e-09) that YAML 1.1, YAML 1.2 and JSON
// all take for a number.
func FormatFloat(x float64) string {
	if magnitude := math.Abs(x); magnitude == 0 || magnitude >= 1e-7 && magnitude < 1e15 {
		return strconv.FormatFloat(x, 'f', -1, 64)
	}
	text := strconv.FormatFloat(x, 'e', -1, 64)
	if !strings.Contains(text, ".") {
		text = strings.Replace(text, "e", ".0e", 1)
	}
	return text
}

// ListNode returns a list to be written.
func ListNode(items ...*yaml.Node) *yaml.Node {
	return &yaml.Node{Kind: yaml.SequenceNode, Tag: "!!seq", Content: items}
}

// Node returns the value to be written, nil for the zero Tree.
func (t Tree) Node() *yaml.Node { return t.node }

func textNode(text string) *yaml.Node {
	n := &yaml.Node{Kind: yaml.ScalarNode, Tag: "!!str", Value: text}
	if delicate(text) {
		n.Style = yaml.DoubleQuotedStyle
	}
	return n
}

// delicate tells whether the YAML library might write a text, if left to
// itself, in a form that it does not read back: text of several lines, with
// blanks at an end, or with characters that do not print.
func delicate(text string) bool {
	return strings.TrimSpace(text) != text || strings.ContainsFunc(text, func(r rune) bool { return !unicode.IsPrint(r) })
}

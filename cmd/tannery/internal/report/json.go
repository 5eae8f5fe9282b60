package report

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"math"

	"gopkg.in/yaml.v3"
)

// WriteJSON writes one JSON object, indented, every digit of its numbers.
func WriteJSON(w io.Writer, object any) error {
	encoder := json.NewEncoder(w)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", "  ")
	return encoder.Encode(object)
}

// Finite returns a number for JSON, null (nil) where it is infinite or not a
// number, which JSON cannot say.
func Finite(v float64) *float64 {
	if math.IsInf(v, 0) || math.IsNaN(v) {
		return nil
	}
	return &v
}

// FromYAML turns a YAML document into the same document as JSON: keys in the
// order of the file, numbers with the digits of the file.
func FromYAML(document []byte) (json.RawMessage, error) {
	var root yaml.Node
	if err := yaml.Unmarshal(document, &root); err != nil {
		return nil, err
	}
	var b bytes.Buffer
	if err := writeNode(&b, root.Content[0]); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

func writeNode(b *bytes.Buffer, n *yaml.Node) error {
	switch n.Kind {
	case yaml.MappingNode:
		b.WriteByte('{')
		for i := 0; i < len(n.Content); i += 2 {
			if i > 0 {
				b.WriteByte(',')
			}
			key, err := json.Marshal(n.Content[i].Value)
			if err != nil {
				return err
			}
			b.Write(key)
			b.WriteByte(':')
			if err := writeNode(b, n.Content[i+1]); err != nil {
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
			if err := writeNode(b, item); err != nil {
				return err
			}
		}
		b.WriteByte(']')
	case yaml.ScalarNode:
		return writeScalar(b, n)
	default:
		return fmt.Errorf("line %d: an alias cannot be written as JSON", n.Line)
	}
	return nil
}

func writeScalar(b *bytes.Buffer, n *yaml.Node) error {
	switch tag := n.ShortTag(); {
	case tag == "!!null":
		b.WriteString("null")
		return nil
	case tag == "!!bool", (tag == "!!int" || tag == "!!float") && json.Valid([]byte(n.Value)):
		b.WriteString(n.Value)
		return nil
	}
	text, err := json.Marshal(n.Value)
	if err != nil {
		return err
	}
	b.Write(text)
	return nil
}

package document

import (
	"fmt"
	"strconv"

	"gopkg.in/yaml.v3"
)

// checkStructure reports what is allowed nowhere in a document: anchors,
// aliases, merge keys, explicit tags, keys that are not scalars, duplicate
// keys, and nesting deeper than MaxDepth. Aliases are never followed, so a
// small file cannot stand for a huge one.
func (d *Document) checkStructure(n *yaml.Node, path string, depth int) {
	refuse := func(n *yaml.Node, path, found, allowed string) {
		d.refused[n] = true
		d.report(Problem{Line: n.Line, Column: n.Column, Key: path, Found: found, Allowed: allowed})
	}
	switch {
	case n.Kind == yaml.AliasNode:
		refuse(n, path, "the alias *"+n.Value, "a value written out")
		return
	case n.Anchor != "":
		refuse(n, path, "the anchor &"+n.Anchor, "a value without an anchor")
	case n.Style&yaml.TaggedStyle != 0:
		refuse(n, path, "the tag "+n.Tag, "a value without a tag")
	}
	if depth > MaxDepth {
		refuse(n, path, "nesting deeper than "+strconv.Itoa(MaxDepth), "nesting up to "+strconv.Itoa(MaxDepth))
		return
	}
	switch n.Kind {
	case yaml.SequenceNode:
		for i, item := range n.Content {
			d.checkStructure(item, fmt.Sprintf("%s[%d]", path, i), depth+1)
		}
	case yaml.MappingNode:
		first := map[string]int{}
		for i := 0; i < len(n.Content); i += 2 {
			key, value := n.Content[i], n.Content[i+1]
			if key.Kind != yaml.ScalarNode {
				refuse(key, path, "a key that is "+describe(key), "a key of one word")
				continue
			}
			d.checkStructure(key, join(path, key.Value), depth+1)
			d.checkStructure(value, join(path, key.Value), depth+1)
			if key.Tag == "!!merge" {
				refuse(key, join(path, key.Value), "a merge key", "keys written out")
				continue
			}
			if line, found := first[key.Value]; found {
				refuse(key, join(path, key.Value), "a duplicate key", "each key once (first on line "+strconv.Itoa(line)+")")
				continue
			}
			first[key.Value] = key.Line
		}
	}
}

// describe names what a node is, for messages.
func describe(n *yaml.Node) string {
	switch n.Kind {
	case yaml.MappingNode:
		return "a mapping"
	case yaml.SequenceNode:
		return "a list"
	case yaml.AliasNode:
		return "the alias *" + n.Value
	}
	if n.Tag == "!!null" && n.Style&quotedStyles == 0 {
		return "nothing"
	}
	if n.Style&quotedStyles != 0 || n.Tag == "!!str" {
		return quote(n.Value)
	}
	return n.Value
}

const quotedStyles = yaml.SingleQuotedStyle | yaml.DoubleQuotedStyle | yaml.LiteralStyle | yaml.FoldedStyle

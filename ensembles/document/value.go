package document

import (
	"fmt"
	"strings"
	"time"
	"unicode"

	"gopkg.in/yaml.v3"
)

// Value is a value of a document, or the place where one is missing. Its
// accessors return the value as a type; if it is not of the type or out of
// range they report it and return zero.
type Value struct {
	doc      *Document  // nil: silent, because the reason was reported already
	node     *yaml.Node // nil: missing
	key      *yaml.Node // nil in lists and for the document
	parent   *yaml.Node // the mapping, where a missing key is reported
	path     string
	required bool
}

// Present tells whether the value is there; it may still be wrong.
func (v Value) Present() bool { return v.node != nil }

// Faulty tells whether a problem of the value itself was reported already.
func (v Value) Faulty() bool {
	return v.doc == nil || v.doc.refused[v.node]
}

// Key returns the dotted path of the value, as shown in messages.
func (v Value) Key() string { return v.path }

// Refuse reports the value, for reasons that its reader knows: what was
// found and what is allowed instead.
func (v Value) Refuse(found, allowed string) {
	if v.doc == nil || v.doc.refused[v.node] {
		return
	}
	line, column := v.position()
	v.doc.report(Problem{Line: line, Column: column, Key: v.path, Found: found, Allowed: allowed})
	if v.node != nil {
		v.doc.refused[v.node] = true
	}
}

// RefuseAsIs reports the value as it stands in the file, or as missing.
func (v Value) RefuseAsIs(allowed string) { v.refuse(allowed) }

// Warn adds a warning, preceded by the position and key of the value, to
// those of the document.
func (v Value) Warn(text string) {
	if v.doc == nil {
		return
	}
	line, column := v.position()
	v.doc.warnings = append(v.doc.warnings, fmt.Sprintf("%s:%d:%d: %s: %s", v.doc.name, line, column, v.path, text))
}

func (v Value) position() (line, column int) {
	switch {
	case v.node != nil && v.node.Kind == yaml.ScalarNode && v.node.Value == "" && v.node.Style&quotedStyles == 0 && v.key != nil:
		return v.key.Line, v.key.Column // an empty value has no place of its own
	case v.node != nil:
		return v.node.Line, v.node.Column
	case v.parent != nil:
		return v.parent.Line, v.parent.Column
	}
	return 1, 1
}

func (v Value) refuse(allowed string) {
	if v.node == nil {
		v.Refuse("", allowed)
		return
	}
	v.Refuse(describe(v.node), allowed)
}

// expect tells whether the value is a node of the kind; otherwise it is
// reported, unless it is missing and need not be there.
func (v Value) expect(kind yaml.Kind, allowed string) bool {
	switch {
	case v.doc == nil || v.node == nil && !v.required || v.doc.refused[v.node]:
		return false
	case v.node == nil || v.node.Kind != kind:
		v.refuse(allowed)
		return false
	}
	return true
}

// plain returns the text of a scalar that stands without quotes, as numbers
// must.
func (v Value) plain(allowed string) (text string, ok bool) {
	if !v.expect(yaml.ScalarNode, allowed) {
		return "", false
	}
	if v.node.Style&quotedStyles != 0 {
		v.refuse(allowed)
		return "", false
	}
	return v.node.Value, true
}

// String returns free text. Any scalar is text, quoted or not, but for an
// empty one without quotes. Control characters other than tabs and ends of
// lines, which quotes can spell, would steer the terminal that shows the text.
func (v Value) String() string {
	const allowed = "text"
	if !v.expect(yaml.ScalarNode, allowed) {
		return ""
	}
	switch {
	case v.node.Tag == "!!null":
		v.refuse(allowed)
		return ""
	case strings.ContainsFunc(v.node.Value, steers):
		v.refuse("text without control characters")
		return ""
	}
	return v.node.Value
}

// steers tells whether a character of a text is one that a terminal obeys.
func steers(r rune) bool { return unicode.IsControl(r) && !strings.ContainsRune("\t\r\n", r) }

// Word returns text without spaces or control characters, such as a name.
func (v Value) Word() string {
	const allowed = "a word"
	if !v.expect(yaml.ScalarNode, allowed) {
		return ""
	}
	text := v.node.Value
	if v.node.Tag == "!!null" || text == "" || strings.ContainsFunc(text, func(r rune) bool { return unicode.IsSpace(r) || !unicode.IsPrint(r) }) {
		v.refuse(allowed)
		return ""
	}
	return text
}

// Choice returns one of the words allowed.
func (v Value) Choice(allowed ...string) string {
	list := strings.Join(allowed, ", ")
	if !v.expect(yaml.ScalarNode, list) {
		return ""
	}
	if contains(allowed, v.node.Value) && v.node.Tag != "!!null" {
		return v.node.Value
	}
	if near := nearest(v.node.Value, allowed); near != "" && len(allowed) > 1 {
		list = near + " (nearest of " + list + ")"
	}
	v.refuse(list)
	return ""
}

// Bool returns true or false, the only two ways to write them.
func (v Value) Bool() bool {
	const allowed = "true or false"
	text, ok := v.plain(allowed)
	if ok && text != "true" && text != "false" {
		v.refuse(allowed)
	}
	return text == "true"
}

// Duration returns a length of time from low to high, written with its unit,
// such as 90s or 1h30m.
func (v Value) Duration(low, high time.Duration) time.Duration {
	allowed := fmt.Sprintf("a length of time from %s to %s with its unit, such as 90s or 1h30m", spelled(low), spelled(high))
	if !v.expect(yaml.ScalarNode, allowed) {
		return 0
	}
	d, err := time.ParseDuration(v.node.Value)
	if err != nil || d < low || d > high {
		v.refuse(allowed)
		return 0
	}
	return d
}

// spelled writes a length of time without minutes and seconds that are 0.
func spelled(d time.Duration) string {
	s := d.String()
	if strings.HasSuffix(s, "m0s") {
		s = strings.TrimSuffix(s, "0s")
	}
	if strings.HasSuffix(s, "h0m") {
		s = strings.TrimSuffix(s, "0m")
	}
	return s
}

// Time returns a point in time, written in the form of RFC 3339, in UTC.
func (v Value) Time() time.Time {
	const allowed = "a time such as 2026-12-01T10:00:00Z"
	if !v.expect(yaml.ScalarNode, allowed) {
		return time.Time{}
	}
	t, err := time.Parse(time.RFC3339, v.node.Value)
	t = t.UTC()
	if err != nil || t.Year() < 0 || t.Year() > 9999 {
		v.refuse(allowed)
		return time.Time{}
	}
	return t
}

// Mapping returns the value as a mapping; never nil.
func (v Value) Mapping() *Mapping {
	if !v.expect(yaml.MappingNode, "a mapping of keys to values") {
		return &Mapping{}
	}
	m := &Mapping{value: v}
	v.doc.mappings = append(v.doc.mappings, m)
	return m
}

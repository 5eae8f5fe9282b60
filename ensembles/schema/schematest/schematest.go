// Package schematest checks values against a JSON Schema in tests, for as
// much of draft-07 as this project's schemas use. An unknown keyword is an
// error, so that no rule is passed over.
package schematest

import (
	"bytes"
	"encoding/json"
	"fmt"
	"maps"
	"regexp"
	"slices"
	"strings"

	"gopkg.in/yaml.v3"
)

// Validate returns what the schema finds wrong with a YAML or JSON document,
// nil if it is valid. The error tells of a schema or document that cannot be
// read.
func Validate(schema, document []byte) ([]string, error) {
	root, err := parse(schema)
	if err != nil {
		return nil, err
	}
	var value any
	if err := yaml.Unmarshal(document, &value); err != nil {
		return nil, err
	}
	// Through JSON, so that keys become texts, as the schema sees them.
	text, err := json.Marshal(textKeys(value))
	if err != nil {
		return nil, err
	}
	if value, err = parse(text); err != nil {
		return nil, err
	}
	v := validator{root: root.(map[string]any)}
	v.check(v.root, value, "")
	return v.problems, v.err
}

// Keys returns the dotted paths of all properties of the schema, lists
// written as [0], in alphabetical order. $schema is left out.
func Keys(schema []byte) ([]string, error) {
	root, err := parse(schema)
	if err != nil {
		return nil, err
	}
	v := validator{root: root.(map[string]any)}
	var keys []string
	var walk func(rule map[string]any, path string)
	walk = func(rule map[string]any, path string) {
		rule = v.resolve(rule)
		properties, _ := rule["properties"].(map[string]any)
		for key, sub := range properties {
			if key == "$schema" {
				continue
			}
			full := strings.TrimPrefix(path+"."+key, ".")
			keys = append(keys, full)
			walk(sub.(map[string]any), full)
		}
		if items, ok := rule["items"].(map[string]any); ok {
			walk(items, path+"[0]")
		}
	}
	walk(v.root, "")
	slices.Sort(keys)
	return keys, v.err
}

func parse(text []byte) (any, error) {
	decoder := json.NewDecoder(bytes.NewReader(text))
	decoder.UseNumber()
	var value any
	err := decoder.Decode(&value)
	return value, err
}

func textKeys(value any) any {
	switch value := value.(type) {
	case map[string]any:
		out := map[string]any{}
		for k, v := range value {
			out[k] = textKeys(v)
		}
		return out
	case map[any]any:
		out := map[string]any{}
		for k, v := range value {
			out[fmt.Sprint(k)] = textKeys(v)
		}
		return out
	case []any:
		out := make([]any, len(value))
		for i, v := range value {
			out[i] = textKeys(v)
		}
		return out
	}
	return value
}

type validator struct {
	root     map[string]any
	problems []string
	err      error
}

// resolve follows a reference; keywords beside it are annotations here.
func (v *validator) resolve(rule map[string]any) map[string]any {
	ref, ok := rule["$ref"].(string)
	if !ok {
		return rule
	}
	definitions, _ := v.root["definitions"].(map[string]any)
	target, ok := definitions[strings.TrimPrefix(ref, "#/definitions/")].(map[string]any)
	if !ok {
		v.err = fmt.Errorf("reference %s leads nowhere", ref)
	}
	return v.resolve(target)
}

func (v *validator) valid(rule map[string]any, value any) bool {
	trial := validator{root: v.root}
	trial.check(rule, value, "")
	return len(trial.problems) == 0
}

func (v *validator) check(rule map[string]any, value any, path string) {
	rule = v.resolve(rule)
	refuse := func(format string, a ...any) {
		v.problems = append(v.problems, path+": "+fmt.Sprintf(format, a...))
	}
	object, isObject := value.(map[string]any)
	array, isArray := value.([]any)
	number, isNumber := value.(json.Number)
	text, isText := value.(string)
	x, _ := number.Float64()
	for _, keyword := range slices.Sorted(maps.Keys(rule)) {
		limit, _ := rule[keyword].(json.Number)
		bound, _ := limit.Float64()
		switch keyword {
		case "$schema", "$id", "title", "description", "definitions", "format", "patternProperties", "additionalProperties":
		case "type":
			if !isType(rule[keyword].(string), value) {
				refuse("is not of type %v", rule[keyword])
			}
		case "const":
			if fmt.Sprint(rule[keyword]) != fmt.Sprint(value) {
				refuse("is not %v", rule[keyword])
			}
		case "enum":
			if !slices.Contains(rule[keyword].([]any), value) {
				refuse("is not one of %v", rule[keyword])
			}
		case "anyOf":
			fits := func(option any) bool { return v.valid(option.(map[string]any), value) }
			if !slices.ContainsFunc(rule[keyword].([]any), fits) {
				refuse("is none of %d forms", len(rule[keyword].([]any)))
			}
		case "not":
			if v.valid(rule[keyword].(map[string]any), value) {
				refuse("is what it must not be")
			}
		case "required":
			for _, key := range rule[keyword].([]any) {
				if _, found := object[key.(string)]; isObject && !found {
					refuse("lacks %v", key)
				}
			}
		case "minProperties":
			if isObject && len(object) < int(bound) {
				refuse("has fewer than %v keys", limit)
			}
		case "maxProperties":
			if isObject && len(object) > int(bound) {
				refuse("has more than %v keys", limit)
			}
		case "properties":
			v.checkProperties(rule, object, path)
		case "items":
			for i, item := range array {
				v.check(rule[keyword].(map[string]any), item, fmt.Sprintf("%s[%d]", path, i))
			}
		case "minItems":
			if isArray && len(array) < int(bound) {
				refuse("has fewer than %v items", limit)
			}
		case "uniqueItems":
			for i, item := range array {
				if slices.Contains(array[:i], item) {
					refuse("has %v twice", item)
				}
			}
		case "minimum":
			if isNumber && x < bound {
				refuse("is below %v", limit)
			}
		case "maximum":
			if isNumber && x > bound {
				refuse("is above %v", limit)
			}
		case "exclusiveMinimum":
			if isNumber && x <= bound {
				refuse("is not above %v", limit)
			}
		case "exclusiveMaximum":
			if isNumber && x >= bound {
				refuse("is not below %v", limit)
			}
		case "pattern":
			if isText && !regexp.MustCompile(rule[keyword].(string)).MatchString(text) {
				refuse("does not match %v", rule[keyword])
			}
		default:
			v.err = fmt.Errorf("schema keyword %q is not known here", keyword)
		}
	}
	if _, found := rule["properties"]; !found && rule["patternProperties"] != nil {
		v.checkProperties(rule, object, path)
	}
}

func (v *validator) checkProperties(rule, object map[string]any, path string) {
	properties, _ := rule["properties"].(map[string]any)
	patterns, _ := rule["patternProperties"].(map[string]any)
	for _, key := range slices.Sorted(maps.Keys(object)) {
		full := strings.TrimPrefix(path+"."+key, ".")
		sub, known := properties[key].(map[string]any)
		for pattern, r := range patterns {
			if regexp.MustCompile(pattern).MatchString(key) {
				sub, known = r.(map[string]any), true
			}
		}
		switch {
		case known:
			v.check(sub, object[key], full)
		case rule["additionalProperties"] == false:
			v.problems = append(v.problems, full+": unknown key")
		}
	}
}

func isType(name string, value any) bool {
	switch value := value.(type) {
	case map[string]any:
		return name == "object"
	case []any:
		return name == "array"
	case string:
		return name == "string"
	case bool:
		return name == "boolean"
	case json.Number:
		return name == "number" || name == "integer" && !strings.ContainsAny(value.String(), ".eE")
	}
	return name == "null"
}

package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
)

// jsonError tells what is wrong with JSON that was read from the file called
// name, by its line, without the words of the program's own types.
func jsonError(name string, content []byte, err error) error {
	var (
		syntax   *json.SyntaxError
		mismatch *json.UnmarshalTypeError
	)
	line := func(offset int64) int {
		return 1 + bytes.Count(content[:min(max(offset, 0), int64(len(content)))], []byte{'\n'})
	}
	switch {
	case errors.As(err, &syntax) && syntax.Error() == "unexpected end of JSON input":
		return fmt.Errorf("%s:%d: found the end of the file; allowed: one whole JSON object", name, line(int64(len(content))))
	case errors.As(err, &syntax):
		return fmt.Errorf("%s:%d: found a syntax error (%w); allowed: JSON", name, line(syntax.Offset), err)
	case errors.As(err, &mismatch):
		key := ""
		if mismatch.Field != "" {
			key = mismatch.Field + ": "
		}
		return fmt.Errorf("%s:%d: %sfound JSON %s; allowed: %s", name, line(mismatch.Offset), key, mismatch.Value, jsonKind(mismatch.Type))
	}
	return fmt.Errorf("%s: found no JSON object: %w", name, err)
}

// jsonKind is what a Go type is in JSON.
func jsonKind(t reflect.Type) string {
	switch t.Kind() {
	case reflect.Bool:
		return "true or false"
	case reflect.String:
		return "text"
	case reflect.Slice, reflect.Array:
		return "a list"
	case reflect.Struct, reflect.Map:
		return "an object"
	case reflect.Float32, reflect.Float64:
		return "a number"
	}
	return "a whole number"
}

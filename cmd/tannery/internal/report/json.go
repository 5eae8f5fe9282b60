package report

import (
	"encoding/json"
	"io"
	"math"
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

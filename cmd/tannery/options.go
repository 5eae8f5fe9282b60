package main

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/pflag"

	"tannery/cmd/tannery/internal/brief"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// The option values below check what they are given while the command line
// is read, so that a bad value is refused before anything else happens. The
// error of Set says what is allowed; flagError adds the option and the value.

// numberOption is an option that takes one real number.
type numberOption struct {
	value float64
	given bool
	allow document.Range
}

func (o *numberOption) Set(text string) error {
	v, err := document.ParseFloat(text)
	if err != nil || !o.allow.Contains(v) {
		return errors.New(o.allow.String())
	}
	o.value, o.given = v, true
	return nil
}

func (o *numberOption) Type() string { return "NUMBER" }

func (o *numberOption) String() string {
	if !o.given {
		return ""
	}
	return strconv.FormatFloat(o.value, 'g', -1, 64)
}

// pointer returns the number, or nil if the option was not given.
func (o *numberOption) pointer() *float64 {
	if !o.given {
		return nil
	}
	return &o.value
}

// integerOption is an option that takes one whole number from low to high.
type integerOption struct {
	value     int
	given     bool
	low, high int
}

func (o *integerOption) Set(text string) error {
	v, err := strconv.Atoi(text)
	if err != nil || v < o.low || v > o.high {
		return fmt.Errorf("a whole number from %d to %d", o.low, o.high)
	}
	o.value, o.given = v, true
	return nil
}

func (o *integerOption) Type() string { return "N" }

func (o *integerOption) String() string {
	if !o.given {
		return ""
	}
	return strconv.Itoa(o.value)
}

// seedOption is a seed, any unsigned 64-bit number.
type seedOption struct {
	value uint64
	given bool
}

func (o *seedOption) Set(text string) error {
	v, err := strconv.ParseUint(text, 10, 64)
	if err != nil {
		return fmt.Errorf("a whole number from 0 to %d", uint64(math.MaxUint64))
	}
	o.value, o.given = v, true
	return nil
}

func (o *seedOption) Type() string   { return "N" }
func (o *seedOption) String() string { return "" }

// durationOption is a positive span of time such as 60s or 5m.
type durationOption struct {
	value time.Duration
	given bool
}

func (o *durationOption) Set(text string) error {
	v, err := time.ParseDuration(text)
	if err != nil || v <= 0 || v > brief.MaxTime {
		return errors.New("a time above 0 and up to 720h with its unit, such as 60s or 5m")
	}
	o.value, o.given = v, true
	return nil
}

func (o *durationOption) Type() string   { return "TIME" }
func (o *durationOption) String() string { return "" }

// nameOption is one of a set of names.
type nameOption struct {
	value string
	names []string
}

func (o *nameOption) Set(text string) error {
	for _, name := range o.names {
		if text == name {
			o.value = text
			return nil
		}
	}
	return errors.New(listOf(o.names) + suggestion(text, o.names))
}

func (o *nameOption) Type() string   { return "NAME" }
func (o *nameOption) String() string { return o.value }

// degreesOption is a list of degrees, "2,3,8".
type degreesOption struct {
	degrees []int
	low     int
}

func (o *degreesOption) Set(text string) error {
	var degrees []int
	for _, item := range strings.Split(text, ",") {
		item = strings.TrimSpace(item)
		n, err := strconv.Atoi(item)
		if err != nil || strconv.Itoa(n) != item || n < o.low || n > ensembles.MaxDegree || slices.Contains(degrees, n) {
			return fmt.Errorf("different whole numbers from %d to %d with commas between them, such as %d,%d,8",
				o.low, ensembles.MaxDegree, o.low, o.low+1)
		}
		degrees = append(degrees, n)
	}
	o.degrees = degrees
	return nil
}

func (o *degreesOption) Type() string   { return "DEGREES" }
func (o *degreesOption) String() string { return "" }

// distributionOption is a degree distribution, "2:0.3,3:0.7".
type distributionOption struct {
	distribution ensembles.Distribution
}

func (o *distributionOption) Set(text string) error {
	d, err := ensembles.ParseDistribution(text)
	if err != nil {
		return err
	}
	o.distribution = d
	return nil
}

func (o *distributionOption) Type() string   { return "DEGREE:FRACTION,…" }
func (o *distributionOption) String() string { return "" }

// listOf joins names for a sentence: "a, b or c".
func listOf(names []string) string {
	if len(names) < 2 {
		return strings.Join(names, "")
	}
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " or " + names[last]
}

// flagError turns what the flag parser reports into one line that names the
// option, the value found and what is allowed.
func flagError(flags *pflag.FlagSet, err error) error {
	var (
		value   *pflag.InvalidValueError
		missing *pflag.ValueRequiredError
		unknown *pflag.NotExistError
		syntax  *pflag.InvalidSyntaxError
	)
	switch {
	case errors.As(err, &value) && value.GetFlag().Value.Type() == "bool":
		return usagef("--%s: found %q; allowed: true or false", value.GetFlag().Name, value.GetValue())
	case errors.As(err, &value):
		if value.GetFlag().Value.Type() == (*distributionOption)(nil).Type() {
			return usagef("--%s: %w", value.GetFlag().Name, value.Unwrap())
		}
		return usagef("--%s: found %q; allowed: %w", value.GetFlag().Name, value.GetValue(), value.Unwrap())
	case errors.As(err, &missing):
		return usagef("--%s: needs a value", missing.GetFlag().Name)
	case errors.As(err, &unknown) && unknown.GetSpecifiedShortnames() != "":
		return usagef("-%s: unknown option", unknown.GetSpecifiedName())
	case errors.As(err, &unknown):
		var names []string
		flags.VisitAll(func(f *pflag.Flag) { names = append(names, "--"+f.Name) })
		name := "--" + unknown.GetSpecifiedName()
		return usagef("%s: unknown option%s", name, suggestion(name, names))
	case errors.As(err, &syntax):
		return usagef("%s: not an option", syntax.GetSpecifiedFlag())
	}
	return usageError{err}
}

// maxTypos is how many letters a name may differ by and still be suggested.
const maxTypos = 2

// suggestion returns `; did you mean "…"?` for the name nearest to text, or
// nothing if none is near.
func suggestion(text string, names []string) string {
	best, distance := "", maxTypos+1
	for _, name := range names {
		if d := typos(text, name); d < distance {
			best, distance = name, d
		}
	}
	if best == "" || distance >= len([]rune(text)) {
		return ""
	}
	return fmt.Sprintf("; did you mean %s?", best)
}

// typos counts the letters to insert, delete or replace to turn a into b
// (Levenshtein, Soviet Physics Doklady 10(8), 1966), row by row.
func typos(a, b string) int {
	x, y := []rune(a), []rune(b)
	row := make([]int, len(y)+1)
	for j := range row {
		row[j] = j
	}
	for i := range x {
		diagonal := row[0]
		row[0] = i + 1
		for j := range y {
			cost := diagonal
			if x[i] != y[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(y)]
}

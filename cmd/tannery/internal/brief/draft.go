package brief

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"

	"tannery/de/channel"
	"tannery/ensembles"
	"tannery/ensembles/document"
)

// Draft is a brief on its way: read from a file, then overridden by options,
// then finished. It remembers where each value came from, so that problems
// which show only when all is known still name their place.
type Draft struct {
	Brief

	doc      *document.Document // nil without a file
	file     map[string]document.Value
	options  map[string]string // key: the option that gave its value
	renamed  map[string]string // see Channels
	problems []error
}

// New returns an empty draft, to be filled by options alone.
func New(given Channels) *Draft {
	d := &Draft{file: map[string]document.Value{}, options: map[string]string{}}
	d.take(given, nil)
	return d
}

// Overridden notes that the value of a key, by its dotted path, was given by
// an option, which wins over the file.
func (d *Draft) Overridden(key, option string) { d.options[key] = d.called(option) }

// called is the option by which the user gives what an option of search does.
func (d *Draft) called(option string) string {
	if name, ok := d.renamed[option]; ok {
		return name
	}
	return option
}

// refuse reports the value of a key where it was given.
func (d *Draft) refuse(key, found, allowed string) {
	if option, ok := d.options[key]; ok {
		d.problems = append(d.problems, fmt.Errorf("%s: found %s; allowed: %s", option, found, allowed))
		return
	}
	if value, ok := d.file[key]; ok {
		value.Refuse(found, allowed)
		return
	}
	d.problems = append(d.problems, fmt.Errorf("%s: found %s; allowed: %s", key, found, allowed))
}

// missing reports that neither the file nor an option gives a value.
// A value that is there but wrong was reported when it was read.
func (d *Draft) missing(key, option, allowed string) {
	option = d.called(option)
	value, ok := d.file[key]
	switch {
	case ok && !value.Present():
		value.Refuse("", allowed+"; or the option "+option)
		return
	case d.doc != nil:
		return
	}
	d.problems = append(d.problems, fmt.Errorf("%s: missing; allowed: %s", option, allowed))
}

// Finish checks the brief as a whole, works out the rate of a link, and
// returns all problems of the file and of the options together.
func (d *Draft) Finish() (Brief, error) {
	family := d.checkChannel()
	d.checkRate(family)
	if d.Err() == nil {
		d.checkCapacities()
		d.checkDegrees()
		if err := d.Err(); err != nil {
			return d.Brief, Unreachable{err}
		}
	}
	return d.Brief, d.Err()
}

// Unreachable is the error of a brief that is well formed but asks for what no
// ensemble has: a rate that its degrees or channels do not allow.
type Unreachable struct{ error }

// Unwrap returns the error that it is.
func (u Unreachable) Unwrap() error { return u.error }

// Err returns the problems found so far.
func (d *Draft) Err() error {
	var file error
	if d.doc != nil {
		file = d.doc.Err()
	}
	return errors.Join(append([]error{file}, d.problems...)...)
}

func (d *Draft) checkChannel() channel.Family {
	if d.Channel == "" {
		d.missing("channel", "--channel", ChannelsAllowed())
	}
	if d.Degradation != "" && !slices.ContainsFunc(append([]string{d.Channel}, d.Also...), IsFile) && d.Err() == nil {
		d.refuse("degradation", d.Degradation, "nothing, because no channel is a file")
	}
	return d.family()
}

// checkRate makes sure that there is a rate, from the link if there is one.
func (d *Draft) checkRate(family channel.Family) {
	switch {
	case d.Link == nil && d.Rate == 0:
		d.missing("rate", "--rate", document.Between(0, 1).String())
	case d.Link != nil && d.Err() == nil:
		l := d.Link
		d.Rate = l.SourceRate * channel.BinaryEntropy(l.SourceProbability) / l.SymbolRate
		capacity := family.Capacity(l.Parameter)
		if !(d.Rate < capacity) {
			d.refuse("link", fmt.Sprintf("a source of %.6g bits of entropy per channel symbol", d.Rate),
				fmt.Sprintf("less than the channel's capacity, %.6g bits per symbol at %s = %.6g", capacity, family.Symbol(), l.Parameter))
		}
	}
}

// checkCapacities refuses rates beyond the capacity of a channel as measured.
func (d *Draft) checkCapacities() {
	for _, f := range d.Families {
		best, _ := f.Range()
		if capacity := f.Capacity(best); IsMeasured(f) && d.Rate >= capacity {
			d.refuse("rate", number(d.Rate), fmt.Sprintf("less than %.6g, the capacity of %s as measured", capacity, f.Name()))
		}
	}
}

// leastRate is the least design rate that comes out as asked: it is 1 less a
// ratio, which floating point knows to 1e-16.
const leastRate = 1e-6

// checkDegrees compares the rate with what the degrees allow: every design
// rate is at most 1 - dv/dc with the least variable and the largest check
// degree, and at least 1 - dv/dc with the largest and the least.
func (d *Draft) checkDegrees() {
	low, high := d.VariableDegrees.bounds(2, ensembles.MaxDegree)
	least, most := d.CheckDegrees.bounds(2, ensembles.MaxDegree)
	key := "rate"
	if d.Link != nil {
		key = "link"
	}
	upper, lower := 1-float64(low)/float64(most), 1-float64(high)/float64(least)
	switch {
	case d.Rate >= upper && len(d.CheckDegrees.Allowed) == 0 && d.CheckDegrees.Max == 0:
		// Only the cap on degrees stands in the way: no rate below 1 is
		// refused by it that could be searched for in practice.
		d.refuse(key, number(d.Rate), fmt.Sprintf("a rate below %.6g, with check degrees up to %d", upper, ensembles.MaxDegree))
	case d.Rate > upper || d.Rate == upper && low != high:
		d.refuse(key, number(d.Rate), fmt.Sprintf("a rate below %.6g, which is 1 - %d/%d with the least variable degree %d and the largest check degree %d",
			upper, low, most, low, most))
	case d.Rate < leastRate:
		d.refuse(key, number(d.Rate), fmt.Sprintf("a rate of at least %g: below it rounding would change the rate", leastRate))
	case d.Rate < lower:
		d.refuse(key, number(d.Rate), fmt.Sprintf("a rate above %.6g, which is 1 - %d/%d with the largest variable degree %d and the least check degree %d",
			lower, high, least, high, least))
	}
	if d.EdgesPerBit > 0 && d.EdgesPerBit < float64(low) {
		d.refuse("limits.edges_per_bit", number(d.EdgesPerBit), fmt.Sprintf("at least %d, the least variable degree", low))
	}
	if d.TargetError > 0 && d.Iterations == 0 {
		d.refuse("limits.target_error", number(d.TargetError), "it beside a number of iterations")
	}
	if low := math.Max(2, float64(low)); low > 2 && d.DegreeTwo != "" {
		d.refuse("limits.degree_two", d.DegreeTwo, "nothing, because degree 2 is not among the variable degrees")
	}
}

// number writes a number with all its digits, so that what is refused is not
// mistaken for what is allowed.
func number(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

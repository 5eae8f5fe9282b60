package brief

import (
	"fmt"
	"slices"
	"strings"

	"tannery/de/channel"
	"tannery/ensembles/document"
)

// A channel is named, or is a file with measured LLRs or a transition matrix;
// such a file is made a family of channels by a degradation: more of the bits
// are erased, or more of the hard decisions are flipped.
const (
	Erasure = "erasure"
	Flip    = "flip"

	DefaultDegradation = Erasure
)

// Degradations are those of channels from files.
var Degradations = []string{Erasure, Flip}

// Finder returns the family of a channel, with the degradation that a channel
// from a file takes.
type Finder func(name, degradation string) (channel.Family, error)

// Named is the Finder that knows no files.
func Named(name, _ string) (channel.Family, error) { return channel.ByName(name) }

// Channels are those that options give, which win over a file, and the way to
// find all of them. The zero value gives none and knows no files.
type Channels struct {
	Names       []string
	Degradation string
	Find        Finder
	// Renamed are the options by which a command takes what search takes by
	// another, such as "--rate": "--rates", for messages.
	Renamed map[string]string
}

// IsFile tells whether a channel is a file: it has a point or a slash in its
// name, as no family has, or is standard input.
func IsFile(name string) bool { return name == "-" || strings.ContainsAny(name, "./") }

// IsMeasured tells whether a family is that of a channel from a file.
func IsMeasured(f channel.Family) bool {
	switch f.(type) {
	case channel.Erased, channel.Degraded:
		return true
	}
	return false
}

// ChannelsAllowed says in messages what a channel may be.
func ChannelsAllowed() string {
	return strings.Join(channel.Names(), ", ") + ", or a file with . or / in its name"
}

// decodeChannels reads one channel or a list of them.
func decodeChannels(v document.Value) (names []string) {
	items := []document.Value{v}
	if v.IsList() {
		if items = v.List("a channel or a list of channels"); len(items) == 0 {
			v.Refuse("an empty list", "at least one channel")
		}
	}
	for _, item := range items {
		name := item.String()
		switch {
		case item.Faulty():
		case slices.Contains(names, name):
			item.Refuse(name+" a second time", "each channel once")
		case !slices.Contains(channel.Names(), name) && !IsFile(name):
			item.RefuseAsIs(ChannelsAllowed())
		default:
			names = append(names, name)
		}
	}
	return names
}

// take notes the channels and finds their families.
func (d *Draft) take(c Channels, file []string) {
	d.renamed = c.Renamed
	if len(c.Names) > 0 {
		file = c.Names
		d.Overridden("channel", "--channel")
	}
	if c.Degradation != "" {
		d.Degradation = c.Degradation
		d.Overridden("degradation", "--degradation")
	}
	if len(file) == 0 {
		return
	}
	d.Channel, d.Also = file[0], file[1:]
	if len(d.Also) == 0 {
		d.Also = nil
	}
	find := c.Find
	if find == nil {
		find = Named
	}
	for _, name := range file {
		f, err := find(name, d.Degradation)
		if err != nil {
			d.problems = append(d.problems, err)
			continue
		}
		for _, other := range d.Families {
			if other.Name() == f.Name() {
				d.refuse("channel", fmt.Sprintf("two channels called %s", f.Name()), "channels of different names or titles")
			}
		}
		d.Families = append(d.Families, f)
	}
	if len(d.Families) < len(file) {
		d.Families = nil
	}
}

// family is that of the first channel, nil if it is not known.
func (d *Draft) family() channel.Family {
	if len(d.Families) == 0 {
		return nil
	}
	return d.Families[0]
}

package channel

import (
	"fmt"
	"strings"
)

// families lists the built-in families in the order in which they are shown.
var families = []Family{BEC{}, BSC{}, BIAWGN{}, Laplace{}, Rayleigh{}}

// Names returns the names of the built-in families.
func Names() []string {
	names := make([]string, len(families))
	for i, f := range families {
		names[i] = f.Name()
	}
	return names
}

// ByName returns the built-in family of that name, which is one of Names.
func ByName(name string) (Family, error) {
	for _, f := range families {
		if f.Name() == name {
			return f, nil
		}
	}
	return nil, fmt.Errorf("channel %q: must be one of %s", name, strings.Join(Names(), ", "))
}

// checkRate refuses a rate at which no parameter has its capacity.
func checkRate(rate float64) error {
	if !(rate > 0 && rate < 1) {
		return fmt.Errorf("rate %v: must lie strictly between 0 and 1", rate)
	}
	return nil
}

package picture

import "strings"

// shortNames drops from names of equally many parts, joined by hyphens, the
// parts that all of them share, so that labels need not repeat them; the
// pattern, for the caption, tells what was dropped. Less than three names stay
// as they are.
func shortNames(names []string) (short []string, pattern string) {
	const gap = "…"
	parts := make([][]string, len(names))
	for i, n := range names {
		parts[i] = strings.Split(n, "-")
		if len(parts[i]) != len(parts[0]) {
			return names, ""
		}
	}
	if len(names) < 3 {
		return names, ""
	}
	whole := make([]string, len(parts[0]))
	kept := make([][]string, len(names))
	dropped := false
	for k := range whole {
		whole[k] = parts[0][k]
		for i := range parts {
			if parts[i][k] != parts[0][k] {
				whole[k] = gap
			}
		}
		dropped = dropped || whole[k] != gap
		for i := range parts {
			if whole[k] == gap {
				kept[i] = append(kept[i], parts[i][k])
			}
		}
	}
	if !dropped || len(kept[0]) == 0 {
		return names, ""
	}
	for _, k := range kept {
		short = append(short, strings.Join(k, " "))
	}
	return short, "; labels fill in " + strings.Join(whole, "-")
}

package tanner

import (
	"bytes"
	"fmt"
	"strconv"
	"strings"
)

// banner is the first line of a Matrix Market file of a sparse 0-1 matrix
// (Boisvert, Pozo & Remington, The Matrix Market exchange formats, NISTIR
// 5935, 1996).
const banner = "%%MatrixMarket matrix coordinate pattern general"

// allowedBanners says what may stand in its place: programs for matrices of
// any kind write the ones with their value, and square symmetric matrices by
// the lower triangle.
const allowedBanners = banner + ", or integer or real for pattern, symmetric for general"

// matrixFormat is what the first line of a file says about the lines of
// entries.
type matrixFormat struct {
	valued    bool // each entry has a value, which must be 1
	symmetric bool // the entries above the diagonal are left out
}

// parseBanner reads the first line.
func parseBanner(text []byte) (f matrixFormat, err error) {
	words := strings.Fields(strings.ToLower(string(text)))
	if len(words) == 5 {
		switch words[3] {
		case "integer", "real":
			f.valued, words[3] = true, "pattern"
		}
		if words[4] == "symmetric" {
			f.symmetric, words[4] = true, "general"
		}
	}
	if strings.Join(words, " ") != strings.ToLower(banner) {
		return f, fmt.Errorf("found %q; allowed: %s", shorten(text), allowedBanners)
	}
	return f, nil
}

// form is how the line of an entry looks.
func (f matrixFormat) form() string {
	if f.valued {
		return "ROW COLUMN 1"
	}
	return "ROW COLUMN"
}

// checkValue refuses what follows row and column on the line of an entry
// unless it is as the format has it.
func (f matrixFormat) checkValue(text, rest []byte) error {
	rest = bytes.TrimSpace(rest)
	switch {
	case !f.valued && len(rest) > 0:
		return fmt.Errorf("found %q; allowed: ROW COLUMN and nothing else", shorten(text))
	case !f.valued || len(rest) == 1 && rest[0] == '1':
		return nil
	}
	if value, err := strconv.ParseFloat(string(rest), 64); err != nil || value != 1 {
		return fmt.Errorf("found %q; allowed: ROW COLUMN 1, as all entries of a parity-check matrix are 1 and zeros are left out", shorten(text))
	}
	return nil
}

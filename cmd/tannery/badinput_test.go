package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// profileText is a good profile for tables of bad ones to be made from.
const profileText = "kind: profile\nversion: 1\nlambda: {2: 0.3, 3: 0.7}\nrho: {6: 1}\n"

// Every bad input ends with code 2, an empty standard output, and a message
// that names the place, the value found and what is allowed.
func TestBadInput(t *testing.T) {
	const threshold = "threshold - --channel bec"
	for _, c := range []struct{ name, args, stdin, want string }{
		// Profiles as text.
		{"negative fraction", "threshold --channel bec --lambda 2:-0.3,3:1.3 --rho 6:1", "",
			"--lambda: fraction -0.3 of degree 2: must be finite and not negative"},
		{"NaN fraction", "threshold --channel bec --lambda 2:NaN,3:0.7 --rho 6:1", "",
			"--lambda: fraction NaN of degree 2: must be finite and not negative"},
		{"infinite fraction", "threshold --channel bec --lambda 2:Inf,3:0.7 --rho 6:1", "",
			"--lambda: fraction +Inf of degree 2: must be finite and not negative"},
		{"unsummed fractions", "threshold --channel bec --lambda 2:0.3,3:0.6 --rho 6:1", "",
			"--lambda: fractions sum to 0.9: must sum to 1 within 1e-06"},
		{"degree 0", "threshold --channel bec --lambda 0:0.3,3:0.7 --rho 6:1", "",
			`--lambda: degree "0": must be a whole number from 1 to 1000000`},
		{"degree as a fraction", "threshold --channel bec --lambda 2.5:0.3,3:0.7 --rho 6:1", "",
			`--lambda: degree "2.5": must be a whole number from 1 to 1000000`},
		{"degree twice", "threshold --channel bec --lambda 3:0.3,3:0.7 --rho 6:1", "",
			"--lambda: degree 3: given twice"},
		{"check degree 1", "threshold --channel bec --lambda 3:1 --rho 1:1", "",
			"--rho: degree 1: must be at least 2"},
		{"half a profile", "threshold --channel bec --lambda 3:1", "",
			"--lambda and --rho: a profile needs both"},
		{"two profiles", "threshold a.yaml --channel bec --lambda 3:1 --rho 6:1", "",
			"a.yaml: a profile from a file beside --lambda or --rho; allowed: one of the two"},
		{"no profile", "threshold --channel bec", "",
			"profile: missing; allowed: a file, - for standard input, a name of the catalogue, or --lambda and --rho"},
		{"no channel", "threshold --lambda 3:1 --rho 6:1", "",
			"--channel: missing, and the profile's results do not name exactly one; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name"},
		{"no file", "threshold none.yaml --channel bec", "",
			"none.yaml: cannot be read: no such file or directory"},
		{"no name", "threshold rsu01-r50-d16 --channel bec", "",
			"rsu01-r50-d16: neither a file nor a name of the catalogue; nearest: rsu01-r50-d10, rsu01-r50-d11, rsu01-r50-d12, rsu01-r50-d15; tannery catalog lists them"},
		{"nothing like a name", "threshold harbour --channel bec", "",
			"harbour: neither a file nor a name of the catalogue; tannery catalog lists them"},
		{"a folder", "threshold . --channel bec", "",
			".: cannot be read: is a directory"},

		// Profiles as files.
		{"negative fraction in a file", threshold, strings.Replace(profileText, "0.3", "-0.3", 1),
			"standard input:3:13: lambda.2: found -0.3; allowed: a number of at least 0"},
		{"NaN in a file", threshold, strings.Replace(profileText, "0.3", ".nan", 1),
			"standard input:3:13: lambda.2: found .nan; allowed: a number of at least 0"},
		{"infinity in a file", threshold, strings.Replace(profileText, "0.3", ".inf", 1),
			"standard input:3:13: lambda.2: found .inf; allowed: a number of at least 0"},
		{"unsummed in a file", threshold, strings.Replace(profileText, "0.3", "0.2", 1),
			"standard input:3:9: lambda: found fractions that sum to 0.9; allowed: a sum of 1 within 1e-06"},
		{"degree 0 in a file", threshold, strings.Replace(profileText, "2:", "0:", 1),
			"standard input:3:10: lambda: found the key 0; allowed: a whole number from 1 to 1000000"},
		{"duplicate key", threshold, profileText + "rho: {6: 1}\n",
			"standard input:5:1: rho: found a duplicate key; allowed: each key once (first on line 4)"},
		{"duplicate degree", threshold, strings.Replace(profileText, "3:", "2:", 1),
			"standard input:3:18: lambda.2: found a duplicate key; allowed: each key once (first on line 3)"},
		{"unknown key", threshold, profileText + "titel: x\n",
			"standard input:5:1: titel: found an unknown key; allowed: title (nearest of kind, version, title, lambda, rho, design_rate, results, provenance, realization)"},
		{"second document", threshold, profileText + "---\nkind: profile\n",
			"standard input:5:1: found a second document; allowed: one document"},
		{"empty file", threshold, "",
			"standard input:1:1: found an empty document; allowed: a mapping of keys to values"},
		{"version as a fraction", threshold, strings.Replace(profileText, "version: 1", "version: 1.0", 1),
			"standard input:2:10: version: found 1.0; allowed: 1"},
		{"a brief for a profile", threshold, "kind: brief\nversion: 1\n",
			`standard input:1:7: kind: found "brief"; allowed: profile`},

		// Numbers of options.
		{"negative rate", "limit --channel bec --rate -0.5", "", `--rate: found "-0.5"; allowed: a number above 0 and below 1`},
		{"NaN rate", "limit --channel bec --rate NaN", "", `--rate: found "NaN"; allowed: a number above 0 and below 1`},
		{"rate 1", "limit --channel bec --rate 1", "", `--rate: found "1"; allowed: a number above 0 and below 1`},
		{"infinite parameter", "limit --channel biawgn --parameter Inf", "", `--parameter: found "Inf"; allowed: a number of at least 0`},
		{"parameter beyond the family", "limit --channel bsc --parameter 0.6", "", "--parameter: found 0.6; allowed: for p of channel bsc, a number from 0 to 0.5"},
		{"empty value", "limit --channel bec --rate=", "", `--rate: found ""; allowed: a number above 0 and below 1`},
		{"no value", "limit --channel bec --rate", "", "--rate: needs a value"},
		{"text for a number", "limit --channel bec --rate half", "", `--rate: found "half"; allowed: a number above 0 and below 1`},
		{"length as a fraction", "export --lambda 3:1 --rho 6:1 --length 10.5", "", `--length: found "10.5"; allowed: a whole number from 2 to 1000000000`},
		{"ratio on the wrong channel", "limit --channel bsc --es-n0 1", "", "--es-n0: does not fit channel bsc; allowed: --parameter, its p"},
		{"ratio without a rate", "limit --channel biawgn --eb-n0 1", "", "--eb-n0: needs a rate above 0, because Eb = Es/rate; allowed: --rate beside it, or --es-n0"},
		{"two parameters", "limit --channel biawgn --eb-n0 1 --parameter 1", "", "--parameter and --eb-n0: only one of the two"},
		{"half a link", "limit --channel bec --parameter 0.1 --source-rate 10", "", "a link needs both --source-rate and --symbol-rate"},
		{"nothing asked", "limit --channel bec", "", "--parameter or --rate: one of them is needed (or --eb-n0, --es-n0, --matrix)"},
		{"rate at the degrees' end", "export --lambda 3:1 --rho 3:1 --length 100 --channel bec", "", "--length: design rate 0: must be above 0"},
		{"method that does not cover", "threshold --lambda 3:1 --rho 6:1 --channel bsc --method exact", "", "--method: found exact; allowed on channel bsc: one that covers it (exact covers bec)"},
		{"unknown method", "threshold --lambda 3:1 --rho 6:1 --channel bec --method exakt", "", `--method: found "exakt"; allowed: exact, gaussian, gaussian-fit or quantized; did you mean exact?`},
		{"schema of what", "schema profil", "", `schema: found "profil"; allowed: profile or brief; did you mean profile?`},

		// Matrices.
		{"matrix that misses 1", "limit --matrix -", "0.9,0.2\n0.5,0.5\n",
			"standard input:1:1: found a sum of 1.1; allowed: a sum of 1 within 1e-06"},

		// Matrices to build, to take in and to measure.
		{"build to nowhere", "build ru01-r50-d3 --length 100", "",
			"--output: missing; allowed: a file for the matrix, or - for standard output"},
		{"build of no length", "build ru01-r50-d3 -o -", "",
			"--length: missing; allowed: a whole number from 2 to 1000000000, or a profile with node counts, as export writes it"},
		{"build of length 1", "build ru01-r50-d3 --length 1 -o -", "",
			`--length: found "1"; allowed: a whole number from 2 to 1000000000`},
		{"build too short for its degrees", "build ru01-r50-d3 --length 5 -o -", "",
			"--length: length 5: check degree 6 needs as many code bits, there are 5; use a length of at least 6"},
		{"build with an odd girth", "build ru01-r50-d3 --length 100 --girth 7 -o -", "",
			"--girth: found 7; allowed: an even number from 4 to 12"},
		{"build in an unknown way", "build ru01-r50-d3 --length 100 --construction fast -o -", "",
			`--construction: found "fast"; allowed: growth or randomized`},
		{"a chain that is too long", "build --lambda 2:1 --rho 4:1 --length 100 --degree-two chain -o -", "",
			"the profile given: chain: 100 variable nodes of degree 2: must be at most 49, one less than the check nodes"},
		{"counts that do not fit", "build - -o -", strings.Replace(profileText, "rho", "realization: {length: 10, checks: 5, edges: 31, variable_nodes: {3: 10}, check_nodes: {6: 5}}\nrho", 1),
			"standard input:4:45: realization.edges: found 31; allowed: 30, the sum of degree times number over variable_nodes"},
		{"counts that are no whole numbers", "build - -o -", strings.Replace(profileText, "rho", "realization: {length: 10, checks: 5, edges: 30, variable_nodes: {3: 9.5}, check_nodes: {6: 5}}\nrho", 1),
			"standard input:4:69: realization.variable_nodes.3: found 9.5; allowed: a whole number from 1 to 1000000000"},
		{"no matrix", "profile", "",
			"one matrix: missing; tannery profile --help shows how it is used"},
		{"two matrices", "profile a b", "",
			`"b": unexpected; profile takes one matrix`},
		{"a matrix that is not there", "profile none.mtx", "",
			"none.mtx: cannot be read: no such file or directory"},
		{"a folder as matrix", "profile .", "",
			".: cannot be read: is a directory"},
		{"an empty matrix", "profile -", "",
			"standard input:1: found the end of the file: it must begin with %%MatrixMarket matrix coordinate pattern general"},
		{"another matrix format", "profile -", "%%MatrixMarket matrix array real general\n1 1\n1\n",
			`standard input:1: found "%%MatrixMarket matrix array real general"; allowed: %%MatrixMarket matrix coordinate pattern general`},
		{"a matrix without size", "profile -", "HEAD% nothing\n",
			"standard input:2: found the end of the file: the line of rows, columns and entries is missing"},
		{"a size in fractions", "profile -", "HEAD2.5 2 2\n",
			`standard input:2: found "2.5 2 2"; allowed: ROWS COLUMNS ENTRIES in whole numbers`},
		{"a size beyond reason", "profile -", "HEAD2 2 9000000000\n",
			"standard input:2: found 9000000000 entries; allowed: at most 2147483647"},
		{"more rows than entries", "profile -", "HEAD2000000000 2 4\n",
			"standard input:2: found 2000000000 rows and 4 entries; allowed: an entry in every row"},
		{"a promise of entries", "profile -", "HEAD1000000000 1000000000 2000000000\n1 1\n",
			"standard input:3: found the end of the file: there are 1 entries of the 2000000000 announced"},
		{"a row out of range", "profile -", "HEAD2 2 2\n1 1\n3 2\n",
			"standard input:4: found row 3; allowed: from 1 to 2"},
		{"a column out of range", "profile -", "HEAD2 2 2\n1 1\n2 0\n",
			"standard input:4: found column 0; allowed: from 1 to 2"},
		{"an entry with a value", "profile -", "HEAD1 1 1\n1 1 1.0\n",
			`standard input:3: found "1 1 1.0"; allowed: ROW COLUMN and nothing else`},
		{"an entry twice", "profile -", "HEAD2 2 3\n1 1\n2 2\n1 1\n",
			"standard input:5: found row 1, column 1 again; allowed: once, in line 3"},
		{"an empty row", "profile -", "HEAD2 2 2\n1 1\n1 2\n",
			"standard input: found row 2 of 2 empty; allowed: an entry in every row"},
		{"an empty column", "profile -", "HEAD2 2 2\n1 1\n2 1\n",
			"standard input: found column 2 of 2 empty; allowed: an entry in every column"},
		{"too many entries", "profile -", "HEAD1 1 1\n1 1\n1 1\n",
			`standard input:4: found "1 1"; allowed: nothing after the 1 entries announced`},
		{"a check of one bit", "profile -", "HEAD1 1 1\n1 1\n",
			"standard input: check_nodes: found degree 1; allowed: degrees from 2 to 1000000"},
		{"trials on no channel", "simulate BUOYS --parameter 0.4", "",
			"--channel: missing; allowed: bec, bsc, biawgn, laplace or rayleigh"},
		{"trials at no parameter", "simulate BUOYS --channel bec", "",
			"--parameter: missing; allowed: it, --eb-n0 or --es-n0"},
		{"trials beyond the range", "simulate BUOYS --channel bec --parameter 1.4", "",
			"--parameter: found 1.4; allowed: for ε of channel bec, a number from 0 to 1"},
		{"trials without flips", "simulate BUOYS --channel bsc --parameter 0", "",
			"--parameter: found 0; allowed: for trials on channel bsc, a number above 0 and below 0.5"},
		{"half a range", "simulate BUOYS --channel bec --parameter 0.4:0.5", "",
			`--parameter: found "0.4:0.5"; allowed: at most 1000 different numbers with commas between them, or FROM:TO:STEP; each a number of at least 0`},
		{"a value twice", "simulate BUOYS --channel bec --parameter 0.4,0.4", "",
			`--parameter: found "0.4,0.4"; allowed: at most 1000 different numbers with commas between them, or FROM:TO:STEP; each a number of at least 0`},
		{"decibels of erasures", "simulate BUOYS --channel bec --eb-n0 1", "",
			"--eb-n0: does not fit channel bec; allowed: --parameter, its ε"},
		{"a schedule of peeling", "simulate BUOYS --channel bec --parameter 0.4 --schedule layered", "",
			"--schedule: found layered; allowed: nothing on channel bec, where peeling has no schedule"},
		{"full confidence", "simulate BUOYS --channel bec --parameter 0.4 --confidence 1", "",
			`--confidence: found "1"; allowed: a number above 0 and below 1`},
		{"no frames", "simulate BUOYS --channel bec --parameter 0.4 --frames 0", "",
			`--frames: found "0"; allowed: a whole number from 1 to 1125899906842624`},
		{"an unnamed checkpoint", "simulate BUOYS --channel bec --parameter 0.4 --checkpoint=", "",
			`--checkpoint "": must be a file name`},
		{"no curve", "report ru01-r50-d3 --channel bec --simulation -", "{}",
			`standard input: schema: found ""; allowed: tannery/simulate/1`},
	} {
		t.Run(c.name, func(t *testing.T) {
			c.stdin = strings.Replace(c.stdin, "HEAD", "%%MatrixMarket matrix coordinate pattern general\n", 1)
			c.args = strings.Replace(c.args, "BUOYS", buoysMatrix, 1)
			code, stdout, stderr := command(t, c.stdin, strings.Fields(c.args)...)
			if code != exitUsage || stdout != "" || stderr != "tannery: "+c.want+"\n" {
				t.Errorf("tannery %s\ncode %d, stdout %q\n got %swant tannery: %s", c.args, code, stdout, stderr, c.want)
			}
		})
	}
}

// All problems of a file are told, one on a line.
func TestAllProblemsAreReported(t *testing.T) {
	file := filepath.Join(t.TempDir(), "bad.yaml")
	text := "kind: profile\nversion: 2\nlambda: {2: -1, x: 3}\nrho: {6: 1}\ncolour: red\n"
	if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	code, _, stderr := command(t, "", "threshold", file, "--channel", "bec")
	lines := strings.Split(strings.TrimSuffix(stderr, "\n"), "\n")
	if code != exitUsage || len(lines) != 4 {
		t.Fatalf("code %d, %d lines:\n%s", code, len(lines), stderr)
	}
	for i, position := range []string{"2:10", "3:13", "3:17", "5:1"} {
		if want := "tannery: " + file + ":" + position + ": "; !strings.HasPrefix(lines[i], want) {
			t.Errorf("line %d: %s, want %s…", i+1, lines[i], want)
		}
	}
}

func TestUnwritableOutputIsFoundFirst(t *testing.T) {
	folder := t.TempDir()
	for _, args := range []string{
		"export --lambda 3:1 --rho 6:1 --channel bec --length 100 -o " + folder,
		"export --lambda 3:1 --rho 6:1 --channel bec --length 100 -o " + filepath.Join(folder, "no", "such.yaml"),
	} {
		code, stdout, stderr := command(t, "", strings.Fields(args)...)
		if code != exitFailed || stdout != "" || !strings.HasPrefix(stderr, "tannery: --output "+folder) {
			t.Errorf("tannery %s: code %d, stdout %q, stderr %q", args, code, stdout, stderr)
		}
	}
	if entries, _ := os.ReadDir(folder); len(entries) != 0 {
		t.Errorf("left behind: %v", entries)
	}
}

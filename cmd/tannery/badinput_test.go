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
	refused(t, []badInput{
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
		{"a name that steers terminals", "threshold a\x1b[2Jb.yaml --channel bec", "",
			`a\x1b[2Jb.yaml: cannot be read: no such file or directory`},
		{"a title that steers terminals", threshold, "title: \"a\\e[31mb\"\n" + profileText,
			`standard input:1:8: title: found "a\x1b[31mb"; allowed: text without control characters`},
		{"a key that steers terminals", threshold, profileText + "\"\\e[2J\": 1\n",
			`standard input:5:1: \x1b[2J: found an unknown key; allowed: kind, version, title, lambda, rho, design_rate, results, provenance, realization`},
		{"help about two", "help limit foo", "",
			`"foo": unexpected; help takes one command`},
		{"help about nothing known", "help limt", "",
			"limt: unknown command; did you mean limit?; tannery --help lists them"},
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
		{"a number in base 16", "limit --channel bec --rate 0x1p-1", "", `--rate: found "0x1p-1"; allowed: a number above 0 and below 1`},
		{"a number with underscores", "limit --channel bec --parameter 0_0.5", "", `--parameter: found "0_0.5"; allowed: a number of at least 0`},
		{"a fraction with underscores", "threshold --channel bec --lambda 3:1_0e-1 --rho 6:1", "", `--lambda: fraction "1_0e-1" of degree 3: must be a number from 0 to 1`},
		{"trials at a number in base 16", "simulate BUOYS --channel bec --parameter 0.1,0x1p-2", "",
			`--parameter: found "0.1,0x1p-2"; allowed: at most 1000 different numbers with commas between them, or FROM:TO:STEP with a STEP that leads from FROM to TO; each a number of at least 0`},
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
			"--degree-two: found chain, and 100 variable nodes of degree 2; allowed: a chain of at most 49, one less than the check nodes, or forest or free"},
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
			`standard input:1: found "%%MatrixMarket matrix array real general"; allowed: %%MatrixMarket matrix coordinate pattern general, or integer or real for pattern, symmetric for general`},
		{"an entry of 2", "profile -", "%%MatrixMarket matrix coordinate integer general\n1 2 2\n1 1 1\n1 2 2\n",
			`standard input:4: found "1 2 2"; allowed: ROW COLUMN 1, as all entries of a parity-check matrix are 1 and zeros are left out`},
		{"an entry above the diagonal", "profile -", "%%MatrixMarket matrix coordinate pattern symmetric\n2 2 2\n1 1\n1 2\n",
			"standard input:4: found row 1, column 2; allowed: entries on or below the diagonal, as the matrix is symmetric"},
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
			"standard input: found row 1 with a single entry; allowed: at least 2 in every row, as a check of one bit makes it 0"},
		{"trials on no channel", "simulate BUOYS --parameter 0.4", "",
			"--channel: missing; allowed: bec, bsc, biawgn, laplace or rayleigh"},
		{"trials at no parameter", "simulate BUOYS --channel bec", "",
			"--parameter: missing; allowed: it, --eb-n0 or --es-n0"},
		{"trials beyond the range", "simulate BUOYS --channel bec --parameter 1.4", "",
			"--parameter: found 1.4; allowed: for ε of channel bec, a number from 0 to 1"},
		{"trials without flips", "simulate BUOYS --channel bsc --parameter 0", "",
			"--parameter: found 0; allowed: for trials on channel bsc, a number above 0 and below 0.5"},
		{"half a range", "simulate BUOYS --channel bec --parameter 0.4:0.5", "",
			`--parameter: found "0.4:0.5"; allowed: at most 1000 different numbers with commas between them, or FROM:TO:STEP with a STEP that leads from FROM to TO; each a number of at least 0`},
		{"a value twice", "simulate BUOYS --channel bec --parameter 0.4,0.4", "",
			`--parameter: found "0.4,0.4"; allowed: at most 1000 different numbers with commas between them, or FROM:TO:STEP with a STEP that leads from FROM to TO; each a number of at least 0`},
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

		// Options and arguments of the other commands.
		{"a shell nobody knows", "completion bahs", "",
			`completion: found "bahs"; allowed: bash, zsh, fish or powershell; did you mean bash?`},
		{"two shells", "completion bash zsh", "",
			`"zsh": unexpected; bash takes options only`},
		{"neither true nor false", "limit --json=maybe", "",
			`--json: found "maybe"; allowed: true or false`},
		{"a command misspelt", "serach", "",
			"serach: unknown command; did you mean search?; tannery --help lists them"},
		{"an option misspelt", "search --chanel bec", "",
			"--chanel: unknown option; did you mean --channel?"},
		{"an option that is none", "search -x", "",
			"-x: unknown option"},
		{"a folder of manual pages that is not there", "man none", "",
			"none: found no folder; allowed: a folder that exists"},
		{"no folder for manual pages", "man", "",
			"folder: missing; allowed: a folder for the manual pages"},
		{"two names for the catalogue", "catalog a b", "",
			`"b": unexpected; catalog takes one name`},
		{"a name that is not in the catalogue", "catalog none", "",
			"none: not a name of the catalogue; tannery catalog lists them"},
		{"a channel the catalogue does not know", "catalog --channel fax", "",
			`--channel: found "fax"; allowed: bec, bsc, biawgn, laplace or rayleigh`},
		{"CSV and JSON", "trace ru01-r50-d3 --channel bec --parameter 0.4 --csv --json", "",
			"--csv and --json: only one of the two"},
		{"a picture of another kind", "trace ru01-r50-d3 --channel bec --parameter 0.4 --plot x.gif", "",
			`--plot: found "x.gif"; allowed: a file name that ends in .svg or .png`},
		{"a picture without a file", "trace ru01-r50-d3 --channel bec --parameter 0.4 --picture errors", "",
			"--picture: needs --plot beside it"},
		{"an unknown picture", "trace ru01-r50-d3 --channel bec --parameter 0.4 --plot x.svg --picture map", "",
			`--picture: found "map"; allowed: tunnel, errors or degrees`},
		{"a trace at no parameter", "trace ru01-r50-d3 --channel bec", "",
			"--parameter: missing; allowed: it, --eb-n0 or --es-n0"},
		{"a trace beyond the channel", "trace ru01-r50-d3 --channel bec --parameter 2", "",
			"--parameter: found 2; allowed: for ε of channel bec, a number from 0 to 1"},
		{"a trace of no iterations", "trace ru01-r50-d3 --channel bec --parameter 0.4 --iterations 0", "",
			`--iterations: found "0"; allowed: a whole number from 1 to 1000000`},
		{"a target without iterations", "threshold ru01-r50-d3 --channel bec --target-error 1e-3", "",
			"--target-error: needs --iterations beside it"},
		{"two profiles for one", "threshold ru01-r50-d3 ru01-r50-d4 --channel bec", "",
			`"ru01-r50-d4": unexpected; threshold takes one profile`},
		{"a distribution without fractions", "threshold --lambda 3 --rho 6:1 --channel bec", "",
			`--lambda: "3": must be DEGREE:FRACTION, as in 2:0.3,3:0.7`},
		{"a degree beyond the cap", "threshold --lambda 1000001:1 --rho 6:1 --channel bec", "",
			`--lambda: degree "1000001": must be a whole number from 1 to 1000000`},
		{"degradation of a channel with a name", "limit --channel bec --degradation flip --rate 0.5", "",
			"--degradation: found flip; allowed: nothing, because channel bec is not from a file"},
		{"a length without an error rate", "limit --channel bec --rate 0.5 --length 100", "",
			"--frame-error: missing; --length needs two of --frame-error, --rate and --parameter"},
		{"an error rate without a length", "limit --channel bec --rate 0.5 --frame-error 1e-3", "",
			"--frame-error: needs --length beside it"},
		{"decibels beyond measure", "limit --channel biawgn --es-n0 1e9", "",
			`--es-n0: found "1e9"; allowed: a number from -100 to 100`},
		{"noise of 0", "limit --channel biawgn --parameter 0", "",
			"--parameter: found 0; allowed: for σ of channel biawgn, a number above 0"},
		{"a source without a rate", "limit --channel bec --parameter 0.4 --source-probability 0.2", "",
			"a link needs both --source-rate and --symbol-rate"},
		{"an argument where none is", "limit bec", "",
			`"bec": unexpected; limit takes options only`},
		{"nothing to compare", "compare", "",
			"profile: missing; allowed: one or more files, names of the catalogue, and - for standard input once"},
		{"standard input twice", "compare - - --channel bec", "kind: profile\nversion: 1\nlambda: {3: 1}\nrho: {6: 1}\n",
			"-: standard input can be read once only"},
		{"an order nobody knows", "compare ru01-r50-d3 --channel bec --sort size", "",
			`--sort: found "size"; allowed: gap, threshold, edges, iterations, name or none`},
		{"a distance of all", "compare ru01-r50-d3 --channel bec --distance 1", "",
			`--distance: found "1"; allowed: a number above 0 and below 1`},
		{"an export of no length", "export ru01-r50-d3", "",
			"--length: missing; allowed: a whole number from 2 to 1000000000"},
		{"an export too long", "export ru01-r50-d3 --length 1000000001", "",
			`--length: found "1000000001"; allowed: a whole number from 2 to 1000000000`},
		{"a report on no channel", "report ru01-r50-d3", "",
			"--channel: missing, and the profile's results do not name exactly one; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name"},
		{"fewer than no neighbours", "report ru01-r50-d3 --channel bec --neighbours -1", "",
			`--neighbours: found "-1"; allowed: a whole number from 0 to 100`},
		{"a time too long", "search --channel bec --rate 0.5 --time 721h", "",
			`--time: found "721h"; allowed: a time above 0 and up to 720h with its unit, such as 60s or 5m`},
		{"two ways to the degrees", "search --channel bec --rate 0.5 --max-variable-degree 15 --variable-degrees 2,3", "",
			"--max-variable-degree and --variable-degrees: only one of the two"},
		{"two briefs", "search a.yaml b.yaml", "",
			`"b.yaml": unexpected; search takes one brief`},
		{"an output without a name", "search --channel bec --rate 0.5 --output=", "",
			`--output "": must be a file name, or - for standard output`},
		{"one file for two", "simulate BUOYS --channel bec --parameter 0.4 --checkpoint x.svg --plot ./x.svg", "",
			"--checkpoint and --plot: found the same file, x.svg; allowed: two"},
		{"a picture over the matrix", "profile BUOYS -o BUOYS", "",
			"--output: found BUOYS, which is read; allowed: another file"},
	})
}

// badInput is a command line and its standard input, in which HEAD stands for
// the first line of a matrix and BUOYS for the file of one, with the message
// that it is refused by.
type badInput struct{ name, args, stdin, want string }

// refused runs what must be refused as wrong usage, with this message and
// nothing else.
func refused(t *testing.T, rows []badInput) {
	t.Helper()
	for _, c := range rows {
		t.Run(c.name, func(t *testing.T) {
			c.stdin = strings.Replace(c.stdin, "HEAD", "%%MatrixMarket matrix coordinate pattern general\n", 1)
			c.args = strings.ReplaceAll(c.args, "BUOYS", buoysMatrix)
			c.want = strings.ReplaceAll(c.want, "BUOYS", buoysMatrix)
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

// A time of the environment that is none is refused before any work; without
// one, or with an empty one, the clock is asked.
func TestBadEpoch(t *testing.T) {
	line := strings.Fields("export ru01-r50-d3 --length 100 -q")
	for text, ok := range map[string]bool{"": true, "0": true, "253402300799": true, "253402300800": false, "-1": false, "now": false, "1.5": false, "99999999999999999999": false} {
		t.Setenv("SOURCE_DATE_EPOCH", text)
		code, stdout, stderr := command(t, "", line...)
		want := "tannery: SOURCE_DATE_EPOCH: found \"" + text + "\"; allowed: a whole number of seconds from 0 to 253402300799\n"
		if ok && code != exitDone || !ok && (code != exitUsage || stdout != "" || stderr != want) {
			t.Errorf("%q: code %d, stdout %q, stderr %q", text, code, stdout, stderr)
		}
	}
}

// Names that are empty are shown as such.
func TestEmptyNames(t *testing.T) {
	for want, args := range map[string][]string{
		`"": unknown command; tannery --help lists them`:                            {""},
		`" limit": unknown command; did you mean limit?; tannery --help lists them`: {" limit"},
		`folder "": must be the name of a folder that exists`:                       {"man", ""},
		`file name "": must be a file, or - for standard input`:                     {"threshold", "", "--channel", "bec"},
		`--output "": must be a file name, or - for standard output`:                {"export", "ru01-r50-d3", "--length", "100", "-o", ""},
	} {
		code, stdout, stderr := command(t, "", args...)
		if code != exitUsage || stdout != "" || stderr != "tannery: "+want+"\n" {
			t.Errorf("tannery %q: code %d, stdout %q, stderr %q; want %s", args, code, stdout, stderr, want)
		}
	}
}

// Whatever bytes the title of a matrix has, what is shown and written of it is
// text.
func TestTitleOfAnyBytes(t *testing.T) {
	matrix := strings.Replace(tinyMatrix, "\n", "\n% title: K\xfcste\x1b[31m \u0085 \x00red\n", 1)
	const title = "K\ufffdste [31m red"
	if profile := succeed(t, matrix, "profile", "-", "-o", "-", "-q"); !strings.Contains(profile, "title: "+title+"\n") && !strings.Contains(profile, "title: '"+title+"'\n") {
		t.Errorf("profile:\n%s", profile)
	}
	answer := succeed(t, matrix, strings.Fields("simulate - --channel bec --parameter 0.3 --frames 2 -q")...)
	if !strings.HasPrefix(answer, title+"\n") {
		t.Errorf("simulate:\n%q", answer)
	}
}

// The name of a file is shown by how it is spelt, also in an answer.
func TestFileNamesDoNotSteerTerminals(t *testing.T) {
	file := filepath.Join(t.TempDir(), "a\x1b[2Jb.yaml")
	if err := os.WriteFile(file, []byte(profileText), 0o600); err != nil {
		t.Skip("no such names here: ", err)
	}
	answer := succeed(t, "", "compare", file, "--channel", "bec")
	if strings.Contains(answer, "\x1b") || !strings.Contains(answer, `a\x1b[2Jb`) {
		t.Errorf("%q", answer)
	}
}

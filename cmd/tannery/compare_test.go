package main

import (
	"encoding/csv"
	"encoding/json"
	"strconv"
	"strings"
	"testing"
)

const compareThree = "compare ru01-r50-d3 s99-r50-d13 lmss01-r50-d31 en302307-r50-d8 --channel bec"

// The answer does not depend on the number of workers, and repeats itself.
func TestCompareIsReproducible(t *testing.T) {
	args := strings.Fields("compare ru01-r50-d3 rsu01-r50-d4 rsu01-r50-d15 80211n-r50-d11 --channel biawgn --method gaussian --json")
	one := succeed(t, "", append(args, "--workers", "1")...)
	four := succeed(t, "", append(args, "--workers", "4")...)
	if one != four {
		t.Errorf("one worker:\n%s\nfour:\n%s", one, four)
	}
}

func TestCompareSorts(t *testing.T) {
	for sort, want := range map[string]string{
		"gap":        "lmss01-r50-d31 s99-r50-d13 ru01-r50-d3 en302307-r50-d8",
		"threshold":  "lmss01-r50-d31 s99-r50-d13 ru01-r50-d3 en302307-r50-d8",
		"edges":      "ru01-r50-d3 s99-r50-d13 en302307-r50-d8 lmss01-r50-d31",
		"iterations": "ru01-r50-d3 s99-r50-d13 lmss01-r50-d31 en302307-r50-d8",
		"name":       "en302307-r50-d8 lmss01-r50-d31 ru01-r50-d3 s99-r50-d13",
		"none":       "ru01-r50-d3 s99-r50-d13 lmss01-r50-d31 en302307-r50-d8",
	} {
		records, err := csv.NewReader(strings.NewReader(succeed(t, "", append(strings.Fields(compareThree), "--csv", "--sort", sort)...))).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, r := range records[1:] {
			got = append(got, r[0])
		}
		if strings.Join(got, " ") != want {
			t.Errorf("--sort %s: %v, want %s", sort, got, want)
		}
	}
}

// Text, CSV and JSON say the same, and what compare says is what threshold
// and trace say one by one.
func TestCompareAgreesWithOtherCommands(t *testing.T) {
	var answer struct {
		Distance float64
		Rows     []struct {
			Profile, Channel     string
			Threshold, Stability any
			Gap                  struct{ Parameter, Rate float64 }
			At                   float64
			Iterations           int
		}
	}
	if err := json.Unmarshal([]byte(succeed(t, "", strings.Fields("compare s99-r50-d13 --channel bec --distance 0.02 --json")...)), &answer); err != nil {
		t.Fatal(err)
	}
	row := answer.Rows[0]
	var threshold struct {
		Threshold, Stability any
		Gap                  struct{ Parameter, Rate float64 }
	}
	if err := json.Unmarshal([]byte(succeed(t, "", strings.Fields("threshold s99-r50-d13 --channel bec --json")...)), &threshold); err != nil {
		t.Fatal(err)
	}
	if row.Threshold != threshold.Threshold || row.Gap != threshold.Gap {
		t.Errorf("compare %+v, threshold %+v", row, threshold)
	}
	if want := row.Threshold.(float64) * 0.98; row.At != want {
		t.Errorf("iterations counted at %v, want %v", row.At, want)
	}
	records, err := csv.NewReader(strings.NewReader(succeed(t, "", "trace", "s99-r50-d13", "--channel", "bec", "--parameter", strconv.FormatFloat(row.At, 'g', -1, 64), "--csv"))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	errorAfter := func(i int) float64 {
		v, err := strconv.ParseFloat(records[i+1][5], 64)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	if n := row.Iterations; errorAfter(n) > 1e-6 || errorAfter(n-1) <= 1e-6 {
		t.Errorf("%d iterations, after which the bit error probability is %v, and %v before", n, errorAfter(n), errorAfter(n-1))
	}
}

func TestCompareRefuses(t *testing.T) {
	for args, want := range map[string]string{
		"compare":                                              "profile: missing; allowed: one or more files, names of the catalogue, and - for standard input once",
		"compare - - --channel bec":                            "-: standard input can be read once only",
		"compare ru01-r50-d3 --channel bec,bcs":                `--channel: found "bec,bcs"; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name; did you mean bec?`,
		"compare 80211n-r50-d11":                               "--channel: missing, and the profiles' results share none; allowed: bec, bsc, biawgn, laplace, rayleigh, or a file with . or / in its name",
		"compare - --channel bec,-":                            "-: standard input can be read once only",
		"compare ru01-r50-d3 --channel bec --degradation flip": "--degradation: found flip; allowed: nothing, because no channel is from a file",
		"compare ru01-r50-d3 --distance 1":                     `--distance: found "1"; allowed: a number above 0 and below 1`,
		"compare s99-r50-d13 --plot x.gif":                     `--plot: found "x.gif"; allowed: a file name that ends in .svg or .png`,
		"compare s99-r50-d13 --picture gaps":                   "--picture: needs --plot beside it",
		"compare ru01-r50-d3 --csv --json":                     "--csv and --json: only one of the two",
		"compare ru01-r50-d3 --plot x.svg":                     "--plot: a picture shows one channel; allowed: one --channel beside it",
		"catalog rsu01-r50-d4 --rate 0.5":                      "--rate: for the list only; allowed: it, or rsu01-r50-d4",
		"trace ru01-r50-d3 --channel bec --plot .svg":          "--parameter: missing; allowed: it, --eb-n0 or --es-n0",
	} {
		t.Chdir(t.TempDir())
		code, stdout, stderr := command(t, "", strings.Fields(args)...)
		if lines := strings.Split(stderr, "\n"); code != exitUsage || stdout != "" || lines[len(lines)-2] != "tannery: "+want {
			t.Errorf("tannery %s: code %d, stdout %q, stderr %q; want %q", args, code, stdout, stderr, want)
		}
	}
}

// A channel from a file stands beside named ones.
func TestCompareOnMeasuredChannel(t *testing.T) {
	records, err := csv.NewReader(strings.NewReader(succeed(t, "", strings.Fields("compare ru01-r25-d3 rsu01-r50-d4 --channel bec,../../testdata/channels/receiver.csv --csv")...))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(records) != 5 || records[1][1] != "bec" || records[3][1] != "receiver" || records[3][2] != "epsilon" || records[3][7] == "" {
		t.Errorf("%v", records)
	}
}

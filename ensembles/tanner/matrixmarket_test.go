package tanner

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"testing"
	"testing/iotest"
)

func same(a, b *Graph) bool {
	return slices.Equal(a.varStart, b.varStart) && slices.Equal(a.varCheck, b.varCheck) &&
		slices.Equal(a.checkStart, b.checkStart) && slices.Equal(a.checkVar, b.checkVar)
}

func TestMatrixRoundTrip(t *testing.T) {
	g, err := Build(context.Background(), satellite(200), Settings{DegreeTwo: Chain})
	if err != nil {
		t.Fatal(err)
	}
	label := Label{Title: "half-rate code of the harbour telemetry link", Profile: "sha256:00ff", Seed: "7"}
	var file bytes.Buffer
	if err := WriteMatrix(&file, g, label); err != nil {
		t.Fatal(err)
	}
	back, read, err := ReadMatrix("matrix", iotest.OneByteReader(bytes.NewReader(file.Bytes())))
	if err != nil {
		t.Fatal(err)
	}
	if !same(g, back) || read != label {
		t.Errorf("read back a different graph or label %+v", read)
	}
	// The other line end, and the node counts.
	back, _, err = ReadMatrix("matrix", bytes.NewReader(bytes.ReplaceAll(file.Bytes(), []byte("\n"), []byte("\r\n"))))
	if err != nil || !same(g, back) {
		t.Errorf("with CR LF: %v", err)
	}
	if err := back.Verify(satellite(200)); err != nil {
		t.Error(err)
	}
}

func TestMatrixLabelStaysOnItsLine(t *testing.T) {
	g, _ := NewGraph(1, 1, []Edge{{0, 0}})
	var file bytes.Buffer
	if err := WriteMatrix(&file, g, Label{Title: "two\n1 1 lines\r\n"}); err != nil {
		t.Fatal(err)
	}
	if _, label, err := ReadMatrix("matrix", &file); err != nil || label.Title != "two 1 1 lines" {
		t.Errorf("title %q, error %v", label.Title, err)
	}
}

func TestReadMatrix(t *testing.T) {
	const head = banner + "\n"
	for _, test := range []struct{ name, text, want string }{
		{"empty", "", "matrix:1: found the end of the file"},
		{"banner only", head, "matrix:1: found the end of the file: the line of rows"},
		{"other format", "%%MatrixMarket matrix array real general\n1 1\n1\n", "matrix:1: found \"%%MatrixMarket matrix array real general\"; allowed: %%MatrixMarket matrix coordinate pattern general"},
		{"no banner", "2 2 2\n1 1\n2 2\n", "matrix:1:"},
		{"any case", "%%matrixmarket MATRIX Coordinate pattern General\n1 1 1\n1 1\n", ""},
		{"comments and blank lines", head + "%\n% note: any\n\n1 2 2\n\n% here too\n1 1\n1\t2 \n\n%end", ""},
		{"no last line end", head + "1 1 1\n1 1", ""},
		{"two numbers", head + "2 2\n", "matrix:2: found \"2 2\"; allowed: ROWS COLUMNS ENTRIES"},
		{"no rows", head + "0 2 2\n", "matrix:2: found 0 rows and 2 columns; allowed: at least 1"},
		{"fraction", head + "2.5 2 2\n", "matrix:2: found \"2.5 2 2\"; allowed: ROWS"},
		{"negative", head + "2 -2 2\n", "matrix:2:"},
		{"a promise of rows", head + "2000000000 2 4\n", "matrix:2: found 2000000000 rows and 4 entries"},
		{"a promise of columns", head + "2 2000000000 4\n", "matrix:2: found 2000000000 columns and 4 entries"},
		{"a promise of entries", head + "2 2 9000000000\n", "matrix:2: found 9000000000 entries; allowed: at most 2147483647"},
		{"a number beyond all", head + "2 2 99999999999999999999\n", "matrix:2: found \"2 2 99999999999999999999\"; allowed: numbers of at most"},
		{"a promise not kept", head + "1000000000 1000000000 2000000000\n1 1\n", "matrix:3: found the end of the file: there are 1 entries of the 2000000000 announced"},
		{"truncated", head + "2 2 3\n1 1\n2 2\n", "matrix:4: found the end of the file: there are 2 entries of the 3 announced"},
		{"too many", head + "1 1 1\n1 1\n1 1\n", "matrix:4: found \"1 1\"; allowed: nothing after the 1 entries announced"},
		{"row out of range", head + "2 2 2\n1 1\n3 2\n", "matrix:4: found row 3; allowed: from 1 to 2"},
		{"column zero", head + "2 2 2\n1 0\n2 2\n", "matrix:3: found column 0; allowed: from 1 to 2"},
		{"value", head + "1 1 1\n1 1 1.0\n", "matrix:3: found \"1 1 1.0\"; allowed: ROW COLUMN and nothing else"},
		{"repeated", head + "2 2 4\n1 1\n% between\n2 2\n2 1\n\n2 2\n", "matrix:8: found row 2, column 2 again; allowed: once, in line 5"},
		{"empty row", head + "3 2 3\n1 1\n3 2\n3 1\n", "matrix: found row 2 of 3 empty"},
		{"empty column", head + "2 3 3\n1 1\n2 3\n1 3\n", "matrix: found column 2 of 3 empty"},
		{"integer", "%%MatrixMarket matrix coordinate integer general\n2 2 2\n1 1 1\n2 2 1 \n", ""},
		{"real", "%%MatrixMarket matrix coordinate real general\n2 2 2\n1 1 1.0\n2 2 1.0000000000000000e+00\n", ""},
		{"other value", "%%MatrixMarket matrix coordinate real general\n2 2 2\n1 1 1.0\n2 2 0.5\n", "matrix:4: found \"2 2 0.5\"; allowed: ROW COLUMN 1, as all entries of a parity-check matrix are 1"},
		{"explicit zero", "%%MatrixMarket matrix coordinate integer general\n1 1 1\n1 1 0\n", "matrix:3: found \"1 1 0\"; allowed: ROW COLUMN 1, as"},
		{"no value", "%%MatrixMarket matrix coordinate integer general\n1 1 1\n1 1\n", "matrix:3: found \"1 1\"; allowed: ROW COLUMN 1, as"},
		{"complex", "%%MatrixMarket matrix coordinate complex general\n1 1 1\n1 1 1 0\n", "matrix:1: found \"%%MatrixMarket matrix coordinate complex general\"; allowed: " + banner + ", or integer or real for pattern"},
		{"symmetric", "%%MatrixMarket matrix coordinate pattern symmetric\n2 2 2\n1 1\n2 1\n", ""},
		{"not square", "%%MatrixMarket matrix coordinate pattern symmetric\n2 3 3\n", "matrix:2: found 2 rows and 3 columns; allowed: as many rows as columns"},
		{"above the diagonal", "%%MatrixMarket matrix coordinate pattern symmetric\n2 2 2\n1 1\n1 2\n", "matrix:4: found row 1, column 2; allowed: entries on or below the diagonal"},
		{"repeated below the diagonal", "%%MatrixMarket matrix coordinate pattern symmetric\n2 2 2\n2 1\n2 1\n", "matrix:4: found row 2, column 1 again; allowed: once, in line 3"},
		{"a symmetric promise", "%%MatrixMarket matrix coordinate pattern symmetric\n5 5 2\n", "matrix:2: found 5 rows and 2 entries; allowed: an entry in every row"},
		{"too many symmetric entries", "%%MatrixMarket matrix coordinate pattern symmetric\n9 9 2000000000\n", "matrix:2: found 2000000000 entries; allowed: at most 1073741823"},
		{"long comment", head + "%" + strings.Repeat("x", 3*maxLine) + "\n1 1 1\n1 1\n", ""},
		{"long line", head + strings.Repeat("1", 3*maxLine), "matrix:2:"},
	} {
		_, _, err := ReadMatrix("matrix", strings.NewReader(test.text))
		switch {
		case test.want == "" && err != nil:
			t.Errorf("%s: %v", test.name, err)
		case test.want != "" && (err == nil || !strings.HasPrefix(err.Error(), test.want)):
			t.Errorf("%s: error %v, want %s", test.name, err, test.want)
		}
	}
}

// The incidence matrix of the Fano plane by the difference set {0,1,3} is
// symmetric with c + v modulo 7 in the set: general or by its lower triangle,
// with values or without, it is the same.
func TestReadMatrixFormats(t *testing.T) {
	var graphs []*Graph
	for _, field := range []string{"pattern", "integer", "real"} {
		for _, symmetry := range []string{"general", "symmetric"} {
			var entries []string
			for c := range 7 {
				for v := range 7 {
					if sum := (c + v) % 7; (sum == 0 || sum == 1 || sum == 3) && (symmetry == "general" || v <= c) {
						value := map[string]string{"integer": " 1", "real": " 1e0"}[field]
						entries = append(entries, fmt.Sprintf("%d %d%s\n", c+1, v+1, value))
					}
				}
			}
			text := fmt.Sprintf("%%%%MatrixMarket matrix coordinate %s %s\n7 7 %d\n%s", field, symmetry, len(entries), strings.Join(entries, ""))
			g, _, err := ReadMatrix("matrix", strings.NewReader(text))
			if err != nil {
				t.Fatalf("%s %s: %v", field, symmetry, err)
			}
			graphs = append(graphs, g)
		}
	}
	for i, g := range graphs {
		if !same(g, graphs[0]) || g.Edges() != 21 {
			t.Errorf("format %d: another graph, with %d edges", i, g.Edges())
		}
	}
	if rank := rankOf(t, graphs[0]); rank != 4 {
		t.Errorf("rank %d, want 4", rank)
	}
}

func TestReadMatrixReportsReaderErrors(t *testing.T) {
	fault := errors.New("cable cut")
	r := io.MultiReader(strings.NewReader(banner+"\n2 2 3\n1 1\n"), iotest.ErrReader(fault))
	if _, _, err := ReadMatrix("matrix", r); !errors.Is(err, fault) {
		t.Errorf("error %v, want %v", err, fault)
	}
}

// What is read is a valid graph, and writing and reading gives it again.
func FuzzReadMatrix(f *testing.F) {
	f.Add([]byte(banner + "\n% title: a\n2 3 4\n1 1\n2 2\n1 3\n2 3\n"))
	f.Add([]byte("\ufeff" + banner + "\n% title: K\xfcste \x1b[2J\n1 1 1\n1 1\n"))
	f.Add([]byte(banner + "\r\n\r\n1 1 1\r\n1 1\r\n"))
	f.Add([]byte("%%MatrixMarket matrix coordinate pattern symmetric\n3 3 4\n1 1\n2 1\n3 2\n3 3\n"))
	f.Add([]byte("%%MatrixMarket matrix coordinate integer symmetric\n2 2 2\n2 1 1\n2 2 1\n"))
	f.Add([]byte("%%MatrixMarket matrix coordinate real general\n% seed: 7\n2 2 2\n1 1 1.0\n2 2 1e+00\n"))
	f.Add([]byte(banner + "\n2 2 4\n1 1\n% between\n2 2\n2 1\n\n2 2\n"))
	f.Add([]byte(banner + "\n999999999 999999999 2147483647\n1 1\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		g, label, err := ReadMatrix("matrix", bytes.NewReader(data))
		if err != nil {
			return
		}
		if n := repeatedEdges(g); n > 0 {
			t.Fatalf("%d repeated edges", n)
		}
		var file bytes.Buffer
		if err := WriteMatrix(&file, g, label); err != nil {
			t.Fatal(err)
		}
		again, relabel, err := ReadMatrix("matrix", &file)
		if err != nil || !same(g, again) || label != relabel {
			t.Fatalf("not the same when read again: %v, %+v, %+v", err, label, relabel)
		}
	})
}

func ExampleWriteMatrix() {
	// The parity-check matrix of a code of length 4 with two checks.
	g, err := NewGraph(4, 2, []Edge{{0, 0}, {1, 0}, {2, 0}, {2, 1}, {3, 1}})
	if err != nil {
		fmt.Println(err)
		return
	}
	if err := WriteMatrix(os.Stdout, g, Label{Title: "harbour buoy", Seed: "7"}); err != nil {
		fmt.Println(err)
	}
	// Output:
	// %%MatrixMarket matrix coordinate pattern general
	// % title: harbour buoy
	// % seed: 7
	// 2 4 5
	// 1 1
	// 1 2
	// 1 3
	// 2 3
	// 2 4
}

func BenchmarkReadMatrix(b *testing.B) {
	g, err := Build(context.Background(), regular(3, 6, 64800), Settings{Method: Randomized, Girth: 4})
	if err != nil {
		b.Fatal(err)
	}
	var file bytes.Buffer
	if err := WriteMatrix(&file, g, Label{}); err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(file.Len()))
	for b.Loop() {
		if _, _, err := ReadMatrix("matrix", bytes.NewReader(file.Bytes())); err != nil {
			b.Fatal(err)
		}
	}
}

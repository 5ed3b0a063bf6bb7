package main

import (
	"bytes"
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat"
)

// Real networks with real samples, where they lie beside the repository: both
// methods that move mass run on each from the command line, and the calibrated
// estimate follows the exact distances.
func TestRealSets(t *testing.T) {
	const sets = "../../../shared/data"
	scale := map[string]bool{"newyork-hops": true, "liechtenstein": true, "philadelphia": true} // for measurements
	entries, err := os.ReadDir(sets)
	if err != nil {
		t.Logf("left out: no real sets at %s", sets)
		return
	}
	tried := 0
	for _, e := range entries {
		if scale[e.Name()] || testing.Short() {
			t.Logf("left out: %s", e.Name())
			continue
		}
		tried++
		dir := filepath.Join(sets, e.Name())
		exact, estimate := matrixOf(t, dir, "exact"), matrixOf(t, dir, "multiscale")
		if len(exact) != len(estimate) || len(exact) < 20 {
			t.Fatalf("%s: %d exact distances, %d estimates", e.Name(), len(exact), len(estimate))
		}
		// Not what is aimed at: a bound that only a mistake can cross.
		if r := stat.Correlation(exact, estimate, nil); r < 0.9 {
			t.Errorf("%s: estimates correlate with exact distances by %.3f", e.Name(), r)
		}
	}
	if tried == 0 && !testing.Short() {
		t.Errorf("no sets in %s", sets)
	}
}

// matrixOf is the matrix of a set, row by row, without the diagonal.
func matrixOf(t *testing.T, dir, method string) []float64 {
	t.Helper()
	out := filepath.Join(t.TempDir(), "out")
	args := []string{"matrix", "--edges", filepath.Join(dir, "edges.csv"), "--nodes", filepath.Join(dir, "nodes.csv"),
		"--samples", filepath.Join(dir, "samples.csv"), "--method", method, "--out", out}
	if _, err := os.Stat(filepath.Join(dir, "DIRECTED")); err == nil {
		args = append(args, "--directed")
	}
	var stdout, stderr bytes.Buffer
	if code := run(args, strings.NewReader(""), &stdout, &stderr); code != done {
		t.Fatalf("%s, %s: exit code %d: %s", dir, method, code, &stderr)
	}
	file, err := os.Open(filepath.Join(out, "matrix.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	table, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var list []float64
	for i, row := range table[1:] {
		if row[0] != table[0][i+1] || len(row) != len(table) {
			t.Fatalf("%s: row %d is %q with %d fields, its column %q of %d", dir, i, row[0], len(row), table[0][i+1], len(table))
		}
		for j, text := range row[1:] {
			x, err := strconv.ParseFloat(text, 64)
			if err != nil || x < 0 || math.IsInf(x, 0) || i == j && x != 0 {
				t.Fatalf("%s: distance %q in row %d, column %d", dir, text, i, j)
			}
			if i != j {
				list = append(list, x)
			}
		}
	}
	return list
}

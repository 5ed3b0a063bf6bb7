package inference_test

import (
	"context"
	"encoding/csv"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

var ctx = context.Background()

// table reads a labelled square matrix, with a column group where grouped.
func table(t *testing.T, path string, grouped bool) (*pairwise.Matrix, []string) {
	t.Helper()
	file, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	skip := 1
	if grouped {
		skip = 2
	}
	m := &pairwise.Matrix{}
	var groups []string
	for i, row := range rows[1:] {
		m.Names = append(m.Names, row[0])
		groups = append(groups, row[skip-1])
		for _, field := range row[skip+i+1:] {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatal(err)
			}
			m.Value = append(m.Value, v)
		}
	}
	return m, groups
}

// outside finds a table that may not be kept with the project.
func outside(t *testing.T, name string) (path string, ok bool) {
	path = filepath.Join("..", "..", "..", "shared", "checks", name)
	if _, err := os.Stat(path); err != nil {
		t.Logf("%s is not here: what is checked on it is left out", name)
		return "", false
	}
	return path, true
}

func inside(name string) string { return filepath.Join("..", "..", "testdata", name) }

// square is a matrix of rows, named a, b, ….
func square(rows ...[]float64) *pairwise.Matrix {
	m := &pairwise.Matrix{}
	for i, row := range rows {
		m.Names = append(m.Names, string(rune('a'+i)))
		m.Value = append(m.Value, row[i+1:]...)
	}
	return m
}

// euclidean is the distances of points.
func euclidean(points [][]float64) *pairwise.Matrix {
	m := &pairwise.Matrix{}
	for i, p := range points {
		m.Names = append(m.Names, strconv.Itoa(i))
		for _, q := range points[i+1:] {
			sum := 0.0
			for k := range p {
				sum += (p[k] - q[k]) * (p[k] - q[k])
			}
			m.Value = append(m.Value, math.Sqrt(sum))
		}
	}
	return m
}

// normal is n points of independent standard normal coordinates.
func normal(rng *rand.Rand, n, dimension int) [][]float64 {
	points := make([][]float64, n)
	for i := range points {
		for range dimension {
			points[i] = append(points[i], rng.NormFloat64())
		}
	}
	return points
}

// labels repeats each label as often as said.
func labels(counts ...int) inference.Variable {
	v := inference.Variable{Name: "group"}
	for k, c := range counts {
		for range c {
			v.Labels = append(v.Labels, string(rune('A'+k)))
		}
	}
	return v
}

// near fails where got is not want within a relative tolerance.
func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Max(math.Abs(want), 1e-300)) {
		t.Errorf("%s: got %.15g, want %.15g within %g", what, got, want, tolerance)
	}
}

// lenient asks for no level, many permutations and no more threads than needed.
func lenient(permutations int) inference.Options {
	return inference.Options{Permutations: permutations, Level: 1, Seed: 1}
}

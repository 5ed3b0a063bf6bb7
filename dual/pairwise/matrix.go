package pairwise

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// A Matrix holds a distance for every pair of samples, and bounds where they
// are known. It is a mat.Matrix; where it is not Directed it is symmetric and
// keeps each pair once.
//
// Memory: 8 bytes a pair for Value and as much for each of the bounds.
type Matrix struct {
	Names    []string
	Directed bool // At(i, j) is from i to j and may differ from At(j, i)

	// Value holds the distances, and Lower and Upper, nil where no bounds are
	// known, what is proved of them: at Index(i, j).
	Value, Lower, Upper []float64
}

func newMatrix(names []string, directed, bounds bool) *Matrix {
	m := &Matrix{Names: names, Directed: directed}
	entries := m.entries()
	m.Value = make([]float64, entries)
	if bounds {
		m.Lower, m.Upper = make([]float64, entries), make([]float64, entries)
	}
	return m
}

func (m *Matrix) entries() int {
	n := len(m.Names)
	if m.Directed {
		return n * n
	}
	return n * (n - 1) / 2
}

// Index is where the pair i, j stands in Value, Lower and Upper. It panics for
// i = j where the matrix is not Directed: the distance is 0 and not kept.
func (m *Matrix) Index(i, j int) int {
	n := len(m.Names)
	if i < 0 || j < 0 || i >= n || j >= n {
		panic(mat.ErrRowAccess)
	}
	if m.Directed {
		return i*n + j
	}
	if i == j {
		panic("pairwise: a sample and itself have no index")
	}
	if i > j {
		i, j = j, i
	}
	return i*(2*n-i-1)/2 + j - i - 1
}

// At is the distance from sample i to sample j; 0 for i = j.
func (m *Matrix) At(i, j int) float64 {
	if i == j {
		return 0
	}
	return m.Value[m.Index(i, j)]
}

// Bounds is what is proved of the distance from i to j; ok is false where
// nothing is.
func (m *Matrix) Bounds(i, j int) (lower, upper float64, ok bool) {
	switch {
	case i == j:
		return 0, 0, true
	case m.Lower == nil:
		return math.NaN(), math.NaN(), false
	}
	at := m.Index(i, j)
	return m.Lower[at], m.Upper[at], true
}

// Dims is the number of samples, twice.
func (m *Matrix) Dims() (r, c int) { return len(m.Names), len(m.Names) }

// T is the matrix of the opposite directions.
func (m *Matrix) T() mat.Matrix {
	if !m.Directed {
		return m
	}
	return mat.Transpose{Matrix: m}
}

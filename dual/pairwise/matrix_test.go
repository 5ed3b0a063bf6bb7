package pairwise

import (
	"testing"

	"gonum.org/v1/gonum/mat"
)

func TestIndexNumbersPairsOnce(t *testing.T) {
	for _, directed := range []bool{false, true} {
		for n := 1; n < 9; n++ {
			m := newMatrix(make([]string, n), directed, false)
			seen := map[int]bool{}
			for i := range n {
				for j := range n {
					if i == j || j < i && !directed {
						continue
					}
					at := m.Index(i, j)
					if at < 0 || at >= len(m.Value) || seen[at] {
						t.Fatalf("directed %v, n %d: pair %d,%d at %d of %d, taken %v", directed, n, i, j, at, len(m.Value), seen[at])
					}
					seen[at] = true
					if !directed && m.Index(j, i) != at {
						t.Fatalf("pair %d,%d at %d and %d", i, j, at, m.Index(j, i))
					}
				}
			}
			if want := pairCount(n, directed); len(seen) != want {
				t.Errorf("directed %v, n %d: %d pairs, want %d", directed, n, len(seen), want)
			}
		}
	}
}

func TestMatrixIsAGonumMatrix(t *testing.T) {
	m := newMatrix([]string{"a", "b", "c"}, true, true)
	for i := range m.Value {
		m.Value[i], m.Lower[i], m.Upper[i] = float64(i), float64(i)-1, float64(i)+1
	}
	got := mat.DenseCopyOf(m)
	want := mat.NewDense(3, 3, []float64{0, 1, 2, 3, 0, 5, 6, 7, 0})
	if !mat.Equal(got, want) {
		t.Errorf("copied as %v, want %v", mat.Formatted(got), mat.Formatted(want))
	}
	if !mat.Equal(m.T(), want.T()) {
		t.Errorf("transposed as %v", mat.Formatted(m.T()))
	}
	if lower, upper, ok := m.Bounds(1, 2); lower != 4 || upper != 6 || !ok {
		t.Errorf("bounds %v, %v, %v; want 4, 6, true", lower, upper, ok)
	}
	if _, _, ok := newMatrix([]string{"a", "b"}, false, false).Bounds(0, 1); ok {
		t.Error("a matrix without bounds says it has some")
	}
}

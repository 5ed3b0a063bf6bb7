package pairwise

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"pgregory.net/rapid"
)

// The optimum is known by the conditions of Karush, Kuhn and Tucker: x >= 0,
// slope Aᵀ(b − A x) <= 0, and 0 wherever x > 0 (Lawson & Hanson 1974, theorem
// 23.4).
func TestNonNegativeMeetsItsConditions(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m, n := rapid.IntRange(1, 12).Draw(t, "rows"), rapid.IntRange(1, 8).Draw(t, "columns")
		entry := rapid.Float64Range(-4, 4)
		if rapid.Bool().Draw(t, "tied") {
			entry = rapid.Map(rapid.IntRange(0, 2), func(k int) float64 { return float64(k) })
		}
		a := mat.NewDense(m, n, nil)
		b := make([]float64, m)
		for i := range m {
			b[i] = entry.Draw(t, "b")
			for j := range n {
				a.Set(i, j, entry.Draw(t, "a"))
			}
		}
		x := nonNegative(a, b)
		rest := mat.NewVecDense(m, nil)
		rest.MulVec(a, mat.NewVecDense(n, x))
		rest.SubVec(mat.NewVecDense(m, b), rest)
		for j := range n {
			slope := mat.Dot(a.ColView(j), rest)
			column := mat.Norm(a.ColView(j), 2)
			tolerance := 1e-7 * (1 + column*mat.Norm(mat.NewVecDense(m, b), 2))
			// what rounding A x leaves, where columns all but depend on each other
			tolerance += 1e-15 * column * mat.Norm(a, 2) * mat.Norm(mat.NewVecDense(n, x), 2)
			if x[j] < 0 || math.IsNaN(x[j]) || slope > tolerance || x[j] > 0 && slope < -tolerance {
				t.Fatalf("x = %v: x[%d] = %v with slope %v", x, j, x[j], slope)
			}
		}
	})
}

// By hand: the unconstrained solution is (2, −1); with x₂ = 0 the best x₁ is
// (1·2 + 1·1)/(1 + 1) = 1.5.
func TestNonNegativeByHand(t *testing.T) {
	x := nonNegative(mat.NewDense(2, 2, []float64{1, 0, 1, 1}), []float64{2, 1})
	if math.Abs(x[0]-1.5) > 1e-12 || x[1] != 0 {
		t.Errorf("got %v, want [1.5 0]", x)
	}
}

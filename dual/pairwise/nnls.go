package pairwise

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// nonNegative finds x >= 0 that minimises ‖A x − b‖₂: the active set method of
// Lawson & Hanson 1974, algorithm NNLS (23.10). Columns enter one at a time,
// the one along which the error falls fastest first, and leave where the least
// squares on those that are in would make them negative.
// Cost: a least-squares solve for each change, some twice the columns of A.
func nonNegative(a *mat.Dense, b []float64) []float64 {
	_, n := a.Dims()
	x := make([]float64, n)
	in := make([]bool, n)
	barred := make([]bool, n) // columns that entered and left at once, by rounding
	for range 10 * n {
		enter := steepest(a, b, x, in, barred)
		if enter < 0 {
			break
		}
		in[enter] = true
		before := x[enter]
		for {
			z := leastSquares(a, b, in)
			if z == nil { // the column adds nothing to those that are in
				in[enter], x[enter], barred[enter] = false, before, true
				break
			}
			if step(x, z, in) {
				break
			}
		}
		if x[enter] > 0 {
			clear(barred)
		} else {
			barred[enter] = true
		}
	}
	return x
}

// steepest is the column outside whose entry lowers the error fastest, -1 where
// none lowers it by more than rounding.
func steepest(a *mat.Dense, b, x []float64, in, barred []bool) int {
	m, n := a.Dims()
	rest := mat.NewVecDense(m, nil)
	rest.MulVec(a, mat.NewVecDense(n, x))
	rest.SubVec(mat.NewVecDense(m, b), rest)
	size := mat.Norm(mat.NewVecDense(m, b), 2)
	best, most := -1, 0.0
	for j := range n {
		if in[j] || barred[j] {
			continue
		}
		column := a.ColView(j)
		slope := mat.Dot(column, rest)
		if slope > 1e-12*mat.Norm(column, 2)*size && slope > most {
			best, most = j, slope
		}
	}
	return best
}

// leastSquares solves for the columns that are in; the others are 0. It is nil
// where they do not determine a solution.
func leastSquares(a *mat.Dense, b []float64, in []bool) []float64 {
	m, n := a.Dims()
	var columns []int
	for j := range n {
		if in[j] {
			columns = append(columns, j)
		}
	}
	if len(columns) > m {
		return nil
	}
	part := mat.NewDense(m, len(columns), nil)
	for k, j := range columns {
		part.SetCol(k, mat.Col(nil, j, a))
	}
	var qr mat.QR
	qr.Factorize(part)
	var y mat.VecDense
	err := qr.SolveVecTo(&y, false, mat.NewVecDense(m, b))
	var condition mat.Condition
	if err != nil && !(errors.As(err, &condition) && float64(condition) < 1e12) {
		return nil
	}
	z := make([]float64, n)
	for k, j := range columns {
		z[j] = y.AtVec(k)
	}
	return z
}

// step goes from x towards z until a column would turn negative, which leaves;
// true where z was reached.
func step(x, z []float64, in []bool) bool {
	reach, leave := 1.0, -1
	for j := range x {
		if in[j] && z[j] <= 0 {
			if r := x[j] / (x[j] - z[j]); leave < 0 || r < reach {
				reach, leave = r, j
			}
		}
	}
	if leave < 0 {
		copy(x, z)
		return true
	}
	if math.IsNaN(reach) {
		reach = 0 // x and z both 0
	}
	for j := range x {
		if in[j] {
			x[j] += reach * (z[j] - x[j])
		}
	}
	x[leave], in[leave] = 0, false
	for j := range x {
		if in[j] && x[j] <= 0 {
			x[j], in[j] = 0, false
		}
	}
	return false
}

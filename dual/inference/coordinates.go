package inference

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/mds"

	"example.org/barrow/dual/pairwise"
)

// A Map places samples so that distances on it come near to theirs.
type Map struct {
	// Coordinates has a row a sample and a column an axis, the widest first; the
	// signs are such that the coordinate furthest from 0 of each axis is positive.
	Coordinates *mat.Dense
	// Eigenvalues are all of them, largest first; those below 0 are of what no
	// flat map can show.
	Eigenvalues []float64
	// Kept is the part of the positive eigenvalues that the axes hold, and
	// KeptOfAll that of the sizes of all.
	Kept, KeptOfAll float64
}

// Coordinates is classical multidimensional scaling (Torgerson 1952; Gower
// 1966) to at most axes axes, fewer where there are fewer positive eigenvalues.
//
// Errors: ErrMatrix, ErrDesign, ErrOption. Cost: O(n³), memory of several n².
func Coordinates(d *pairwise.Matrix, axes int) (*Map, error) {
	if err := checkMatrix(d, 3); err != nil {
		return nil, err
	}
	if axes < 1 {
		return nil, fmt.Errorf("%w: %d axes; want 1 or more", ErrOption, axes)
	}
	n := len(d.Names)
	full := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i + 1; j < n; j++ {
			full.SetSym(i, j, d.At(i, j))
		}
	}
	var all mat.Dense
	m := &Map{}
	positive, values := mds.TorgersonScaling(&all, make([]float64, n), full)
	m.Eigenvalues = values
	for positive > 0 && values[positive-1] <= 1e-12*values[0] {
		positive-- // zero but for rounding
	}
	if positive == 0 {
		return nil, fmt.Errorf("the principal coordinates of %d samples did not converge", n)
	}
	axes = min(axes, positive)
	m.Coordinates = mat.DenseCopyOf(all.Slice(0, n, 0, axes))
	for k := range axes {
		far := 0.0
		for i := range n {
			if x := m.Coordinates.At(i, k); math.Abs(x) > math.Abs(far)*(1+1e-9) {
				far = x
			}
		}
		if far < 0 {
			for i := range n {
				m.Coordinates.Set(i, k, -m.Coordinates.At(i, k))
			}
		}
	}
	var kept, plus, size float64
	for k, v := range values {
		if k < axes {
			kept += v
		}
		plus += max(v, 0)
		size += math.Abs(v)
	}
	m.Kept, m.KeptOfAll = kept/plus, kept/size
	return m, nil
}

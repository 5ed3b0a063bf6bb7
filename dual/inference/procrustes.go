package inference

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Procrustes tests whether two configurations of the same samples, coordinates
// by row (samples × axes, axes may differ in number), have the same shape. Both
// are centred and scaled to squares adding up to 1; turned onto each other as
// well as can be, the squared misfit is m² = 1 − r², with r the sum of the
// singular values of XᵀY (Gower 1971). r is the statistic, compared with that
// after rearranging samples (Jackson 1995; Peres-Neto & Jackson 2001).
//
// Errors: ErrDesign, ErrFew, ErrOption; the context's.
// Cost: O(n axes²) an arrangement.
func Procrustes(ctx context.Context, x, y mat.Matrix, scheme Scheme, opt Options) (*MatrixTest, error) {
	n, _ := x.Dims()
	if m, _ := y.Dims(); m != n || n < 4 {
		return nil, fmt.Errorf("%w: configurations of %d and %d samples; want the same four or more in both", ErrDesign, n, m)
	}
	a, err := configuration(x)
	if err != nil {
		return nil, err
	}
	b, err := configuration(y)
	if err != nil {
		return nil, err
	}
	_, p := a.Dims()
	_, q := b.Dims()
	r := &MatrixTest{Test: "procrustes", Caution: "compares the axes given; two axes of a collection of many dimensions hold part of it only"}
	return r, r.run(ctx, n, scheme, opt, func() evaluation {
		product := mat.NewDense(p, q, nil)
		var svd mat.SVD
		return func(batch [][]int32, out []float64) {
			for k, arrangement := range batch {
				product.Zero()
				for i, from := range arrangement {
					u, v := a.RawRowView(int(from)), b.RawRowView(i)
					for c, x := range u {
						to := product.RawRowView(c)
						for e, y := range v {
							to[e] += float64(x * y)
						}
					}
				}
				if !svd.Factorize(product, mat.SVDNone) {
					out[k] = math.NaN()
					continue
				}
				out[k] = total(svd.Values(nil))
			}
		}
	})
}

// configuration is x centred, with squares adding up to 1.
func configuration(x mat.Matrix) (*mat.Dense, error) {
	c := mat.DenseCopyOf(x)
	n, axes := c.Dims()
	for k := range axes {
		mean := total(mat.Col(nil, k, c)) / float64(n)
		for i := range n {
			c.Set(i, k, c.At(i, k)-mean)
		}
	}
	size := mat.Norm(c, 2)
	if !(size > 0) || math.IsInf(size, 1) {
		return nil, fmt.Errorf("%w: the samples of a configuration all stand at one place, or at none", ErrDesign)
	}
	c.Scale(1/size, c)
	return c, nil
}

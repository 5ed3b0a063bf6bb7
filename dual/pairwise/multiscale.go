package pairwise

import (
	"context"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Multiscale estimates every pair from one vector a sample, see package dual.
// With Options.Calibrate the weights of the scales are fitted to random pairs
// solved exactly, distances have the unit of the lengths, and Calibration says
// how wrong they are. Without, they rank pairs but have no unit. Either way
// they obey the triangle inequality, and they are symmetric also on one-way
// networks, whose directions only the exact pairs honour.
//
// Errors: as Exact. Cost: O(nodes + edges) a sample for the vectors, O(width)
// a pair, and the pairs solved exactly.
func Multiscale(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	e, chosen, err := embed(ctx, net, compared, opt)
	if err != nil {
		return nil, err
	}
	r := &Result{Diffusion: chosen}
	weights := e.Theory()
	if count := opt.pairs(samples.Len(), net); count > 0 {
		err := opt.Phases.Time("calibrate", func() (err error) {
			r.Calibration, err = calibrate(ctx, net, compared, e, count, opt)
			return err
		})
		if err != nil {
			return nil, err
		}
		weights = r.Calibration.Weights
	}
	r.Matrix = newMatrix(samples.Names(), false, false)
	err = opt.Phases.Time("estimate", func() error { return r.Matrix.estimate(ctx, e, weights, opt) })
	if err != nil {
		return nil, err
	}
	return r, nil
}

func embed(ctx context.Context, net *graphio.Network, compared *graphio.Samples, opt Options) (e *dual.Embedding, chosen *dual.Description, err error) {
	err = opt.Phases.Time("embed", func() error {
		m, err := dual.NewMultiscale(net, dual.Options{})
		if err != nil {
			return err
		}
		n := compared.Len()
		if err := opt.afford(matrixPart(n, false, false), vectorPart(net, n, m.Width(), opt.threads()), solverPart(net, opt.threads())); err != nil {
			return err
		}
		d := m.Describe()
		chosen = &d
		e, err = m.Embed(ctx, compared, opt.Threads, opt.stage("embed"))
		return err
	})
	return e, chosen, err
}

// estimate sets every pair from the vectors.
func (m *Matrix) estimate(ctx context.Context, e *dual.Embedding, weights []float64, opt Options) error {
	return tiles(ctx, opt, "estimate", len(m.Names), func(i0, i1, j0, j1 int) {
		square := make([]float64, (i1-i0)*(j1-j0))
		e.Distances(square, i0, i1, j0, j1, weights)
		for i := i0; i < i1; i++ {
			for j := max(j0, i+1); j < j1; j++ {
				m.Value[m.Index(i, j)] = square[(i-i0)*(j1-j0)+j-j0]
			}
		}
	})
}

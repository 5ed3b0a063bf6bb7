package pairwise

import (
	"context"
	"math"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Variation is the total variation distance ½‖p − q‖₁ of every pair, blind to
// where the nodes lie: 0 to 1 for shares, in the unit of mass for amounts.
//
// Errors: samples of another network or, with Shares, without mass;
// *MemoryError; the context's. Cost: O(entries of both) a pair.
func Variation(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	if err := fitting(net, samples); err != nil {
		return nil, err
	}
	compared, err := asCompared(samples, opt)
	if err != nil {
		return nil, err
	}
	n := samples.Len()
	if err := opt.afford(matrixPart(n, false, false)); err != nil {
		return nil, err
	}
	m := newMatrix(samples.Names(), false, false)
	err = opt.Phases.Time("estimate", func() error {
		return m.fill(ctx, opt, func(i, j int) float64 { return dual.Variation(compared.At(i), compared.At(j)) })
	})
	if err != nil {
		return nil, err
	}
	return &Result{Matrix: m}, nil
}

// Kernel is the maximum mean discrepancy of the shares of every pair under the
// heat kernels of the network, summed over the dyadic times: the root of MMD²,
// a distance without unit (Gretton et al. 2012). See dual.Features.
//
// Errors: ErrMethod for amounts; otherwise as Multiscale.
// Cost: as Multiscale without calibration.
func Kernel(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	if !opt.Shares {
		return nil, ErrMethod
	}
	if err := fitting(net, samples); err != nil {
		return nil, err
	}
	var features *dual.Features
	var made *dual.Multiscale
	err := opt.Phases.Time("embed", func() (err error) {
		if made, err = dual.NewMultiscale(net, dual.Options{}); err != nil {
			return err
		}
		if err := opt.afford(matrixPart(samples.Len(), false, false), vectorPart(net, samples.Len(), made.Width(), opt.threads())); err != nil {
			return err
		}
		features, err = made.Features(ctx, samples, false, opt.Threads, opt.stage("embed"))
		return err
	})
	if err != nil {
		return nil, err
	}
	m := newMatrix(samples.Names(), false, false)
	err = opt.Phases.Time("estimate", func() error {
		return m.fill(ctx, opt, func(i, j int) float64 { return math.Sqrt(features.Biased(i, j, dual.All)) })
	})
	if err != nil {
		return nil, err
	}
	chosen := made.Describe()
	return &Result{Matrix: m, Diffusion: &chosen}, nil
}

// fill sets every pair of a symmetric matrix.
func (m *Matrix) fill(ctx context.Context, opt Options, distance func(i, j int) float64) error {
	return tiles(ctx, opt.threads(), len(m.Names), opt.stage("estimate"), func(i0, i1, j0, j1 int) {
		for i := i0; i < i1; i++ {
			for j := max(j0, i+1); j < j1; j++ {
				m.Value[m.Index(i, j)] = distance(i, j)
			}
		}
	})
}

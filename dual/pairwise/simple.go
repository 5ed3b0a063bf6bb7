package pairwise

import (
	"context"
	"fmt"
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
// a distance without unit (Gretton et al. 2012). With Options.Unbiased it is the
// unbiased MMD² itself, each count being one point: 0 in the mean, and often
// below, where two samples come from one source. See dual.Features.
//
// Errors: ErrMethod for amounts; with Unbiased samples of other than counts, or
// of fewer than two; otherwise as Multiscale. Cost: as Multiscale without
// calibration; with Unbiased that of one more sample for each node with mass.
func Kernel(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	if !opt.Shares {
		return nil, ErrMethod
	}
	if err := fitting(net, samples); err != nil {
		return nil, err
	}
	if opt.Unbiased {
		if err := countsOnly(samples); err != nil {
			return nil, err
		}
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
		features, err = made.Features(ctx, samples, opt.Unbiased, opt.Threads, opt.stage("embed"))
		return err
	})
	if err != nil {
		return nil, err
	}
	m := newMatrix(samples.Names(), false, false)
	err = opt.Phases.Time("estimate", func() error {
		return m.fill(ctx, opt, func(i, j int) float64 {
			if opt.Unbiased {
				return features.Unbiased(i, j, dual.All)
			}
			return math.Sqrt(features.Biased(i, j, dual.All))
		})
	})
	if err != nil {
		return nil, err
	}
	chosen := made.Describe()
	return &Result{Matrix: m, Diffusion: &chosen}, nil
}

// countsOnly refuses samples that are not at least two points.
func countsOnly(samples *graphio.Samples) error {
	var faults graphio.FaultList
	for i := range samples.Len() {
		s := samples.At(i)
		if !s.Counts() || s.Total() < 2 {
			faults.Add(graphio.Fault{
				Found: fmt.Sprintf("sample %q, of a total of %v, is no sample of two counts or more", s.Name, s.Total()),
				Want:  "whole numbers of counted points for --unbiased",
			})
		}
	}
	return faults.Err()
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

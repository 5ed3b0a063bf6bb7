package pairwise

import (
	"context"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Multiscale estimates every pair from one vector a sample: scales of diffusion
// and flows, see dual.Terms, whose L1 distance is the estimate, but for a term of
// witnesses where no vectors are asked for (Options.KeepVectors). With Options.Calibrate their weights are fitted to
// random pairs solved exactly, distances have the unit of the lengths, and
// Calibration says how wrong they are; with Options.Stored all that is taken
// from an earlier run. Without either, only the scales are used, by theory: the
// numbers rank pairs but are no lengths. In any case they obey the triangle
// inequality, and they are symmetric also on one-way networks, whose directions
// only the exact pairs honour.
//
// Where the vectors of all samples do not fit Options.Memory they are kept on
// disk, with the same results; see Options.Hold.
//
// Errors: as Exact; a stored calibration for another network or another way of
// comparing. Cost: O(nodes + edges) a sample for the vectors, O(width) a pair,
// and the pairs solved exactly.
func Multiscale(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	r := &Result{}
	var terms *dual.Terms
	if count := opt.pairs(compared.Len(), net); count > 0 && opt.Stored == nil {
		err := opt.Phases.Time("calibrate", func() (err error) {
			if err := opt.afford(solverPart(net, opt.threads()), termPart(net, opt.threads())); err != nil {
				return err
			}
			r.Calibration, terms, err = calibrate(ctx, net, compared, count, opt)
			return err
		})
		if err != nil {
			return nil, err
		}
		r.Model, r.Diffusion = r.Calibration.model, terms.Describe()
	}
	estimator := func() (embedder, error) {
		switch {
		case r.Calibration != nil:
			return terms.Weigh(r.Calibration.Weights)
		case opt.Stored != nil:
			return r.stored(net, opt)
		}
		return r.theory(net)
	}
	err = r.estimate(ctx, net, compared, estimator, opt, func() error { return r.addWitnesses(ctx, compared, opt) })
	if err != nil {
		return nil, err
	}
	r.Calibration.judge(r.Matrix)
	return r, nil
}

// stored makes vectors by a calibration of an earlier run.
func (r *Result) stored(net *graphio.Network, opt Options) (*dual.Estimator, error) {
	if err := opt.Stored.fits(net, opt); err != nil {
		return nil, err
	}
	terms, err := opt.Stored.terms(net)
	if err != nil {
		return nil, err
	}
	r.Model, r.Diffusion = opt.Stored, terms.Describe()
	return terms.Weigh(opt.Stored.Weights)
}

// theory makes vectors of the scales alone, all weighted alike.
func (r *Result) theory(net *graphio.Network) (*dual.Estimator, error) {
	terms, err := dual.NewTerms(net, dual.TermOptions{})
	if err != nil {
		return nil, err
	}
	weights := make([]float64, len(terms.Names()))
	for k := range weights {
		weights[k] = 1
	}
	r.Diffusion = terms.Describe()
	return terms.Weigh(weights)
}

// estimate embeds the samples and sets every pair; after adds to them.
func (r *Result) estimate(ctx context.Context, net *graphio.Network, compared *graphio.Samples, estimator func() (embedder, error), opt Options, after func() error) error {
	n := compared.Len()
	var v *Vectors
	err := opt.Phases.Time("embed", func() error {
		e, err := estimator()
		if err != nil {
			return err
		}
		parts := []MemoryPart{matrixPart(n, false, false), termPart(net, opt.threads())}
		if err := opt.afford(parts...); err != nil {
			return err
		}
		v, err = embedAll(ctx, e, compared, opt.room(parts...), opt)
		return err
	})
	if err != nil {
		return err
	}
	r.Matrix = newMatrix(compared.Names(), false, false)
	r.Width, r.OnDisk = v.Width, v.OnDisk
	err = opt.Phases.Time("estimate", func() error {
		if err := r.Matrix.compare(ctx, v, opt); err != nil {
			return err
		}
		return after()
	})
	if err == nil && opt.KeepVectors {
		r.Vectors = v
		return nil
	}
	if closed := v.Close(); err == nil {
		err = closed
	}
	return err
}

func (r *Result) addWitnesses(ctx context.Context, compared *graphio.Samples, opt Options) error {
	if r.Model == nil || len(r.Model.Witnesses) == 0 {
		return nil
	}
	witness := r.Model.Witnesses
	all, err := heights(ctx, witness, compared.Len(), compared.At, opt.threads())
	if err != nil {
		return err
	}
	return r.Matrix.addWitnesses(ctx, all, len(witness), r.Model.WitnessWeight, opt)
}

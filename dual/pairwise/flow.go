package pairwise

import (
	"context"
	"math"
	"slices"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Flow bounds the distance of every pair from above: each sample is sent to rest
// by the current of a network of resistors, and the difference of two flows
// moves the one sample onto the other. The conductances are fitted to some
// random pairs, without solving any (dual.Reweight). Value is what that costs,
// and Upper, on networks without one-way edges, the same with all rounding
// counted. Nothing bounds the distance from below.
//
// Errors: as Exact. Cost: O(nodes + edges) a sample, O(edges) a pair.
func Flow(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	return bounded(ctx, net, compared, opt, func() (*dual.Flow, error) {
		c, err := dual.Reweight(ctx, net, somePairs(compared, opt), opt.Unmatched, rounds(net), opt.Threads)
		if err != nil {
			return nil, err
		}
		return dual.NewFlow(net, dual.FlowOptions{Conductance: c, Unmatched: opt.Unmatched})
	})
}

// somePairs are up to 100 random pairs of samples.
func somePairs(compared *graphio.Samples, opt Options) []dual.Pair {
	n := compared.Len()
	var list []dual.Pair
	for _, at := range randomPairs(n, false, min(100, pairCount(n, false)), opt.Seed) {
		list = append(list, dual.Pair{P: compared.At(at.i), Q: compared.At(at.j)})
	}
	return list
}

// bounded makes a matrix of upper bounds by a flow.
func bounded(ctx context.Context, net *graphio.Network, compared *graphio.Samples, opt Options, flow func() (*dual.Flow, error)) (*Result, error) {
	r := &Result{}
	e := &slackening{}
	err := r.estimate(ctx, net, compared, func() (embedder, error) {
		var err error
		e.flow, err = flow()
		return e, err
	}, opt, func() error { return nil })
	if err != nil {
		return nil, err
	}
	if net.Directed() {
		return r, nil
	}
	m := r.Matrix
	m.Lower, m.Upper = make([]float64, len(m.Value)), make([]float64, len(m.Value))
	for i := range m.Names {
		for j := range i {
			at := m.Index(i, j)
			m.Lower[at] = math.NaN()
			if same(compared.At(i), compared.At(j)) {
				continue // an upper bound of 0
			}
			m.Upper[at] = dual.UpperOf(m.Value[at], e.slack[i], e.slack[j], r.Width)
		}
	}
	return r, nil
}

func same(a, b graphio.Sample) bool {
	return slices.Equal(a.Nodes, b.Nodes) && slices.Equal(a.Values, b.Values)
}

// slackening makes the vectors of a flow and keeps the slack of the samples.
type slackening struct {
	flow  *dual.Flow
	slack []float64
}

func (e *slackening) Width() int { return e.flow.Width() }

func (e *slackening) EmbedRows(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) error {
	slack, err := e.flow.EmbedRows(ctx, samples, row, threads, progress)
	e.slack = append(e.slack, slack...)
	return err
}

// Hierarchy estimates every pair by the masses in the aggregates of the
// coarsening hierarchy, level by level (dual.Levels), and on a spanning tree that
// follows it (dual.HierarchyTree): the cheapest method that knows lengths, with
// weights for the levels fitted to random pairs solved exactly
// (Options.Calibrate). Without calibration, and on networks that are trees or
// forests themselves, Value is the distance along the tree: exact there up to
// rounding, and an upper bound elsewhere.
//
// Errors: as Exact. Cost: O(nodes) a sample and a pair.
func Hierarchy(ctx context.Context, net *graphio.Network, samples *graphio.Samples, opt Options) (*Result, error) {
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, err
	}
	tree, level, levels, err := dual.HierarchyTree(net)
	if err != nil {
		return nil, err
	}
	count := opt.pairs(compared.Len(), net)
	if count == 0 || tree.Size() == net.Size() && !net.Directed() {
		return bounded(ctx, net, compared, opt, func() (*dual.Flow, error) {
			return dual.NewFlow(tree, dual.FlowOptions{Unmatched: opt.Unmatched})
		})
	}
	for len(level) < tree.Size()+net.Order() && opt.Unmatched > 0 {
		level = append(level, math.Inf(1)) // the edges to where mass comes from
	}
	r := &Result{}
	var terms *dual.Terms
	err = opt.Phases.Time("calibrate", func() (err error) {
		if err := opt.afford(solverPart(net, opt.threads()), termPart(net, opt.threads())); err != nil {
			return err
		}
		terms, err = dual.NewTerms(tree, dual.TermOptions{NoScales: true, Levels: levels, Flows: [][]float64{nil}, Use: level, Groups: 8, Unmatched: opt.Unmatched})
		if err != nil {
			return err
		}
		r.Calibration, _, err = solved(ctx, net, compared, count, opt)
		if err != nil {
			return err
		}
		fitted, distance := r.Calibration.fitted(compared)
		rows, err := terms.Of(ctx, fitted, opt.Threads)
		r.Calibration.Weights = weigh(rows, distance, len(terms.Names()))
		return err
	})
	if err != nil {
		return nil, err
	}
	err = r.estimate(ctx, net, compared, func() (embedder, error) { return terms.Weigh(r.Calibration.Weights) }, opt, func() error { return nil })
	if err != nil {
		return nil, err
	}
	r.Calibration.judge(r.Matrix)
	return r, nil
}

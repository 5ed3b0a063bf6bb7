package pairwise

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"example.org/barrow/dual"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// A Neighbour is a sample of a ranking, with its distance to the query.
type Neighbour struct {
	Sample                 int
	Distance, Lower, Upper float64
}

// Rank finds the count samples nearest to sample query, nearest first, with
// proof that no other is nearer: bounds of Certified leave most samples aside,
// and the rest are solved exactly, the most promising first.
//
// Errors: as Certified. Cost: an embedding by flows, landmarkCount sweeps, and
// the solves, of which there are count at least; memory of the vectors, 4 bytes
// an edge and sample.
func Rank(ctx context.Context, net *graphio.Network, samples *graphio.Samples, query, count int, opt Options) ([]Neighbour, *Certificate, error) {
	if net.Directed() {
		return nil, nil, fmt.Errorf("%w: bounds on one-way networks; want exact, which honours directions", ErrMethod)
	}
	compared, err := transported(net, samples, opt)
	if err != nil {
		return nil, nil, err
	}
	r := &ranking{ctx: ctx, net: net, compared: compared, query: query, count: min(count, samples.Len()-1), opt: opt}
	if err := opt.Phases.Time("bound", r.begin); err != nil {
		return nil, nil, err
	}
	if err := opt.Phases.Time("exact", r.refine); err != nil {
		return nil, nil, err
	}
	return r.nearest(), &Certificate{Pairs: samples.Len() - 1, Solved: r.solves, Settled: true}, nil
}

// A ranking is what is known of the distances from the query.
type ranking struct {
	ctx          context.Context
	net          *graphio.Network
	compared     *graphio.Samples
	query, count int
	opt          Options

	lower, upper, distance []float64
	solved                 []bool
	solves                 int
}

// raise takes heights on a potential as lower bounds.
func (r *ranking) raise(height []float64, slack float64) {
	for j, h := range height {
		r.lower[j] = max(r.lower[j], min(math.Abs(h-height[r.query])-slack, r.upper[j]))
	}
}

func (r *ranking) begin() error {
	n := r.compared.Len()
	r.lower, r.upper, r.distance, r.solved = make([]float64, n), make([]float64, n), make([]float64, n), make([]bool, n)
	for j := range r.upper {
		r.upper[j] = math.Inf(1)
	}
	r.solved[r.query] = true
	flow, err := dual.NewFlow(r.net, dual.FlowOptions{Unmatched: r.opt.Unmatched})
	if err != nil {
		return err
	}
	if err := r.opt.afford(vectorPart(r.net, n, flow.Width(), r.opt.threads())); err != nil {
		return err
	}
	e, err := flow.Embed(r.ctx, r.compared, r.opt.Threads, r.opt.stage("embed"))
	if err != nil {
		return err
	}
	for j := range n {
		if j != r.query {
			r.upper[j] = e.Upper(r.query, j)
		}
	}
	for _, k := range r.opt.Known {
		j := k.I + k.J - r.query
		if k.I != r.query && k.J != r.query {
			continue
		}
		r.lower[j], r.upper[j] = max(r.lower[j], k.Lower), min(r.upper[j], k.Upper)
		if k.tight() {
			r.solved[j], r.distance[j] = true, k.Upper
		}
	}
	return eachLandmark(r.ctx, r.net, landmarkCount, r.opt.Unmatched, func(potential []float64) {
		r.raise(heightsOn(potential, r.compared))
	})
}

// rivals are the unsolved samples that may be among the nearest, by their lower
// bounds.
func (r *ranking) rivals() []int {
	var uppers []float64
	for j, u := range r.upper {
		if j != r.query {
			uppers = append(uppers, u)
		}
	}
	slices.Sort(uppers)
	limit := uppers[r.count-1]
	var list []int
	for j, l := range r.lower {
		if !r.solved[j] && l <= limit {
			list = append(list, j)
		}
	}
	slices.SortStableFunc(list, func(a, b int) int { return cmp.Compare(r.lower[a], r.lower[b]) })
	return list
}

// refine solves rivals until there are none.
func (r *ranking) refine() error {
	report := r.opt.stage("exact")
	for {
		open := r.rivals()
		if len(open) == 0 {
			return nil
		}
		report(r.solves, r.solves+len(open))
		batch := open[:min(len(open), 8)]
		results := make([]*exact.Result, len(batch))
		err := work(r.ctx, r.opt.threads(), len(batch), func(int, int) {}, func() func(int) error {
			solver, err := exact.NewSolver(r.net, exact.Options{Unmatched: r.opt.Unmatched})
			return func(k int) error {
				if err != nil {
					return err
				}
				solver.Reset()
				results[k], err = solvePair(r.ctx, solver, r.compared, pair{min(r.query, batch[k]), max(r.query, batch[k])})
				return err
			}
		})
		if err != nil {
			return err
		}
		for k, j := range batch {
			r.solved[j] = true
			r.solves++
			r.lower[j] = min(results[k].Lower*(1-outward), results[k].Upper)
			r.upper[j] = results[k].Upper * (1 + outward)
			r.distance[j] = results[k].Distance()
		}
		r.raise(heightsOn(results[0].Potential, r.compared))
	}
}

// nearest is the ranking; ties stand in the order of the samples.
func (r *ranking) nearest() []Neighbour {
	var list []Neighbour
	for j := range r.solved {
		if r.solved[j] && j != r.query {
			list = append(list, Neighbour{j, r.distance[j], r.lower[j], r.upper[j]})
		}
	}
	slices.SortStableFunc(list, func(a, b Neighbour) int { return cmp.Compare(a.Distance, b.Distance) })
	return list[:r.count]
}

package dual

import (
	"context"
	"math"
	"slices"

	"example.org/barrow/graphio"
)

// A Pair is two samples to be compared.
type Pair struct{ P, Q graphio.Sample }

// difference is p - q as one signed sample; nodes where they agree are left
// out.
func (at Pair) difference() graphio.Sample {
	d := graphio.Sample{Name: "difference"}
	merge(at.P, at.Q, func(v int32, x, y float64) {
		if x != y {
			d.Nodes, d.Values = append(d.Nodes, v), append(d.Values, x-y)
		}
	})
	return d
}

// Reweight finds conductances under which the current comes nearer to the
// cheapest flow for pairs like the given ones, together: starting from
// 1/length, each round sets
//
//	conductance_e = (rms of the pairs' flow along e + a thousandth of the mean) / length_e.
//
// For a single pair that is iteratively reweighted least squares for Σ length
// |flow|, whose fixed point is the cheapest flow (Lawson 1961; Daubechies et
// al. 2010); for many it is a compromise, but still one linear flow. Pairs are
// made to count alike, whatever their distance. Only proportions matter: the
// largest conductance times length is 1.
//
// Errors: the context's. Cost: rounds times that of making a Flow and routing
// the pairs.
func Reweight(ctx context.Context, net *graphio.Network, pairs []Pair, unmatched float64, rounds, threads int) ([]float64, error) {
	f, err := NewFlow(net, FlowOptions{Unmatched: unmatched})
	if err != nil {
		return nil, err
	}
	conductance := make([]float64, f.Width())
	for e := range conductance {
		conductance[e] = 1 / f.length(e)
	}
	differences := make([]graphio.Sample, len(pairs))
	for i, at := range pairs {
		differences[i] = at.difference()
	}
	rows := make([][]float32, len(pairs))
	for i := range rows {
		rows[i] = make([]float32, f.Width())
	}
	at := func(i int) graphio.Sample { return differences[i] }
	row := func(i int) []float32 { return rows[i] }
	for range rounds {
		err := f.route(ctx, len(pairs), at, row, threads, nil, func(int, float64) {})
		if err != nil {
			return nil, err
		}
		if !f.reweigh(conductance, rows) {
			break
		}
		if f, err = NewFlow(net, FlowOptions{Conductance: slices.Clone(conductance), Unmatched: unmatched}); err != nil {
			return nil, err
		}
	}
	return conductance, nil
}

// reweigh sets conductances by the costs of pairs; false where nothing moves.
func (f *Flow) reweigh(conductance []float64, rows [][]float32) bool {
	square := make([]float64, len(conductance))
	for _, row := range rows {
		all := 0.0
		for _, c := range row {
			all += math.Abs(float64(c))
		}
		if all == 0 {
			continue
		}
		for e, c := range row {
			x := float64(c) / f.length(e) / all
			square[e] += float64(x * x)
		}
	}
	mean, most := 0.0, 0.0
	for e, x := range square {
		square[e] = math.Sqrt(x)
		mean += square[e] / float64(len(square))
		most = max(most, square[e])
	}
	if most == 0 {
		return false
	}
	for e, x := range square {
		conductance[e] = (x + mean/1000) / (most + mean/1000) / f.length(e)
	}
	return true
}

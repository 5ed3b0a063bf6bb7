package main

import (
	"fmt"
	"io"
	"math/rand/v2"
	"slices"

	"example.org/barrow/dual/inference"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// means are two groups whose mean samples are compared.
type means struct {
	members [2][]graphio.Sample // as compared: shares or amounts
	names   []string
}

// groupMeans finds the groups named and their means.
func groupMeans(set *settings, d *data, names []string) (p, q graphio.Sample, m *means, err error) {
	v, err := inference.Column(d.groups, set.by, d.samples.Names())
	if err != nil {
		return p, q, nil, err
	}
	if names[0] == names[1] {
		return p, q, nil, usageError{fmt.Sprintf("group %q twice; want two groups", names[0])}
	}
	compared := d.samples
	if set.mass == "share" {
		if compared, err = compared.Shares(); err != nil {
			return p, q, nil, err
		}
	}
	if set.unmatched == 0 {
		if err := graphio.CheckConnected(d.net, d.samples); err != nil {
			return p, q, nil, err
		}
	}
	m = &means{names: names}
	for k, name := range names {
		for i, label := range v.Labels {
			if label == name {
				m.members[k] = append(m.members[k], compared.At(i))
			}
		}
		if len(m.members[k]) == 0 {
			return p, q, nil, usageError{fmt.Sprintf("no sample has %s %q%s", set.by, name, didYouMean(name, slices.Compact(slices.Sorted(slices.Values(v.Labels)))))}
		}
	}
	n := d.net.Order()
	return graphio.Mean(names[0], n, m.members[0], nil), graphio.Mean(names[1], n, m.members[1], nil), m, nil
}

// A redrawn comparison is what resampling makes of a comparison of means: the 95 % interval
// of the distance, and of the cost between districts.
type redrawn struct {
	draws       int
	low, high   float64
	costs       [][]float64 // by transfer of the explanation, sorted
	small       bool        // a group has fewer than five samples
	memberCount [2]int
}

// resample compares means of as many samples drawn again from each group
// (Efron 1979), with the districts of the explanation.
func (s *session) resample(set *settings, d *data, m *means, e *explanation) (*redrawn, error) {
	r := &redrawn{draws: set.draws, costs: make([][]float64, len(e.transfers)), memberCount: [2]int{len(m.members[0]), len(m.members[1])}}
	r.small = min(r.memberCount[0], r.memberCount[1]) < 5
	solver, err := exact.NewSolver(d.net, exact.Options{Unmatched: set.unmatched})
	if err != nil {
		return nil, err
	}
	var distances []float64
	for draw := range set.draws {
		var mean [2]graphio.Sample
		for k, members := range m.members {
			random := rand.New(rand.NewPCG(set.seed^uint64(k+1), uint64(draw)))
			weights := make([]float64, len(members))
			for range members {
				weights[random.IntN(len(members))]++
			}
			mean[k] = graphio.Mean(m.names[k], d.net.Order(), members, weights)
		}
		result, err := solver.Solve(s.ctx, mean[0], mean[1])
		if err != nil {
			return nil, err
		}
		distances = append(distances, result.Distance())
		at := map[[2]string]float64{}
		for _, t := range exact.Between(result.Movements(), e.districts, outsideName) {
			at[[2]string{t.From, t.To}] = t.Cost
		}
		for k, t := range e.transfers {
			r.costs[k] = append(r.costs[k], at[[2]string{t.From, t.To}])
		}
		s.progress.report("resample", draw+1, set.draws)
	}
	slices.Sort(distances)
	r.low, r.high = interval(distances)
	for _, list := range r.costs {
		slices.Sort(list)
	}
	return r, nil
}

// interval is from the 2.5th to the 97.5th percentile of sorted values.
func interval(sorted []float64) (low, high float64) {
	n := len(sorted)
	k := n * 25 / 1000
	return sorted[k], sorted[n-1-k]
}

func (r *redrawn) summary(w io.Writer) {
	fmt.Fprintf(w, "interval  %s to %s in 95 of 100 of %s of the %d and %d samples\n", human(r.low), human(r.high), several(r.draws, "redrawing"), r.memberCount[0], r.memberCount[1])
	if r.small {
		fmt.Fprintln(w, "caution   groups of fewer than five samples say little of their spread")
	}
}

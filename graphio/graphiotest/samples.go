package graphiotest

import (
	"math"
	"slices"
	"sort"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// Smooth is a sample with some mass at every node that five random centres can
// reach: Σ a·exp(−d/s) over the centres, d the distance from the centre without
// directions, s a tenth of the farthest, a in [0.5, 1.5).
// Cost: five shortest-path sweeps.
func Smooth(net *graphio.Network, seed uint64) graphio.Sample {
	rng := source(seed, smoothStream)
	values := make([]float64, net.Order())
	for range 5 {
		dist := shortest.From(net, rng.IntN(net.Order()), shortest.Either)
		scale, height := farthest(dist)/10, 0.5+rng.Float64()
		for v, d := range dist {
			if scale > 0 {
				values[v] += float64(height * math.Exp(-d/scale))
			} else if d == 0 {
				values[v] += height
			}
		}
	}
	return dense("smooth", values)
}

func farthest(dist []float64) float64 {
	far := 0.0
	for _, d := range dist {
		if d > far && !math.IsInf(d, 1) {
			far = d
		}
	}
	return far
}

// Sparse is a sample with masses drawn evenly from (0, 1] at the given number
// of different nodes, or at all if there are fewer. Cost: O(nodes).
func Sparse(net *graphio.Network, entries int, seed uint64) graphio.Sample {
	rng := source(seed, sparseStream)
	values := make([]float64, net.Order())
	for _, v := range rng.Perm(net.Order())[:min(entries, net.Order())] {
		values[v] = 1 - rng.Float64()
	}
	return dense("sparse", values)
}

// Counts draws total independent counts from the shares of a sample: what
// chance alone makes of it. Cost: O(entries + total log entries).
func Counts(from graphio.Sample, total int, seed uint64) graphio.Sample {
	rng := source(seed, countStream)
	sums := make([]float64, len(from.Values)) // running sums of the mass
	sum := 0.0
	for i, x := range from.Values {
		sum += x
		sums[i] = sum
	}
	counts := graphio.Sample{Name: from.Name + "-counts"}
	hits := make([]int, len(sums))
	for range total {
		u := rng.Float64() * sum
		hits[min(sort.SearchFloat64s(sums, math.Nextafter(u, math.Inf(1))), len(sums)-1)]++
	}
	for i, h := range hits {
		if h > 0 {
			counts.Nodes = append(counts.Nodes, from.Nodes[i])
			counts.Values = append(counts.Values, float64(h))
		}
	}
	return counts
}

// Point is a sample with one unit of mass at node v.
func Point(v int) graphio.Sample {
	return graphio.Sample{Name: "point", Nodes: []int32{int32(v)}, Values: []float64{1}}
}

// Samples holds the given samples over the network, renamed s0, s1, ….
func Samples(net *graphio.Network, list ...graphio.Sample) *graphio.Samples {
	list = slices.Clone(list)
	for i, name := range numbered(len(list)) {
		list[i].Name = "s" + name[1:]
	}
	all, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		panic(err)
	}
	return all
}

package main

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// makeNetwork makes a network of a family with about n nodes.
func makeNetwork(family string, n int, seed uint64) (*graphio.Network, error) {
	side := int(math.Round(math.Sqrt(float64(n))))
	switch family {
	case "road":
		return graphiotest.Road(n, seed), nil
	case "grid":
		return graphiotest.Grid(side, side, seed), nil
	case "unit-grid": // all lengths equal: ties everywhere
		return unitGrid(side, side), nil
	case "knn":
		return graphiotest.KNN(n, 2, 8, seed), nil
	case "scale-free":
		return graphiotest.ScaleFree(n, 3, seed), nil
	}
	return nil, fmt.Errorf("family %q; want road, grid, unit-grid, knn or scale-free", family)
}

func unitGrid(rows, columns int) *graphio.Network {
	base := graphiotest.Grid(rows, columns, 0)
	names := make([]string, base.Order())
	for v := range names {
		names[v] = base.Name(v)
	}
	edges := append([]graphio.Edge(nil), base.EdgeList()...)
	for i := range edges {
		edges[i].Length, edges[i].Weight = 1, 1
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(err) // cannot be: the grid was one
	}
	return net
}

// makeSamples makes two samples of a kind.
func makeSamples(kind string, net *graphio.Network, seed uint64) (p, q graphio.Sample, err error) {
	n := net.Order()
	switch kind {
	case "smooth": // some mass at every node
		return graphiotest.Smooth(net, seed), graphiotest.Smooth(net, seed+1), nil
	case "sparse": // some mass at one node in a hundred
		return graphiotest.Sparse(net, n/100, seed), graphiotest.Sparse(net, n/100, seed+1), nil
	case "counts": // 10 counts a node, drawn from a smooth sample
		p, q = graphiotest.Smooth(net, seed), graphiotest.Smooth(net, seed+1)
		return graphiotest.Counts(p, 10*n, seed), graphiotest.Counts(q, 10*n, seed+1), nil
	case "noise": // 10 counts a node, both drawn from the same smooth sample
		p = graphiotest.Smooth(net, seed)
		return graphiotest.Counts(p, 10*n, seed), graphiotest.Counts(p, 10*n, seed+1), nil
	case "point": // all mass at one node
		return graphiotest.Point(n / 3), graphiotest.Point(2 * n / 3), nil
	}
	return p, q, fmt.Errorf("samples %q; want smooth, sparse, counts, noise or point", kind)
}

// realInstances takes, from every set in a folder that the table of reference
// distances names, its first pair there. Where one is missing it is left out.
func realInstances(folder, table string) ([]instance, error) {
	file, err := os.Open(table)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		return nil, err
	}
	var list []instance
	last := ""
	for _, row := range rows[1:] {
		set := filepath.Join(folder, row[0])
		if _, err := os.Stat(set); err != nil || row[0] == last {
			continue
		}
		last = row[0]
		in, err := realInstance(set, row[1], row[2], row[3] == "true")
		if err != nil {
			return nil, err
		}
		list = append(list, in)
	}
	return list, nil
}

func realInstance(set, a, b string, directed bool) (instance, error) {
	net, _, err := graphio.ReadNetwork(filepath.Join(set, "edges.csv"), filepath.Join(set, "nodes.csv"), graphio.NetworkOptions{Directed: directed})
	if err != nil {
		return instance{}, err
	}
	samples, _, err := graphio.ReadSamples(filepath.Join(set, "samples.csv"), net, graphio.SampleOptions{})
	if err != nil {
		return instance{}, err
	}
	i, okA := samples.Index(a)
	j, okB := samples.Index(b)
	if !okA || !okB {
		return instance{}, fmt.Errorf("%s: no sample %q or %q", set, a, b)
	}
	return newInstance(filepath.Base(set), a+" → "+b, net, samples.At(i), samples.At(j)), nil
}

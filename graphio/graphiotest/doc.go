// Package graphiotest makes networks and samples for tests and benchmarks: a
// table of small cases that every method should survive, road-like, grid,
// neighbour and scale-free networks of any size, and the integer instances of
// a portable generator, whose distances are known from outside.
//
// The same arguments give the same network on any machine: all chance comes
// from seeded generators (PCG of math/rand/v2, or Park and Miller 1988).
package graphiotest

import (
	"fmt"
	"math/rand/v2"
	"strconv"

	"example.org/barrow/graphio"
)

// The second word of each PCG seed keeps the streams of the makers apart.
const (
	roadStream = iota + 1
	gridStream
	knnStream
	freeStream
	smoothStream
	sparseStream
	countStream
	caseStream
)

func source(seed, stream uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, stream)) }

// network panics on a fault: the makers hand in nothing that could have one.
func network(names []string, edges []graphio.Edge) *graphio.Network {
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(fmt.Sprintf("graphiotest: %v", err))
	}
	return net
}

// numbered names nodes v0, v1, ….
func numbered(n int) []string {
	names := make([]string, n)
	for v := range names {
		names[v] = "v" + strconv.Itoa(v)
	}
	return names
}

// edge is an edge with the affinity readers give it by default, 1/length.
func edge(from, to int, length float64) graphio.Edge {
	return graphio.Edge{From: int32(from), To: int32(to), Length: length, Weight: 1 / length}
}

func oneWay(from, to int, length float64) graphio.Edge {
	e := edge(from, to, length)
	e.OneWay = true
	return e
}

// dense makes a sample of one value a node; zeros are left out.
func dense(name string, values []float64) graphio.Sample {
	s := graphio.Sample{Name: name}
	for v, x := range values {
		if x != 0 {
			s.Nodes = append(s.Nodes, int32(v))
			s.Values = append(s.Values, x)
		}
	}
	return s
}

// forest is a union-find over nodes, with path halving.
type forest []int32

func newForest(n int) forest {
	f := make(forest, n)
	for v := range f {
		f[v] = int32(v)
	}
	return f
}

func (f forest) root(v int32) int32 {
	for f[v] != v {
		f[v] = f[f[v]]
		v = f[v]
	}
	return v
}

// join reports whether the two nodes were apart before.
func (f forest) join(u, v int32) bool {
	u, v = f.root(u), f.root(v)
	if u == v {
		return false
	}
	f[max(u, v)] = min(u, v) // the root is the first node, whatever the order of joins
	return true
}

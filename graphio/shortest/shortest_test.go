package shortest_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
	"gonum.org/v1/gonum/graph/path"
)

func ExampleFrom() {
	net, err := graphio.NewNetwork([]string{"mill", "quay", "gate"}, []graphio.Edge{
		{From: 0, To: 1, Length: 300, Weight: 1},
		{From: 1, To: 2, Length: 120, Weight: 1},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(shortest.From(net, 0, shortest.Forward))
	// Output: [0 300 420]
}

// random makes a network of n nodes and about 2n edges, some of them one-way.
func random(rng *rand.Rand, n int, oneWay bool) *graphio.Network {
	names := make([]string, n)
	for v := range names {
		names[v] = fmt.Sprint(v)
	}
	have := make(map[[2]int32]bool)
	var edges []graphio.Edge
	for range 2 * n {
		u, v := int32(rng.IntN(n)), int32(rng.IntN(n))
		if u == v || have[[2]int32{min(u, v), max(u, v)}] {
			continue
		}
		have[[2]int32{min(u, v), max(u, v)}] = true
		edges = append(edges, graphio.Edge{From: u, To: v, Length: 0.1 + rng.Float64(), Weight: 1, OneWay: oneWay && rng.IntN(2) == 0})
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(err)
	}
	return net
}

// Distances equal those of gonum's Dijkstra, in each direction.
func TestFromAgainstGonum(t *testing.T) {
	for seed := range uint64(60) {
		rng := rand.New(rand.NewPCG(seed, 1))
		net := random(rng, 2+rng.IntN(40), seed%2 == 1)
		for _, v := range []int{0, net.Order() - 1} {
			out := path.DijkstraFrom(net.AsDirected().Node(int64(v)), net.AsDirected())
			either := path.DijkstraFrom(net.Node(int64(v)), net)
			forward, any := shortest.From(net, v, shortest.Forward), shortest.From(net, v, shortest.Either)
			for u := range net.Order() {
				if want := out.WeightTo(int64(u)); !near(forward[u], want) {
					t.Errorf("seed %d: %d to %d is %v, gonum %v", seed, v, u, forward[u], want)
				}
				if want := either.WeightTo(int64(u)); !near(any[u], want) {
					t.Errorf("seed %d: %d to %d without directions is %v, gonum %v", seed, v, u, any[u], want)
				}
				if back := shortest.From(net, u, shortest.Backward)[v]; !near(back, forward[u]) {
					t.Errorf("seed %d: backward %v, forward %v", seed, back, forward[u])
				}
			}
		}
	}
}

func near(a, b float64) bool { return a == b || math.Abs(a-b) <= 1e-12*math.Abs(b) }

// The sweep from all nodes gives the largest 1-Lipschitz function below the
// start values: feasible on every edge, and each value is attained by a path.
func TestSweepRepairsPotential(t *testing.T) {
	for seed := range uint64(60) {
		rng := rand.New(rand.NewPCG(seed, 2))
		net := random(rng, 2+rng.IntN(60), seed%3 == 0)
		before := make([]float64, net.Order())
		for v := range before {
			before[v] = 5 * rng.NormFloat64()
		}
		after := append([]float64(nil), before...)
		via := make([]int32, net.Order())
		shortest.Sweep(net, after, shortest.Forward, via)
		for _, e := range net.EdgeList() {
			if after[e.To] > after[e.From]+e.Length || !e.OneWay && after[e.From] > after[e.To]+e.Length {
				t.Fatalf("seed %d: edge %+v between %v and %v", seed, e, after[e.From], after[e.To])
			}
		}
		for v, i := range via {
			if i < 0 {
				if after[v] != before[v] {
					t.Fatalf("seed %d: node %d changed by no edge", seed, v)
				}
				continue
			}
			e := net.EdgeList()[i]
			if got := min(after[e.From], after[e.To]) + e.Length; got != after[v] || after[v] >= before[v] {
				t.Fatalf("seed %d: node %d reached by %+v", seed, v, e)
			}
		}
	}
}

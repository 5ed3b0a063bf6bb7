package graphiotest

import (
	"math"
	"math/rand/v2"

	"example.org/barrow/graphio"
)

// A Case is a connected network and two samples on it whose totals are the same
// whole number: all masses are whole, so that sums are exact.
type Case struct {
	Name string
	Net  *graphio.Network
	P, Q graphio.Sample
}

// Cases is the table of small undirected networks that every method should be
// tried on.
func Cases() []Case {
	rng := source(1, caseStream)
	uneven := func() float64 { return 0.1 + rng.Float64() }
	same := func() float64 { return 1 }
	apart := func() float64 { return math.Pow(10, float64(rng.IntN(10))-4) } // 1e-4 to 1e5
	nets := []Case{
		{Name: "one edge", Net: path(2, uneven)},
		{Name: "path", Net: path(30, uneven)},
		{Name: "cycle", Net: ring(31, false, uneven)},
		{Name: "tree", Net: tree(rng, 60, uneven)},
		{Name: "grid", Net: grid(8, 9, uneven)},
		{Name: "complete", Net: complete(12, uneven)},
		{Name: "star", Net: star(15, uneven)},
		{Name: "two hubs", Net: twoHubs(10, uneven)},
		{Name: "random sparse", Net: random(rng, 80, 130, uneven)},
		{Name: "equal lengths", Net: grid(7, 7, same)},
		{Name: "equal lengths, complete", Net: complete(9, same)},
		{Name: "lengths nine orders apart", Net: random(rng, 60, 110, apart)},
		{Name: "road", Net: Road(100, 1)},
		{Name: "scale-free", Net: ScaleFree(80, 2, 1)},
	}
	for i := range nets {
		nets[i].P, nets[i].Q = wholePair(rng, nets[i].Net.Order(), 3)
	}
	wide := grid(10, 10, uneven)
	cases := append(nets,
		Case{"grid, mass at few nodes", wide, whole("p", map[int]float64{0: 3, 57: 2}), whole("q", map[int]float64{99: 4, 8: 1})},
		Case{"grid, point to point", wide, whole("p", map[int]float64{0: 1}), whole("q", map[int]float64{99: 1})},
		Case{"grid, samples all but the same", wide, whole("p", map[int]float64{3: 1000000, 4: 1}), whole("q", map[int]float64{3: 1000000, 5: 1})},
	)
	p, _ := wholePair(rng, wide.Order(), 3)
	q := p
	q.Name = "q"
	return append(cases, Case{"grid, samples the same", wide, p, q})
}

// Directed is the same for networks with one-way edges. Every node can reach
// every other.
func Directed() []Case {
	rng := source(2, caseStream)
	uneven := func() float64 { return 0.1 + rng.Float64() }
	same := func() float64 { return 1 }
	apart := func() float64 { return math.Pow(10, float64(rng.IntN(10))-4) }
	cases := []Case{
		{Name: "one-way ring", Net: ring(20, true, uneven)},
		{Name: "two one-way edges that differ", Net: network(numbered(2), []graphio.Edge{oneWay(0, 1, 1), oneWay(1, 0, 5)})},
		{Name: "one-way and two-way streets", Net: mixed(rng, 70, 150, uneven)},
		{Name: "one-way, equal lengths", Net: mixed(rng, 40, 100, same)},
		{Name: "one-way, lengths nine orders apart", Net: mixed(rng, 50, 110, apart)},
		{Name: "grid with a length each way", Net: eachWay(8, 8, uneven)},
	}
	for i := range cases {
		cases[i].P, cases[i].Q = wholePair(rng, cases[i].Net.Order(), 3)
	}
	return cases
}

func path(n int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := 1; v < n; v++ {
		edges = append(edges, edge(v-1, v, length()))
	}
	return network(numbered(n), edges)
}

func ring(n int, directed bool, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := range n {
		e := edge(v, (v+1)%n, length())
		e.OneWay = directed
		edges = append(edges, e)
	}
	return network(numbered(n), edges)
}

func tree(rng *rand.Rand, n int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := 1; v < n; v++ {
		edges = append(edges, edge(rng.IntN(v), v, length()))
	}
	return network(numbered(n), edges)
}

func complete(n int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := range n {
		for u := range v {
			edges = append(edges, edge(u, v, length()))
		}
	}
	return network(numbered(n), edges)
}

func star(leaves int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := 1; v <= leaves; v++ {
		edges = append(edges, edge(0, v, length()))
	}
	return network(numbered(leaves+1), edges)
}

// twoHubs joins every other node to both of two hubs, which are not joined.
func twoHubs(others int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	for v := 2; v < others+2; v++ {
		edges = append(edges, edge(0, v, length()), edge(1, v, length()))
	}
	return network(numbered(others+2), edges)
}

// random is a random tree with further edges between random nodes, m in all.
func random(rng *rand.Rand, n, m int, length func() float64) *graphio.Network {
	edges := append([]graphio.Edge(nil), tree(rng, n, length).EdgeList()...)
	return network(numbered(n), more(rng, n, m, edges, func(u, v int) graphio.Edge { return edge(u, v, length()) }))
}

// mixed is a one-way ring through all nodes, which keeps them in reach of each
// other, with further edges, half of them one-way.
func mixed(rng *rand.Rand, n, m int, length func() float64) *graphio.Network {
	edges := append([]graphio.Edge(nil), ring(n, true, length).EdgeList()...)
	return network(numbered(n), more(rng, n, m, edges, func(u, v int) graphio.Edge {
		e := edge(u, v, length())
		e.OneWay = rng.IntN(2) == 0
		return e
	}))
}

func more(rng *rand.Rand, n, m int, edges []graphio.Edge, add func(u, v int) graphio.Edge) []graphio.Edge {
	have := make(map[[2]int32]bool)
	for _, e := range edges {
		have[[2]int32{min(e.From, e.To), max(e.From, e.To)}] = true
	}
	for len(edges) < m {
		u, v := rng.IntN(n), rng.IntN(n)
		ends := [2]int32{int32(min(u, v)), int32(max(u, v))}
		if u != v && !have[ends] {
			have[ends] = true
			edges = append(edges, add(u, v))
		}
	}
	return edges
}

func eachWay(rows, columns int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	eachGridEdge(rows, columns, func(u, v int) {
		edges = append(edges, oneWay(u, v, length()), oneWay(v, u, length()))
	})
	return network(numbered(rows*columns), edges)
}

// wholePair draws whole masses for about two nodes in three and evens out the
// totals at the first node that helps.
func wholePair(rng *rand.Rand, n int, most int) (p, q graphio.Sample) {
	a, b := make([]float64, n), make([]float64, n)
	gap := 0.0
	for v := range n {
		a[v], b[v] = float64(rng.IntN(most)), float64(rng.IntN(most))
		gap += a[v] - b[v]
	}
	b[n-1] += max(gap, 0) + 1 // so that neither is without mass
	a[0] += max(-gap, 0) + 1
	return dense("p", a), dense("q", b)
}

func whole(name string, mass map[int]float64) graphio.Sample {
	n := 0
	for v := range mass {
		n = max(n, v+1)
	}
	values := make([]float64, n)
	for v, x := range mass {
		values[v] = x
	}
	return dense(name, values)
}

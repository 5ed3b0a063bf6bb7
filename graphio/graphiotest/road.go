package graphiotest

import (
	"math"

	"example.org/barrow/graphio"
)

// The shape of Road: blocks of about 100 m whose corners stray by up to 24 m.
// Below a quarter of the spacing no two streets can cross, diagonals included.
const (
	roadSpacing  = 100
	roadJitter   = 24
	roadEdges    = 1.6 // edges a node; street networks have 1.5 to 1.6 between junctions
	roadDiagonal = 0.1 // share of blocks that have a diagonal street to choose from
)

// Road is a planar, connected, street-like network of n >= 1 nodes: corners of
// a jittered square grid, joined by a random spanning tree of the streets
// between neighbouring corners and as many other streets as make about 1.6
// edges a node, so that dead ends and bends occur. Coordinates are metres. A
// length is the distance between the ends, up to a tenth longer, to a
// centimetre. Cost: O(n).
func Road(n int, seed uint64) *graphio.Network {
	rng := source(seed, roadStream)
	width := max(1, int(math.Ceil(math.Sqrt(float64(n)))))
	x, y := make([]float64, n), make([]float64, n)
	for v := range n {
		x[v] = roadSpacing*float64(v%width) + roadJitter*(2*rng.Float64()-1)
		y[v] = roadSpacing*float64(v/width) + roadJitter*(2*rng.Float64()-1)
	}
	var streets [][2]int32
	street := func(u, v int) {
		if u < n && v < n {
			streets = append(streets, [2]int32{int32(u), int32(v)})
		}
	}
	for v := range n {
		last := v%width == width-1
		if !last {
			street(v, v+1)
		}
		street(v, v+width)
		if !last && rng.Float64() < roadDiagonal {
			if rng.IntN(2) == 0 {
				street(v, v+width+1)
			} else {
				street(v+1, v+width)
			}
		}
	}
	chosen := connectedChoice(n, streets, int(roadEdges*float64(n)), rng.Shuffle)
	edges := make([]graphio.Edge, 0, len(streets))
	for i, s := range streets {
		if chosen[i] {
			stretch := 1 + 0.1*rng.Float64()
			length := stretch * math.Hypot(x[s[0]]-x[s[1]], y[s[0]]-y[s[1]])
			edges = append(edges, edge(int(s[0]), int(s[1]), math.Round(length*100)/100))
		}
	}
	net := network(numbered(n), edges)
	if err := net.SetPlaces(x, y, false); err != nil {
		panic(err)
	}
	return net
}

// connectedChoice marks about want of the streets, in shuffled order, first
// those that keep all n nodes together.
func connectedChoice(n int, streets [][2]int32, want int, shuffle func(int, func(i, j int))) []bool {
	order := make([]int32, len(streets))
	for i := range order {
		order[i] = int32(i)
	}
	shuffle(len(order), func(i, j int) { order[i], order[j] = order[j], order[i] })
	chosen := make([]bool, len(streets))
	trees := newForest(n)
	for _, i := range order {
		if trees.join(streets[i][0], streets[i][1]) {
			chosen[i] = true
			want--
		}
	}
	for _, i := range order {
		if want <= 0 {
			break
		}
		if !chosen[i] {
			chosen[i] = true
			want--
		}
	}
	return chosen
}

// Grid is a rectangular grid, node r·columns+c, each joined to its neighbours
// to the right and below by lengths drawn evenly from [1, 2). Coordinates are
// column and row. Cost: O(nodes).
func Grid(rows, columns int, seed uint64) *graphio.Network {
	rng := source(seed, gridStream)
	net := grid(rows, columns, func() float64 { return 1 + rng.Float64() })
	x, y := make([]float64, net.Order()), make([]float64, net.Order())
	for v := range x {
		x[v], y[v] = float64(v%columns), float64(v/columns)
	}
	if err := net.SetPlaces(x, y, false); err != nil {
		panic(err)
	}
	return net
}

// grid takes the length of each edge in node order, right edge before down
// edge.
func grid(rows, columns int, length func() float64) *graphio.Network {
	var edges []graphio.Edge
	eachGridEdge(rows, columns, func(u, v int) { edges = append(edges, edge(u, v, length())) })
	return network(numbered(rows*columns), edges)
}

func eachGridEdge(rows, columns int, do func(u, v int)) {
	for r := range rows {
		for c := range columns {
			v := r*columns + c
			if c+1 < columns {
				do(v, v+1)
			}
			if r+1 < rows {
				do(v, v+columns)
			}
		}
	}
}

// ScaleFree is a connected network with few hubs and many nodes of degree m:
// each new node joins m >= 1 of those before it, chosen in proportion to their
// degree (Barabási and Albert 1999). Lengths are drawn evenly from [1, 2).
// n > m. Cost: O(n m).
func ScaleFree(n, m int, seed uint64) *graphio.Network {
	rng := source(seed, freeStream)
	var edges []graphio.Edge
	ends := make([]int32, 0, 2*n*m) // each node as often as it has edges
	join := func(u, v int) {
		edges = append(edges, edge(u, v, 1+rng.Float64()))
		ends = append(ends, int32(u), int32(v))
	}
	for v := 1; v <= m && v < n; v++ { // a star to begin with
		join(0, v)
	}
	chosen := make([]int32, 0, m)
	for v := m + 1; v < n; v++ {
		chosen = chosen[:0]
		for len(chosen) < m {
			u := ends[rng.IntN(len(ends))]
			if !contains(chosen, u) {
				chosen = append(chosen, u)
			}
		}
		for _, u := range chosen {
			join(int(u), v)
		}
	}
	return network(numbered(n), edges)
}

func contains(list []int32, v int32) bool {
	for _, u := range list {
		if u == v {
			return true
		}
	}
	return false
}

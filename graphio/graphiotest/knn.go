package graphiotest

import (
	"math"
	"sort"

	"example.org/barrow/graphio"
	"gonum.org/v1/gonum/spatial/kdtree"
)

// KNN is the neighbour network of n points drawn evenly from the unit cube of
// the given dimension: each is joined to its k nearest, and each is an edge for
// both (the union). Lengths are Euclidean distances. Where that leaves parts,
// the first node of each is joined to the first node of the part before. In
// two dimensions coordinates are set. Cost: O(n k) in two dimensions, about
// O(n k log n) in few others, up to O(n²) in many.
func KNN(n, dimension, k int, seed uint64) *graphio.Network {
	rng := source(seed, knnStream)
	points := make([]float64, n*dimension)
	for i := range points {
		points[i] = rng.Float64()
	}
	k = min(k, n-1)
	nearest := nearestInTree
	if dimension == 2 {
		nearest = nearestInCells
	}
	pairs := make([][2]int32, 0, n*k)
	for v, list := range nearest(points, dimension, k) {
		for _, u := range list {
			pairs = append(pairs, [2]int32{min(u, int32(v)), max(u, int32(v))})
		}
	}
	sort.Slice(pairs, func(i, j int) bool {
		return pairs[i][0] < pairs[j][0] || pairs[i][0] == pairs[j][0] && pairs[i][1] < pairs[j][1]
	})
	parts := newForest(n)
	var edges []graphio.Edge
	add := func(u, v int32) {
		edges = append(edges, edge(int(u), int(v), math.Sqrt(squared(points, dimension, u, v))))
		parts.join(u, v)
	}
	for i, p := range pairs {
		if i == 0 || p != pairs[i-1] {
			add(p[0], p[1])
		}
	}
	before := int32(0)
	for v := int32(1); v < int32(n); v++ {
		if parts.root(v) == v {
			add(before, v)
			before = v
		}
	}
	net := network(numbered(n), edges)
	if dimension == 2 {
		x, y := make([]float64, n), make([]float64, n)
		for v := range n {
			x[v], y[v] = points[2*v], points[2*v+1]
		}
		if err := net.SetPlaces(x, y, false); err != nil {
			panic(err)
		}
	}
	return net
}

// squared is the squared distance, added up without fused steps so that it is
// the same on every processor.
func squared(points []float64, dimension int, u, v int32) float64 {
	sum := 0.0
	for d := range dimension {
		gap := points[int(u)*dimension+d] - points[int(v)*dimension+d]
		sum += float64(gap * gap)
	}
	return sum
}

type neighbour struct {
	node int32
	gap  float64
}

// nearestInCells searches square cells of about two points each, ring by ring
// until no nearer point can lie further out.
func nearestInCells(points []float64, _, k int) [][]int32 {
	n := len(points) / 2
	side := max(1, int(math.Sqrt(float64(n)/2)))
	cell := func(c float64) int { return min(side-1, int(c*float64(side))) }
	start := make([]int32, side*side+1)
	for v := range n {
		start[cell(points[2*v+1])*side+cell(points[2*v])+1]++
	}
	for c := range side * side {
		start[c+1] += start[c]
	}
	member := make([]int32, n)
	next := append([]int32(nil), start...)
	for v := range n {
		c := cell(points[2*v+1])*side + cell(points[2*v])
		member[next[c]] = int32(v)
		next[c]++
	}
	result := make([][]int32, n)
	var found []neighbour
	for v := range n {
		found = found[:0]
		column, row := cell(points[2*v]), cell(points[2*v+1])
		for ring := 0; ring < side; ring++ {
			eachOfRing(column, row, ring, side, func(c int) {
				for _, u := range member[start[c]:start[c+1]] {
					if int(u) != v {
						found = append(found, neighbour{u, squared(points, 2, u, int32(v))})
					}
				}
			})
			sortNeighbours(found)
			reach := float64(ring) / float64(side) // all points this near have been met
			if len(found) >= k && found[k-1].gap <= reach*reach {
				break
			}
		}
		result[v] = nodesOf(found[:k])
	}
	return result
}

// eachOfRing visits the cells at ring steps from a cell, inside the square.
func eachOfRing(column, row, ring, side int, do func(cell int)) {
	for r := max(0, row-ring); r <= min(side-1, row+ring); r++ {
		step := 2 * ring
		if r == row-ring || r == row+ring || ring == 0 {
			step = 1
		}
		for c := column - ring; c <= column+ring; c += step {
			if c >= 0 && c < side {
				do(r*side + c)
			}
		}
	}
}

func sortNeighbours(list []neighbour) {
	sort.Slice(list, func(i, j int) bool {
		return list[i].gap < list[j].gap || list[i].gap == list[j].gap && list[i].node < list[j].node
	})
}

func nodesOf(list []neighbour) []int32 {
	nodes := make([]int32, len(list))
	for i, e := range list {
		nodes[i] = e.node
	}
	return nodes
}

// nearestInTree searches a k-d tree (Bentley 1975).
func nearestInTree(points []float64, dimension, k int) [][]int32 {
	n := len(points) / dimension
	all := make(places, n)
	for v := range all {
		all[v] = place{kdtree.Point(points[v*dimension : (v+1)*dimension]), int32(v)}
	}
	tree := kdtree.New(append(places(nil), all...), false)
	result := make([][]int32, n)
	for v := range n {
		keep := kdtree.NewNKeeper(k + 1)
		tree.NearestSet(keep, all[v])
		var found []neighbour
		for _, c := range keep.Heap {
			if u := c.Comparable.(place).node; int(u) != v {
				found = append(found, neighbour{u, squared(points, dimension, u, int32(v))})
			}
		}
		sortNeighbours(found)
		result[v] = nodesOf(found[:k])
	}
	return result
}

// place is a point that remembers its node.
type place struct {
	kdtree.Point
	node int32
}

func (p place) Compare(c kdtree.Comparable, d kdtree.Dim) float64 {
	return p.Point.Compare(c.(place).Point, d)
}
func (p place) Distance(c kdtree.Comparable) float64 { return p.Point.Distance(c.(place).Point) }

type places []place

func (p places) Index(i int) kdtree.Comparable         { return p[i] }
func (p places) Len() int                              { return len(p) }
func (p places) Slice(start, end int) kdtree.Interface { return p[start:end] }
func (p places) Pivot(d kdtree.Dim) int {
	// The middle of the points in order; the tree needs no better.
	sort.Slice(p, func(i, j int) bool { return p[i].Point[d] < p[j].Point[d] })
	return len(p) / 2
}

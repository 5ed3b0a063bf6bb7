package exact

import "math"

// tree is a spanning tree of the solver's network as a basis of the simplex:
// every node but the root hangs from its parent by an edge that carries the
// net supply of its subtree, up to the parent where flow > 0 and down from it
// where flow < 0. Flow is never 0: see supplies.
type tree struct {
	node []node
	tour *tour
	edge []edge
	root int32

	stem  []int32     // scratch of pivot
	stops []stopPoint // scratch of pivot
}

// node is what a pivot reads of a node while it walks a cycle: half a cache
// line.
type node struct {
	flow   int64 // to the parent
	width  int64 // of the edge to the parent: both lengths together
	parent int32
	edge   int32
	size   int32 // nodes in the subtree
}

// edge joins u and v; flow costs fwd a unit from u to v and bwd from v to u.
type edge struct {
	u, v     int32
	fwd, bwd int64
}

// stopPoint is a node whose edge's flow comes down to 0 when at units have
// gone around the cycle.
type stopPoint struct {
	at   int64
	node int32
	side int8 // +1 below the node the new flow leaves, -1 below the one it enters
}

// grow makes the tree given by the edge to the parent of every node (-1 for
// the root), in an order of nodes in which parents come first.
func (t *tree) grow(parentEdge []int32, order []int32) {
	n := len(t.node)
	child := make([]int32, n) // first child
	next := make([]int32, n)  // next of the same parent
	for v := range child {
		child[v], next[v] = -1, -1
		t.node[v].size = 1
	}
	for i := n - 1; i >= 0; i-- { // backwards, so that lists come out in order
		v := order[i]
		x := &t.node[v]
		x.edge = parentEdge[v]
		if x.edge < 0 {
			x.parent, t.root = -1, v
			continue
		}
		e := t.edge[x.edge]
		x.parent = e.u ^ e.v ^ v
		x.width = e.fwd + e.bwd
		next[v] = child[x.parent]
		child[x.parent] = v
		t.node[x.parent].size += x.size
	}
	t.tour.reset()
	v := t.root
	t.tour.push(2 * v)
	for {
		if c := child[v]; c >= 0 {
			child[v] = next[c]
			v = c
			t.tour.push(2 * v)
			continue
		}
		t.tour.push(2*v + 1)
		if v == t.root {
			return
		}
		v = t.node[v].parent
	}
}

// load sets every flow and potential anew from the supplies, along the tour:
// children are complete where the tour leaves them. Cost: O(n).
func (t *tree) load(supply []int64) {
	for v := range t.node {
		t.node[v].flow = supply[v]
	}
	for b := t.tour.head; b >= 0; b = t.tour.block[b].next {
		for _, token := range t.tour.tokens(b) {
			if x := &t.node[token>>1]; token&1 == 1 && x.parent >= 0 {
				t.node[x.parent].flow += x.flow
			}
		}
	}
	for b := t.tour.head; b >= 0; b = t.tour.block[b].next {
		t.tour.off[b] = 0
		for _, token := range t.tour.tokens(b) {
			if token&1 == 0 {
				t.tour.place[token>>1].pot = t.tightPotential(token >> 1)
			}
		}
	}
}

// tightPotential is the potential of v that makes the edge to its parent
// tight, in the direction of its flow.
func (t *tree) tightPotential(v int32) int64 {
	x := &t.node[v]
	if x.parent < 0 {
		return 0
	}
	return t.tour.potential(x.parent) + t.rise(v)
}

// rise is the potential of v less that of its parent: the length of the edge
// in the direction of its flow.
func (t *tree) rise(v int32) int64 {
	x := &t.node[v]
	e := &t.edge[x.edge]
	up, down := e.fwd, e.bwd
	if e.u != v {
		up, down = down, up
	}
	if x.flow > 0 {
		return up
	}
	return -down
}

// pivot sends flow along edge i, from u to v where forward, and takes it off
// the tree path between the two ends. excess > 0 is by how much the potential
// drops along the edge more than its length allows: what a unit saves at
// first.
//
// The saving falls by an edge's two lengths together when the edge's flow
// comes down to 0 and turns. The pivot passes every such point while anything
// is still saved, and the edge where nothing is any more leaves the tree.
// (Exact line search on a piecewise linear function; the turned edges stay in
// the basis with the other sign.) It returns the units sent.
func (t *tree) pivot(i int32, forward bool, excess int64) int64 {
	from, to, length := t.edge[i].u, t.edge[i].v, t.edge[i].fwd
	if !forward {
		from, to, length = to, from, t.edge[i].bwd
	}
	top := t.collect(from, to)
	stop := t.search(excess)
	drop := t.tour.potential(from) - t.tour.potential(to)
	in, under, sent, d := from, to, -stop.at, length-drop
	if stop.side < 0 {
		in, under, sent, d = to, from, -sent, -d
	}
	t.rehang(in, stop.node, under, top, sent)
	x := &t.node[in]
	x.parent, x.edge, x.flow = under, i, -sent
	x.width = t.edge[i].fwd + t.edge[i].bwd
	t.tour.move(t.stem, under, d)
	return stop.at
}

// collect lists in t.stops every edge on the tree path between the two ends
// whose flow runs along the path from one to the other, the first to come down
// to 0 in front, and returns the node where the path turns down.
func (t *tree) collect(from, to int32) (top int32) {
	t.stops = t.stops[:0]
	first, least := 0, int64(math.MaxInt64)
	a, b := from, to
	for a != b {
		// The end with fewer nodes below cannot be above the other.
		s := stopPoint{node: a, side: 1}
		if x := &t.node[a]; x.size <= t.node[b].size {
			s.at, a = x.flow, x.parent
		} else {
			y := &t.node[b]
			s, b = stopPoint{at: -y.flow, node: b, side: -1}, y.parent
		}
		if s.at > 0 {
			if s.at < least {
				first, least = len(t.stops), s.at
			}
			t.stops = append(t.stops, s)
		}
	}
	t.stops[0], t.stops[first] = t.stops[first], t.stops[0]
	return a
}

// search takes the stops in order of their units, turns the edges of those
// where something is still saved beyond, and returns the one where not. No
// two stops are equal, since an edge of a tree always carries flow.
func (t *tree) search(excess int64) stopPoint {
	s := t.stops[0]
	heap := t.stops[1:]
	for made := false; ; {
		width := t.node[s.node].width
		excess -= width
		if excess <= 0 {
			return s
		}
		t.tour.raise(s.node, int64(-s.side)*width)
		if !made {
			for i := len(heap)/2 - 1; i >= 0; i-- {
				sink(heap, i)
			}
			made = true
		}
		s = heap[0]
		heap[0] = heap[len(heap)-1]
		heap = heap[:len(heap)-1]
		sink(heap, 0)
	}
}

// sink moves stop i of a heap to its place.
func sink(heap []stopPoint, i int) {
	for {
		c := 2*i + 1
		if c >= len(heap) {
			return
		}
		if c+1 < len(heap) && heap[c+1].at < heap[c].at {
			c++
		}
		if heap[c].at >= heap[i].at {
			return
		}
		heap[i], heap[c] = heap[c], heap[i]
		i = c
	}
}

// rehang turns the parents around on the stem from node in up to node out,
// whose edge leaves, and moves the count of the subtree from the nodes above
// out to the nodes from under up. On its way it adds what is sent to the flows
// on the side of in, and takes it off those on the other. It leaves the stem in
// t.stem.
func (t *tree) rehang(in, out, under, top int32, sent int64) {
	moved := t.node[out].size
	for a := t.node[out].parent; a != top; {
		x := &t.node[a]
		x.flow += sent
		x.size -= moved
		a = x.parent
	}
	for b := under; b != top; {
		x := &t.node[b]
		x.flow -= sent
		x.size += moved
		b = x.parent
	}
	t.stem = append(t.stem[:0], in)
	below := t.node[in]
	t.node[in].size = moved
	for v := in; v != out; {
		p := below.parent
		t.stem = append(t.stem, p)
		above := t.node[p]
		t.node[p] = node{flow: -below.flow - sent, width: below.width, parent: v, edge: below.edge, size: moved - below.size}
		below, v = above, p
	}
}

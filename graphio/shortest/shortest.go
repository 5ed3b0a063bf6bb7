// Package shortest finds shortest-path distances on a graphio.Network by one
// sweep of Dijkstra's algorithm (1959) from any number of start nodes, each
// with its own start value.
//
// Started from every node at once with the values of a potential, the same
// sweep is the Lipschitz repair: the largest function below the potential that
// changes by no more than the length of an edge from one end to the other
// (McShane 1934).
package shortest

import (
	"math"

	"example.org/barrow/graphio"
)

// A Direction says which way edges are travelled.
type Direction int

const (
	Forward  Direction = iota // away from the start nodes
	Backward                  // towards them
	Either                    // directions left aside
)

// Sweep lowers dist, one value a node, to the least of dist[u] + d(u, v) over
// all u, where d is the shortest-path distance from u to v (Forward), from v
// to u (Backward) or in the network without directions (Either). Nodes that
// are no start hold +Inf before, and after too if no start reaches them.
//
// Where via is not nil, it receives for each node the edge by which the sweep
// reached it, -1 for a node that kept its own value. Ties go to the node that
// was settled first, and equal values settle in node order, so the result does
// not depend on anything but the input.
//
// Cost: O((nodes + edges) log nodes) time, 16 bytes a node.
func Sweep(net *graphio.Network, dist []float64, dir Direction, via []int32) {
	arcs := net.OutArcs
	switch dir {
	case Backward:
		arcs = net.InArcs
	case Either:
		arcs = net.Arcs
	}
	edges := net.EdgeList()
	h := heap{key: dist, at: make([]int32, len(dist))}
	for v := range dist {
		h.at[v] = -1
		if via != nil {
			via[v] = -1
		}
		// A node that lowers no neighbour has no part in the sweep unless it is
		// lowered itself: for a potential that is nearly feasible, most do not.
		for _, a := range arcs(v) {
			if dist[v]+edges[a.Edge].Length < dist[a.Node] {
				h.at[v] = int32(len(h.node))
				h.node = append(h.node, int32(v))
				break
			}
		}
	}
	for i := len(h.node)/arity + 1; i >= 0; i-- {
		h.down(i)
	}
	for len(h.node) > 0 {
		u := h.pop()
		for _, a := range arcs(int(u)) {
			d := dist[u] + edges[a.Edge].Length
			if d >= dist[a.Node] {
				continue
			}
			dist[a.Node] = d
			if via != nil {
				via[a.Node] = a.Edge
			}
			if h.at[a.Node] < 0 {
				h.at[a.Node] = int32(len(h.node))
				h.node = append(h.node, a.Node)
			}
			h.up(int(h.at[a.Node]))
		}
	}
}

// From returns the distances from one node, travelled in the given direction.
// Cost: as Sweep.
func From(net *graphio.Network, v int, dir Direction) []float64 {
	dist := make([]float64, net.Order())
	for i := range dist {
		dist[i] = math.Inf(1)
	}
	dist[v] = 0
	Sweep(net, dist, dir, nil)
	return dist
}

// heap is a four-way heap of nodes by key, then by number, whose keys may fall
// while they are in it. at is a node's place, -1 outside.
type heap struct {
	key  []float64
	node []int32
	at   []int32
}

const arity = 4 // shallower than a binary heap; the children share a cache line

func (h *heap) before(u, v int32) bool {
	return h.key[u] < h.key[v] || h.key[u] == h.key[v] && u < v
}

func (h *heap) pop() int32 {
	top, end := h.node[0], len(h.node)-1
	h.at[top] = -1
	last := h.node[end]
	h.node = h.node[:end]
	if end > 0 {
		h.node[0] = last
		h.at[last] = 0
		h.down(0)
	}
	return top
}

func (h *heap) up(i int) {
	v := h.node[i]
	for i > 0 {
		p := (i - 1) / arity
		if !h.before(v, h.node[p]) {
			break
		}
		h.node[i] = h.node[p]
		h.at[h.node[i]] = int32(i)
		i = p
	}
	h.node[i] = v
	h.at[v] = int32(i)
}

func (h *heap) down(i int) {
	if i >= len(h.node) {
		return
	}
	v := h.node[i]
	for {
		first := i*arity + 1
		if first >= len(h.node) {
			break
		}
		least := first
		for c := first + 1; c < min(first+arity, len(h.node)); c++ {
			if h.before(h.node[c], h.node[least]) {
				least = c
			}
		}
		if !h.before(h.node[least], v) {
			break
		}
		h.node[i] = h.node[least]
		h.at[h.node[i]] = int32(i)
		i = least
	}
	h.node[i] = v
	h.at[v] = int32(i)
}

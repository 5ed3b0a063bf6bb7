package resistor

import (
	"math"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// A tree spans every component: shortest paths to a node in its middle, so that
// what is routed along it goes no great way round.
type tree struct {
	order  []int32   // nodes, each after its parent
	via    []int32   // edge of each node towards its root, none at roots
	parent []int32   // node across via
	roots  []int32   // one a component
	label  []int32   // component of each node
	height float64   // longest path to a root
	adds   float64   // most sums that what starts at a node goes through on its way
	inTree []bool    // for each edge
	size   []float64 // nodes in each component
}

// newTree spans a network from the middle of each component, or, where it is
// not none, from the given node of a network in one part.
func newTree(net *graphio.Network, root int32) *tree {
	n := net.Order()
	t := &tree{via: make([]int32, n), parent: make([]int32, n), inTree: make([]bool, net.Size())}
	var parts int
	t.label, parts = net.Components()
	t.roots, t.size = make([]int32, parts), make([]float64, parts)
	for v := n - 1; v >= 0; v-- {
		t.roots[t.label[v]] = int32(v)
		t.size[t.label[v]]++
	}
	if root == none {
		t.centre(net)
	} else {
		t.roots[0] = root
	}
	for _, d := range t.sweep(net) {
		t.height = max(t.height, d)
	}
	t.arrange(net)
	return t
}

// centre moves the root of each component to its middle.
func (t *tree) centre(net *graphio.Network) {
	dist := t.sweep(net)
	far := append([]int32(nil), t.roots...)
	for v, d := range dist {
		if d > dist[far[t.label[v]]] {
			far[t.label[v]] = int32(v)
		}
	}
	for c, v := range far { // half way back from the farthest node
		for half := dist[v] / 2; dist[v] > half; {
			e := net.EdgeList()[t.via[v]]
			v = e.From ^ e.To ^ v
		}
		t.roots[c] = v
	}
}

func (t *tree) sweep(net *graphio.Network) []float64 {
	dist := make([]float64, net.Order())
	for v := range dist {
		dist[v] = math.Inf(1)
	}
	for _, r := range t.roots {
		dist[r] = 0
	}
	shortest.Sweep(net, dist, shortest.Either, t.via)
	return dist
}

// arrange sets parents, marks edges, and orders nodes from the roots outwards.
func (t *tree) arrange(net *graphio.Network) {
	n := len(t.via)
	begin := make([]int, n+1)
	for v, i := range t.via {
		t.parent[v] = none
		if i == none {
			continue
		}
		e := net.EdgeList()[i]
		t.parent[v], t.inTree[i] = e.From^e.To^int32(v), true
		begin[t.parent[v]+1]++
	}
	for v := range n {
		begin[v+1] += begin[v]
	}
	child, next := make([]int32, begin[n]), append([]int(nil), begin[:n]...)
	for v, p := range t.parent {
		if p != none {
			child[next[p]] = int32(v)
			next[p]++
		}
	}
	// Depth first, so that a node and its parent are met close together.
	t.order = make([]int32, 0, n)
	adds := make([]float64, n)
	var stack []int32
	for i := len(t.roots) - 1; i >= 0; i-- {
		stack = append(stack, t.roots[i])
	}
	for len(stack) > 0 {
		v := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		t.order = append(t.order, v)
		if p := t.parent[v]; p != none {
			adds[v] = adds[p] + float64(len(net.Arcs(int(v))))
		}
		t.adds = max(t.adds, adds[v])
		stack = append(stack, child[begin[v]:begin[v+1]]...)
	}
}

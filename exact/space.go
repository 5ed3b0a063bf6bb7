package exact

import (
	"math"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// space is the network as the simplex sees it: connected, nodes numbered along
// a tree so that neighbours lie close in memory, lengths as integers, two
// opposite one-way edges as one edge with two lengths.
//
// Beyond the network's own it may hold a node that takes up unmatched mass,
// joined to every other; or edges that join the components, which can carry
// no flow as each component's supplies cancel.
type space struct {
	edge     []edge
	fwd, bwd []int32 // network edge that serves u → v, and v → u; -1 for none
	number   []int32 // solver node of each network node
	label    []int32 // network node of each solver node, -1 for the extra node
	quantum  float64 // length of one integer unit

	// unmatched is the cost of unmatched mass the solver works with: a larger
	// one changes no flow, and the cost by a multiple of the difference.
	unmatched float64

	startEdge, startOrder []int32 // the tree to start from, as tree.grow wants it
}

const noEdge = -1

// newSpace lays out a network, with a tree of shortest paths to start from:
// the optimal one where nothing but the perturbation flows, as in large areas
// without mass. They lead to node lone, or to the middle if that is noNode.
func newSpace(net *graphio.Network, unmatched float64, lone int32) *space {
	roots, via, reach := paths(net, lone)
	s := &space{}
	s.numberAlong(net, roots, via)
	oneWay, around := 0.0, 2*reach
	if net.Directed() {
		oneWay, around = backwardPenalty(net, roots)
	}
	// Where every node can reach every other of its component for less than the
	// cost of removing mass here and creating it there, none is.
	s.unmatched = unmatched
	if unmatched > around {
		s.unmatched = around
	}
	near := 0 < s.unmatched && s.unmatched < reach/16
	if near {
		reach = s.unmatched // no mass goes farther than twice that
	}
	unit := s.scale(net, s.unmatched, reach, oneWay)
	s.layEdges(net, via, unit, int64(math.Ceil(oneWay/s.quantum))+1)
	if unmatched > 0 {
		s.hangFromExtra(unit(s.unmatched), near)
	} else {
		s.joinRoots(roots)
	}
	return s
}

// paths finds, in every component, a node about its middle and a tree of
// shortest paths to it (via: the edge of each node towards it), directions
// honoured where all nodes can reach it. reach is the longest path. A node lone
// is taken as the middle of its component.
func paths(net *graphio.Network, lone int32) (roots []int32, via []int32, reach float64) {
	n := net.Order()
	label, parts := net.Components()
	roots = make([]int32, parts)
	for v := n - 1; v >= 0; v-- {
		roots[label[v]] = int32(v)
	}
	dist, via := make([]float64, n), make([]int32, n)
	sweep := func(dir shortest.Direction) {
		for v := range dist {
			dist[v] = math.Inf(1)
		}
		for _, r := range roots {
			dist[r] = 0
		}
		shortest.Sweep(net, dist, dir, via)
	}
	if lone != noNode {
		roots[label[lone]] = lone
		sweep(shortest.Either)
		for _, d := range dist {
			reach = max(reach, d)
		}
		return roots, via, reach
	}
	sweep(shortest.Either)
	far := append([]int32(nil), roots...)
	for v, d := range dist {
		if d > dist[far[label[v]]] {
			far[label[v]] = int32(v)
		}
	}
	for c, v := range far { // half way back from the farthest node
		half := dist[v] / 2
		for dist[v] > half {
			v = across(net, via[v], v)
		}
		roots[c] = v
	}
	sweep(shortest.Either)
	for _, d := range dist {
		reach = max(reach, d)
	}
	if net.Directed() {
		toRoot := append([]int32(nil), via...)
		sweep(shortest.Backward)
		for _, d := range dist {
			if math.IsInf(d, 1) {
				return roots, toRoot, reach
			}
		}
	}
	return roots, via, reach
}

func across(net *graphio.Network, i, v int32) int32 {
	e := net.EdgeList()[i]
	return e.From ^ e.To ^ v
}

// backwardPenalty is a cost at which no optimal flow uses a one-way edge
// backwards, if it can do without: more than the longest way around, which is
// +Inf where some node cannot reach some other of its component.
func backwardPenalty(net *graphio.Network, roots []int32) (penalty, around float64) {
	for _, dir := range []shortest.Direction{shortest.Forward, shortest.Backward} {
		dist := make([]float64, net.Order())
		for v := range dist {
			dist[v] = math.Inf(1)
		}
		for _, r := range roots {
			dist[r] = 0
		}
		shortest.Sweep(net, dist, dir, nil)
		longest := 0.0
		for _, d := range dist {
			longest = max(longest, d)
		}
		around += longest
	}
	if !math.IsInf(around, 1) {
		return around * (1 + 1e-9), around
	}
	for _, e := range net.EdgeList() {
		penalty += e.Length
	}
	return penalty * (1 + 1e-9), around // more than any path
}

// numberAlong numbers the nodes in preorder of the tree of each component,
// which keeps subtrees together.
func (s *space) numberAlong(net *graphio.Network, roots, via []int32) {
	n := net.Order()
	child, next := make([]int32, n), make([]int32, n)
	for v := range child {
		child[v] = -1
	}
	for v := n - 1; v >= 0; v-- {
		if via[v] >= 0 {
			p := across(net, via[v], int32(v))
			next[v] = child[p]
			child[p] = int32(v)
		}
	}
	s.number = make([]int32, n)
	s.label = make([]int32, 0, n+1)
	var stack []int32
	for _, r := range roots {
		stack = append(stack, r)
		for len(stack) > 0 {
			v := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			s.number[v] = int32(len(s.label))
			s.label = append(s.label, v)
			at := len(stack)
			for c := child[v]; c >= 0; c = next[c] {
				stack = append(stack, c)
			}
			for i, j := at, len(stack)-1; i < j; i, j = i+1, j-1 {
				stack[i], stack[j] = stack[j], stack[i]
			}
		}
	}
}

// scale chooses the quantum: lengths that are decimals of few digits become
// exact integers; others are rounded down to a power of two so fine that no
// sum of lengths in use overflows 62 bits. It returns the rounding.
//
// Rounded down, since a potential that is feasible for shorter lengths is
// feasible for the true ones.
func (s *space) scale(net *graphio.Network, unmatched, reach, oneWay float64) func(float64) int64 {
	// The largest potential difference to expect: a few times across the
	// network, or a path of edges used backwards.
	span := 32 * max(reach, unmatched)
	if oneWay > 0 {
		span = max(span, 4*oneWay*float64(net.Order()))
	}
	// An edge longer than any way around it carries no optimal flow, however
	// long it is.
	longest := span / 8
	const most = 1 << 61
	lengths := func(yield func(float64) bool) {
		for _, e := range net.EdgeList() {
			if !yield(e.Length) {
				return
			}
		}
		if unmatched > 0 {
			yield(unmatched)
		}
	}
	power := 1.0
	for range 10 {
		exact := span*power < most
		for l := range lengths {
			if r := math.Round(l * power); !exact || r/power != l {
				exact = false
				break
			}
		}
		if exact {
			s.quantum = 1 / power
			return func(l float64) int64 { return int64(math.Round(min(l, longest) * power)) }
		}
		power *= 10
	}
	_, exp := math.Frexp(span)
	s.quantum = math.Ldexp(1, exp-61)
	return func(l float64) int64 { return max(1, int64(math.Ldexp(min(l, longest), 61-exp))) }
}

// layEdges lists the edges in the order of their lower end, and notes which of
// them lead up the start tree.
func (s *space) layEdges(net *graphio.Network, via []int32, unit func(float64) int64, backward int64) {
	n := net.Order()
	s.edge = make([]edge, 0, net.Size()+1)
	s.fwd, s.bwd = make([]int32, 0, net.Size()+1), make([]int32, 0, net.Size()+1)
	s.startEdge = make([]int32, n, n+1)
	for v := range s.startEdge {
		s.startEdge[v] = noEdge
	}
	among := make([]int32, n) // solver edge + 1 from the node at hand
	list := net.EdgeList()
	for u := range int32(n) {
		first := len(s.edge)
		for _, a := range net.Arcs(int(s.label[u])) {
			v := s.number[a.Node]
			if v < u {
				continue
			}
			e := list[a.Edge]
			k := among[v] - 1
			if k < 0 {
				k = int32(len(s.edge))
				among[v] = k + 1
				s.edge = append(s.edge, edge{u: u, v: v, fwd: backward, bwd: backward})
				s.fwd, s.bwd = append(s.fwd, noEdge), append(s.bwd, noEdge)
			}
			along := s.number[e.From] == u
			if along || !e.OneWay {
				s.edge[k].fwd, s.fwd[k] = unit(e.Length), a.Edge
			}
			if !along || !e.OneWay {
				s.edge[k].bwd, s.bwd[k] = unit(e.Length), a.Edge
			}
			if via[s.label[v]] == a.Edge {
				s.startEdge[v] = k
			} else if via[s.label[u]] == a.Edge {
				s.startEdge[u] = k
			}
		}
		for _, e := range s.edge[first:] {
			among[e.v] = 0
		}
	}
}

// joinRoots makes one tree of the components, by edges between their roots.
func (s *space) joinRoots(roots []int32) {
	for v := range int32(len(s.label)) {
		s.startOrder = append(s.startOrder, v)
	}
	for _, r := range roots[1:] {
		s.startEdge[s.number[r]] = s.join(s.number[roots[0]], s.number[r], 1)
	}
}

// hangFromExtra adds the node that takes up unmatched mass as the root. Where
// its edges are short against the network, every node hangs from it by its own,
// otherwise only the trees of shortest paths do: of the two starts the better,
// as measured; cutting the trees into pieces was worse than one or the other.
func (s *space) hangFromExtra(unmatched int64, near bool) {
	extra := int32(len(s.label))
	s.label = append(s.label, noEdge)
	s.startOrder = append(s.startOrder, extra)
	for v := range extra {
		s.startOrder = append(s.startOrder, v)
		k := s.join(v, extra, unmatched)
		if near || s.startEdge[v] == noEdge {
			s.startEdge[v] = k
		}
	}
	s.startEdge = append(s.startEdge, noEdge)
}

// own reports whether edge k is one of the network's.
func (s *space) own(k int32) bool { return s.fwd[k] != noEdge || s.bwd[k] != noEdge }

func (s *space) join(u, v int32, length int64) int32 {
	s.edge = append(s.edge, edge{u: u, v: v, fwd: length, bwd: length})
	s.fwd, s.bwd = append(s.fwd, noEdge), append(s.bwd, noEdge)
	return int32(len(s.edge)) - 1
}

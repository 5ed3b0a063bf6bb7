package exact

import (
	"math"

	"example.org/barrow/graphio"
)

// Unavoidable marks the edges whose flow is the same in every optimum, so that
// it can be read as a fact about the samples and not as a choice of the
// solver. It is nil for a result that is not optimal.
//
// Every optimal flow runs along tight edges only, those along which the
// potential falls by their whole length; two optima differ by circulations on
// these. So an edge that no cycle of tight edges passes is the same in all.
// The mark is safe but not complete: an edge on a cycle around which nothing
// can turn is left unmarked. Cost: O(nodes + edges).
func (r *Result) Unavoidable() []bool {
	if !r.Optimal {
		return nil
	}
	largest := 0.0
	for _, pot := range r.Potential {
		largest = max(largest, math.Abs(pot))
	}
	slack := 0x1p-40 * largest // take an edge for tight where in doubt
	list := r.net.EdgeList()
	m := int32(len(list))
	tight := func(i int32) bool {
		if i >= m {
			return true
		}
		e := list[i]
		drop := r.Potential[e.From] - r.Potential[e.To]
		return drop >= e.Length-slack || !e.OneWay && -drop >= e.Length-slack
	}

	// Bridges of the network of tight edges by depth-first search (Tarjan
	// 1974): low is the earliest node that the subtree of a node reaches by
	// other edges than the one it was entered by.
	n := r.net.Order()
	arcsOf := r.net.Arcs
	if r.Unmatched != nil {
		arcsOf = r.withExtra(slack)
		n++
	}
	bridge := make([]bool, len(list)+n)
	seen, low := make([]int32, n), make([]int32, n)
	next := make([]int32, n) // arc to look at, by node
	enter := make([]int32, n)
	clock := int32(0)
	for root := range int32(n) {
		if seen[root] != 0 {
			continue
		}
		clock++
		seen[root], low[root], enter[root] = clock, clock, -1
		stack := []int32{root}
		for len(stack) > 0 {
			v := stack[len(stack)-1]
			arcs := arcsOf(int(v))
			if int(next[v]) == len(arcs) {
				stack = stack[:len(stack)-1]
				if len(stack) > 0 {
					parent := stack[len(stack)-1]
					low[parent] = min(low[parent], low[v])
					bridge[enter[v]] = low[v] > seen[parent]
				}
				continue
			}
			a := arcs[next[v]]
			next[v]++
			switch {
			case a.Edge == enter[v] || !tight(a.Edge):
			case seen[a.Node] != 0:
				low[v] = min(low[v], seen[a.Node])
			default:
				clock++
				seen[a.Node], low[a.Node], enter[a.Node] = clock, clock, a.Edge
				stack = append(stack, a.Node)
			}
		}
	}
	// Edges that are not tight carry nothing in any optimum.
	for i := range list {
		bridge[i] = bridge[i] || !tight(int32(i))
	}
	return bridge[:m]
}

// withExtra adds a node after the network's own that is joined to every node
// where removing or creating mass is as good as moving it: by edge m + v.
func (r *Result) withExtra(slack float64) func(int) []graphio.Arc {
	n, m := r.net.Order(), r.net.Size()
	var extra []graphio.Arc
	for v, pot := range r.Potential {
		if math.Abs(pot) >= r.opt.Unmatched-slack {
			extra = append(extra, graphio.Arc{Node: int32(v), Edge: int32(m + v)})
		}
	}
	return func(v int) []graphio.Arc {
		if v == n {
			return extra
		}
		arcs := r.net.Arcs(v)
		if math.Abs(r.Potential[v]) >= r.opt.Unmatched-slack {
			arcs = append(arcs[:len(arcs):len(arcs)], graphio.Arc{Node: int32(n), Edge: int32(m + v)})
		}
		return arcs
	}
}

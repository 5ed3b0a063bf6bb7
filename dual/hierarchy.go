package dual

import (
	"cmp"
	"slices"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// HierarchyTree is a spanning tree of each component that follows the coarsening
// hierarchy: the edges within an aggregate come before those between aggregates,
// the shorter ones first, so that every aggregate of every level is a subtree.
// On it the transport distance is Σ length |mass beyond the edge|, a Haar-like
// sum over the levels (the wavelet form: Shirdhonkar & Jacobs 2008), an upper
// bound on the whole network, and exact where that has no other edges. level is
// that of each edge of the tree: how many coarsenings until its ends meet.
// Cost: O(edges (log edges + levels)).
func HierarchyTree(net *graphio.Network) (tree *graphio.Network, level []float64, err error) {
	h := diffusion.NewHierarchy(diffusion.NewWalk(net))
	type candidate struct {
		edge  int32
		level int
	}
	list := make([]candidate, net.Size())
	for i, e := range net.EdgeList() {
		u, v, l := e.From, e.To, 0
		for u != v && l < h.Levels()-1 {
			u, v = h.Parent(l)[u], h.Parent(l)[v]
			l++
		}
		if u != v {
			l++
		}
		list[i] = candidate{int32(i), l}
	}
	edges := net.EdgeList()
	slices.SortFunc(list, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.level, b.level), cmp.Compare(edges[a.edge].Length, edges[b.edge].Length), cmp.Compare(a.edge, b.edge))
	})
	above := make([]int32, net.Order())
	for v := range above {
		above[v] = int32(v)
	}
	root := func(v int32) int32 {
		for above[v] != v {
			above[v] = above[above[v]]
			v = above[v]
		}
		return v
	}
	var kept []graphio.Edge
	for _, c := range list {
		e := edges[c.edge]
		u, v := root(e.From), root(e.To)
		if u == v {
			continue
		}
		above[u] = v
		e.OneWay = false
		kept, level = append(kept, e), append(level, float64(c.level))
	}
	names := make([]string, net.Order())
	for v := range names {
		names[v] = net.Name(v)
	}
	tree, err = graphio.NewNetwork(names, kept)
	return tree, level, err
}

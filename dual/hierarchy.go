package dual

import (
	"cmp"
	"slices"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// Levels are the aggregates of a hierarchy, level by level from the nodes up, as
// terms of an estimate:
//
//	Σ_a size_a |p(a) - q(a)|
//
// for each level, p(a) being the mass in aggregate a and size_a the mean length
// of the hierarchy's tree within the aggregate that a becomes part of (a sum
// over nested cells, as Indyk & Thaper 2003; with weights of their own for the
// levels it is the L1 form of Haar wavelets).
type Levels struct {
	parent [][]int32
	size   [][]float32
	width  int
}

func newLevels(h *diffusion.Hierarchy, edges []graphio.Edge, level []float64) *Levels {
	l := &Levels{}
	for k := range h.Levels() - 1 {
		l.parent = append(l.parent, h.Parent(k))
	}
	l.setSizes(edges, level)
	return l
}

// setSizes takes the edges of the tree by level.
func (l *Levels) setSizes(edges []graphio.Edge, level []float64) {
	for _, parent := range l.parent {
		l.size = append(l.size, make([]float32, len(parent)))
		l.width += len(parent)
	}
	if len(l.parent) == 0 {
		return
	}
	sum, count := make([]float64, len(l.parent[0])), make([]float64, len(l.parent[0]))
	at := make([]int32, len(edges)) // aggregate of each edge's first end
	for i, e := range edges {
		at[i] = e.From
	}
	next := 0
	for k, parent := range l.parent {
		up := 0
		for _, a := range parent {
			up = max(up, int(a)+1)
		}
		s, c := make([]float64, up), make([]float64, up)
		for a, b := range parent {
			s[b] += sum[a]
			c[b] += count[a]
		}
		for i := range edges {
			at[i] = parent[at[i]]
		}
		for ; next < len(edges) && level[next] <= float64(k+1); next++ {
			s[at[next]] += edges[next].Length
			c[at[next]]++
		}
		for a, b := range parent {
			if c[b] > 0 {
				l.size[k][a] = float32(s[b] / c[b])
			}
		}
		sum, count = s, c
	}
}

// masses calls do for every level with the masses of a sample in its aggregates,
// valid only during the call. held is memory to use again.
func (l *Levels) masses(s graphio.Sample, held *[2][]float64, do func(level int, mass []float64)) {
	for k, parent := range l.parent {
		mass := held[k%2][:0]
		for range parent {
			mass = append(mass, 0)
		}
		held[k%2] = mass
		if k == 0 {
			for i, v := range s.Nodes {
				mass[v] += s.Values[i]
			}
		} else {
			for a, b := range l.parent[k-1] {
				mass[b] += held[(k-1)%2][a]
			}
		}
		do(k, mass)
	}
}

// HierarchyTree is a spanning tree of each component that follows the coarsening
// hierarchy: the edges within an aggregate come before those between aggregates,
// the shorter ones first, so that every aggregate of every level is a subtree.
// On it the transport distance is Σ length |mass beyond the edge|, a Haar-like
// sum over the levels (the wavelet form: Shirdhonkar & Jacobs 2008), an upper
// bound on the whole network, and exact where that has no other edges. level is
// that of each edge of the tree: how many coarsenings until its ends meet.
// Cost: O(edges (log edges + levels)).
func HierarchyTree(net *graphio.Network) (tree *graphio.Network, level []float64, levels *Levels, err error) {
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
	levels = newLevels(h, kept, level)
	names := make([]string, net.Order())
	for v := range names {
		names[v] = net.Name(v)
	}
	tree, err = graphio.NewNetwork(names, kept)
	return tree, level, levels, err
}

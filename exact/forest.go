package exact

// forest gathers edges that close no cycle, to make a tree of them.
type forest struct {
	up   []int32
	edge []int32
}

func newForest(n int) *forest {
	f := &forest{up: make([]int32, n), edge: make([]int32, 0, n)}
	for v := range f.up {
		f.up[v] = int32(v)
	}
	return f
}

func (f *forest) find(v int32) int32 {
	for f.up[v] != v {
		f.up[v] = f.up[f.up[v]]
		v = f.up[v]
	}
	return v
}

// add takes edge k unless it would close a cycle.
func (f *forest) add(edges []edge, k int32) {
	a, b := f.find(edges[k].u), f.find(edges[k].v)
	if a != b {
		f.up[a] = b
		f.edge = append(f.edge, k)
	}
}

// rooted is the tree of the edges gathered, as tree.grow wants it.
func (f *forest) rooted(edges []edge, root int32) (parentEdge, order []int32) {
	n := len(f.up)
	start := make([]int32, n+2)
	for _, k := range f.edge {
		start[edges[k].u+2]++
		start[edges[k].v+2]++
	}
	for v := range n {
		start[v+2] += start[v+1]
	}
	at := make([]int32, 2*len(f.edge))
	for _, k := range f.edge {
		for _, v := range [...]int32{edges[k].u, edges[k].v} {
			at[start[v+1]] = k
			start[v+1]++
		}
	}
	parentEdge = make([]int32, n)
	parentEdge[root] = noEdge
	order = append(make([]int32, 0, n), root)
	for i := 0; i < len(order); i++ {
		v := order[i]
		for _, k := range at[start[v]:start[v+1]] {
			if k != parentEdge[v] {
				w := edges[k].u ^ edges[k].v ^ v
				parentEdge[w] = k
				order = append(order, w)
			}
		}
	}
	return parentEdge, order
}

package diffusion

// A Hierarchy is a network's walk on ever coarser levels: aggregates of nodes,
// aggregates of those, and so on, down to a few dozen or to where each
// component is one node. Mass is summed over an aggregate, so totals are kept;
// every level runs on the same clock.
type Hierarchy struct {
	walks  []*Walk
	parent [][]int32
}

// smallest is the size up to which a level is not made coarser.
const smallest = 32

// NewHierarchy coarsens a walk level by level. It is the same for the same
// walk always. Cost: O(links log links + nodes), memory about that of two
// walks.
func NewHierarchy(w *Walk) *Hierarchy {
	h := &Hierarchy{walks: []*Walk{w}}
	for w.Order() > smallest {
		coarse, parent := coarsen(w)
		if coarse.Order() == w.Order() {
			break
		}
		h.walks, h.parent = append(h.walks, coarse), append(h.parent, parent)
		w = coarse
	}
	h.setClocks()
	return h
}

// Levels is the number of levels, the network itself included.
func (h *Hierarchy) Levels() int { return len(h.walks) }

// Walk is the walk on the given level, 0 being the network.
func (h *Hierarchy) Walk(level int) *Walk { return h.walks[level] }

// Parent maps the nodes of a level to those of the next one. It is the
// hierarchy's own: do not change it.
func (h *Hierarchy) Parent(level int) []int32 { return h.parent[level] }

// restrict sums a block on one level, nodes × width, into dst on a coarser
// one. x may be changed.
func restrict[F real](h *Hierarchy, dst, x []F, width, from, to int) {
	for level := from; level < to; level++ {
		out := dst
		if level < to-1 {
			out = make([]F, h.walks[level+1].Order()*width)
		}
		clear(out[:h.walks[level+1].Order()*width])
		for u, a := range h.parent[level] {
			row := out[int(a)*width : (int(a)+1)*width]
			for l, y := range x[u*width : (u+1)*width] {
				row[l] += y
			}
		}
		x = out
	}
}

// between maps the nodes of one level to those of a coarser one; nil where
// they are the same.
func (h *Hierarchy) between(from, to int) []int32 {
	if from == to {
		return nil
	}
	m := append([]int32(nil), h.parent[from]...)
	for level := from + 1; level < to; level++ {
		for u, a := range m {
			m[u] = h.parent[level][a]
		}
	}
	return m
}

// Districts groups the nodes of a network into at most a few dozen aggregates
// that mass mixes well within, those of the coarsest level: a label a node, and
// for each the node with the largest capacity. A component is never divided
// between districts of another. Cost: that of NewHierarchy.
func (h *Hierarchy) Districts() (label []int32, middle []int32) {
	top := len(h.walks) - 1
	label = make([]int32, h.walks[0].Order())
	middle = make([]int32, h.walks[top].Order())
	for d := range middle {
		middle[d] = -1
	}
	capacity := h.walks[0].capacity
	for v := range label {
		d := int32(v)
		for level := range top {
			d = h.parent[level][d]
		}
		label[v] = d
		if m := middle[d]; m < 0 || capacity[v] > capacity[m] {
			middle[d] = int32(v)
		}
	}
	return label, middle
}

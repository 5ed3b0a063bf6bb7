package diffusion

import (
	"gonum.org/v1/gonum/mat"

	"example.org/barrow/graphio"
)

// A Walk is a reversible random walk in continuous time on the nodes of a
// network: mass at v leaves along a link at the rate weight/capacity(v), so
//
//	(L x)_u = Σ_v weight_uv (x_u/capacity_u - x_v/capacity_v)
//
// The walk of a network has capacity = degree, which makes L = I - A D⁻¹; on
// coarser levels of a Hierarchy the capacity of an aggregate is the sum over
// its nodes. L keeps the sum of x, and L x = 0 for x = capacity. A Walk does
// not change once made, so any number of goroutines may use it.
type Walk struct {
	weight   *CSR // symmetric, without a diagonal
	capacity []float64
	rate     []float64 // Σ_v weight_uv / capacity_u, the diagonal of L
	bound    float64   // the spectrum of L lies in [0, bound]
}

// NewWalk makes the random walk of a network's weights, directions left aside.
// Cost: O(nodes + edges).
func NewWalk(net *graphio.Network) *Walk {
	return newWalk(symmetric(net.Order(), links(net)), nil)
}

// links lists every pair of joined nodes once, with the larger weight where
// two one-way edges join them.
func links(net *graphio.Network) []link {
	list := make([]link, 0, net.Size())
	if !net.Directed() {
		for _, e := range net.EdgeList() {
			list = append(list, link{min(e.From, e.To), max(e.From, e.To), e.Weight})
		}
		return list
	}
	at := make([]int, net.Order()) // place + 1 in list of the link from u to a node
	edges := net.EdgeList()
	for u := range net.Order() {
		begin := len(list)
		for _, a := range net.Arcs(u) {
			if int(a.Node) < u {
				continue
			}
			w := edges[a.Edge].Weight
			if k := at[a.Node]; k > begin {
				list[k-1].w = max(list[k-1].w, w)
				continue
			}
			list = append(list, link{int32(u), a.Node, w})
			at[a.Node] = len(list)
		}
	}
	return list
}

// newWalk makes the walk of symmetric weights with the given capacities; nil
// stands for the degrees. A node without links has rate 0 and, where its
// capacity would be its degree, capacity 1.
func newWalk(weight *CSR, capacity []float64) *Walk {
	n := weight.rows
	w := &Walk{weight: weight, capacity: capacity, rate: make([]float64, n)}
	if capacity == nil {
		w.capacity = make([]float64, n)
	}
	for u := range n {
		degree := 0.0
		for _, x := range weight.value[weight.start[u]:weight.start[u+1]] {
			degree += x
		}
		if capacity == nil {
			w.capacity[u] = degree
			if degree == 0 {
				w.capacity[u] = 1
			}
		}
		w.rate[u] = degree / w.capacity[u]
		// Gershgorin for the columns of L: centre rate, radius rate.
		w.bound = max(w.bound, 2*w.rate[u])
	}
	return w
}

// Order is the number of nodes.
func (w *Walk) Order() int { return len(w.capacity) }

// Capacity is the mass each node holds in equilibrium, up to a factor for each
// component: the degree, or 1 for a node without edges. It is the walk's own:
// do not change it.
func (w *Walk) Capacity() []float64 { return w.capacity }

// Operator is one step of the walk acting on mass, P = I - L: columns sum to
// 1, and a node without edges keeps what it has. Cost: O(nodes + edges).
func (w *Walk) Operator() *CSR { return w.stepped(1) }

// stepped is I - s L as a sparse matrix; entries of 0 are left out.
func (w *Walk) stepped(s float64) *CSR {
	a, n := w.weight, w.Order()
	p := &CSR{rows: n, cols: n, start: make([]int, n+1), col: make([]int32, 0, a.NNZ()), value: make([]float64, 0, a.NNZ())}
	for u := range n {
		diagonal := 1 - s*w.rate[u]
		pending := diagonal != 0
		put := func(c int32, v float64) { p.col, p.value = append(p.col, c), append(p.value, v) }
		for k := a.start[u]; k < a.start[u+1]; k++ {
			v := a.col[k]
			if pending && int(v) > u {
				put(int32(u), diagonal)
				pending = false
			}
			put(v, s*a.value[k]/w.capacity[v])
		}
		if pending {
			put(int32(u), diagonal)
		}
		p.start[u+1] = len(p.col)
	}
	return p
}

// Laplacian is L acting on mass as a dense matrix, for small networks and
// checks. Cost: O(nodes²).
func (w *Walk) Laplacian() *mat.Dense {
	n := w.Order()
	l := mat.NewDense(n, n, nil)
	for u := range n {
		l.Set(u, u, w.rate[u])
		w.weight.DoRowNonZero(u, func(_, v int, x float64) { l.Set(u, v, -x/w.capacity[v]) })
	}
	return l
}

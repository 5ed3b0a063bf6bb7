package resistor

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"example.org/barrow/graphio"
)

// Options says what resistors a network is made of.
type Options struct {
	// Conductance of each edge, above 0 and finite; nil stands for 1/length.
	// With Unmatched, those of the edges to the extra node follow, one a node.
	Conductance []float64
	// Unmatched > 0 adds an extra node, joined to every node by an edge of
	// this length, where mass of unequal totals comes from and goes to.
	Unmatched float64
}

// A Circuit routes samples of one network. It does not change once made, so any
// number of goroutines may use it.
//
// Memory: some 60 bytes an edge and 100 a node, and the factor: 12 bytes an
// entry, some five entries a node on road networks.
type Circuit struct {
	order       int // nodes of the network, without the extra one
	length      []float64
	conductance []float64
	extra       bool

	factor    *factor
	inner     *factor // of the core
	laplacian *laplacian
	tree      *tree
	beside    []link // edges beside the tree, in the order of places
	along     []link // edges of the tree, from each node to its parent, leaves first
	low, high float64
	steps     int
}

// link is an edge as Route goes along it.
type link struct {
	edge, from, to int32   // from and to are places
	scale, back    float64 // from potential or flow to cost, and from cost to flow
}

// New makes the circuit of a network, directions left aside. Errors:
// conductances of another number than the edges, or not above 0 and finite.
// Cost: O(edges log nodes) or so.
func New(net *graphio.Network, opt Options) (*Circuit, error) {
	c := &Circuit{order: net.Order(), extra: opt.Unmatched > 0}
	if c.extra {
		var err error
		if net, err = withExtra(net, opt.Unmatched); err != nil {
			return nil, err
		}
	}
	var from, to []int32
	for _, e := range net.EdgeList() {
		from, to, c.length = append(from, e.From), append(to, e.To), append(c.length, e.Length)
	}
	c.conductance = opt.Conductance
	if c.conductance == nil {
		c.conductance = make([]float64, len(c.length))
		for i, l := range c.length {
			c.conductance[i] = 1 / l
		}
	}
	if len(c.conductance) != len(c.length) {
		return nil, fmt.Errorf("resistor: %d conductances for %d edges; want one an edge", len(c.conductance), len(c.length))
	}
	for i, x := range c.conductance {
		if !(x > 0) || math.IsInf(x, 1) {
			return nil, fmt.Errorf("resistor: conductance %v of edge number %d; want a finite number above 0", x, i+1)
		}
	}
	c.factor = eliminate(net.Order(), from, to, c.conductance)
	c.inner, c.laplacian = c.factor.inner(), newLaplacian(c.factor)
	root := none
	if c.extra {
		root = int32(c.order)
	}
	c.tree = newTree(net, root)
	c.layLinks(from, to)
	c.measure()
	return c, nil
}

// layLinks puts the edges in the order in which Route goes along them.
func (c *Circuit) layLinks(from, to []int32) {
	place := c.factor.place
	for e, in := range c.tree.inTree {
		if !in {
			c.beside = append(c.beside, link{int32(e), place[from[e]], place[to[e]], c.length[e] * c.conductance[e], 1 / c.length[e]})
		}
	}
	slices.SortFunc(c.beside, func(a, b link) int {
		return cmp.Or(cmp.Compare(min(a.from, a.to), min(b.from, b.to)), cmp.Compare(a.edge, b.edge))
	})
	for i := len(c.tree.order) - 1; i >= 0; i-- {
		v := c.tree.order[i]
		e := c.tree.via[v]
		if e == none {
			continue
		}
		scale := c.length[e]
		if from[e] != v {
			scale = -scale
		}
		c.along = append(c.along, link{edge: e, from: place[v], to: place[c.tree.parent[v]], scale: scale})
	}
}

// withExtra is the network with one node more, joined to all by edges of the
// given length, which come last.
func withExtra(net *graphio.Network, length float64) (*graphio.Network, error) {
	n := net.Order()
	names := make([]string, 0, n+1)
	longest := 0
	for v := range n {
		names = append(names, net.Name(v))
		longest = max(longest, len(net.Name(v)))
	}
	names = append(names, fmt.Sprintf("%*s", longest+1, "+")) // longer than any name there is
	edges := append(make([]graphio.Edge, 0, net.Size()+n), net.EdgeList()...)
	for v := range n {
		edges = append(edges, graphio.Edge{From: int32(v), To: int32(n), Length: length, Weight: 1 / length})
	}
	return graphio.NewNetwork(names, edges)
}

// Size is the number of values of a routed sample: the edges, those to the
// extra node included.
func (c *Circuit) Size() int { return len(c.length) }

// Steps is the number of steps a solve makes.
func (c *Circuit) Steps() int { return c.steps }

// Length is the length of edge e, in the order of Route's values.
func (c *Circuit) Length(e int) float64 { return c.length[e] }

package graphio

import (
	"fmt"
	"math"
	"sync"
)

// An Edge joins two nodes. Length > 0 is the ground distance along it, Weight
// > 0 its affinity. A one-way edge can be travelled From → To only; any other
// both ways at the same length.
type Edge struct {
	From, To       int32
	Length, Weight float64
	OneWay         bool
}

// An Arc is an edge as seen from one of its ends: the node at the other end and
// the edge's number.
type Arc struct {
	Node, Edge int32
}

// A Network is a set of named nodes and the edges between them. It does not
// change once made, so any number of goroutines may read it. It has no
// self-loops, and no two edges that serve the same direction between the same
// nodes.
//
// As a gonum graph (see Node, From, Weight, …) it is the network without its
// directions; AsDirected is the view that honours them.
//
// Memory: 32 bytes an edge, 50 to 80 bytes and the name a node, and 8 bytes for
// every end of an edge (three times that where some edge is one-way).
type Network struct {
	names    *nameTable
	edges    []Edge
	all      adjacency
	out, in  adjacency // the same as all where no edge is one-way
	directed bool
	parts    *components

	x, y       []float64 // nil without coordinates
	geographic bool
	district   []string // nil without districts
}

// adjacency is a compressed list of arcs: those of node v are
// arc[start[v]:start[v+1]].
type adjacency struct {
	start []int
	arc   []Arc
}

// NewNetwork makes a network of the named nodes and the edges between them.
// It takes both slices over. Errors: Faults for names that are empty, too long,
// not UTF-8 or stand twice, edges to no node, self-loops, duplicates, and lengths or weights that
// are not positive and finite. Cost: O(nodes + edges).
func NewNetwork(names []string, edges []Edge) (*Network, error) {
	if len(names) > math.MaxInt32 || len(edges) > math.MaxInt32 {
		return nil, fmt.Errorf("a network of %d nodes and %d edges is past the limit of 2^31-1 of each", len(names), len(edges))
	}
	var faults FaultList
	for v, name := range names {
		if found, want := nameFault([]byte(name), "node"); found != "" {
			faults.Add(Fault{Found: fmt.Sprintf("node number %d: %s", v+1, found), Want: want})
		}
	}
	n := &Network{edges: edges}
	n.names = tableOf(names, func(v int) {
		faults.Add(Fault{Found: fmt.Sprintf("node %q twice", names[v]), Want: "each node once"})
	})
	for i, e := range edges {
		if what, want := n.edgeFault(e); what != "" {
			faults.Add(Fault{Found: fmt.Sprintf("edge number %d: %s", i+1, what), Want: want})
		}
	}
	if err := faults.Err(); err != nil {
		return nil, err
	}
	n.connect()
	for _, d := range n.duplicates() {
		e := edges[d.again]
		faults.Add(Fault{
			Found: fmt.Sprintf("edge number %d joins %q and %q, as edge number %d does", d.again+1, n.Name(int(e.From)), n.Name(int(e.To)), d.first+1),
			Want:  "each edge once",
		})
	}
	if err := faults.Err(); err != nil {
		return nil, err
	}
	return n, nil
}

func (n *Network) edgeFault(e Edge) (found, want string) {
	order := int32(n.Order())
	switch {
	case e.From < 0 || e.From >= order || e.To < 0 || e.To >= order:
		return fmt.Sprintf("joins nodes %d and %d of %d", e.From, e.To, order), "nodes from 0 to one less than their number"
	case e.From == e.To:
		return fmt.Sprintf("a self-loop at %q", n.Name(int(e.From))), "two different ends"
	case !positive(e.Length):
		return fmt.Sprintf("length %v", e.Length), "a finite length above 0"
	case !positive(e.Weight):
		return fmt.Sprintf("weight %v", e.Weight), "a finite weight above 0"
	}
	return "", ""
}

func positive(x float64) bool { return x > 0 && x <= math.MaxFloat64 }

// connect fills the three adjacencies from the edges.
func (n *Network) connect() {
	n.parts = &components{}
	for _, e := range n.edges {
		n.directed = n.directed || e.OneWay
	}
	all := func(Edge) (bool, bool) { return true, true }
	n.all = n.adjacency(all)
	n.out, n.in = n.all, n.all
	if n.directed {
		n.out = n.adjacency(func(e Edge) (bool, bool) { return true, !e.OneWay })
		n.in = n.adjacency(func(e Edge) (bool, bool) { return !e.OneWay, true })
	}
}

// adjacency lists each edge at the ends that keep names (from, to), in edge
// order within each node.
func (n *Network) adjacency(keep func(Edge) (atFrom, atTo bool)) adjacency {
	a := adjacency{start: make([]int, n.Order()+1)}
	for _, e := range n.edges {
		f, t := keep(e)
		if f {
			a.start[e.From+1]++
		}
		if t {
			a.start[e.To+1]++
		}
	}
	for v := range n.Order() {
		a.start[v+1] += a.start[v]
	}
	a.arc = make([]Arc, a.start[n.Order()])
	next := make([]int, n.Order())
	copy(next, a.start)
	for i, e := range n.edges {
		f, t := keep(e)
		if f {
			a.arc[next[e.From]] = Arc{Node: e.To, Edge: int32(i)}
			next[e.From]++
		}
		if t {
			a.arc[next[e.To]] = Arc{Node: e.From, Edge: int32(i)}
			next[e.To]++
		}
	}
	return a
}

type duplicate struct{ first, again int32 }

// duplicates finds edges that serve a direction another edge serves already.
// Cost: O(edges), whatever the degrees.
func (n *Network) duplicates() []duplicate {
	var found []duplicate
	seen := make([]int32, n.Order()) // edge + 1 by which the node was reached from v
	for v := range n.Order() {
		arcs := n.OutArcs(v)
		for _, a := range arcs {
			if s := seen[a.Node]; s != 0 && s-1 != a.Edge {
				// An edge that runs both ways is met from both ends: report it once.
				d := duplicate{min(s-1, a.Edge), max(s-1, a.Edge)}
				if e, f := n.edges[d.first], n.edges[d.again]; e.OneWay || f.OneWay || int(min(e.From, e.To)) == v {
					found = append(found, d)
				}
				continue
			}
			seen[a.Node] = a.Edge + 1
		}
		for _, a := range arcs {
			seen[a.Node] = 0
		}
	}
	return found
}

// Order is the number of nodes.
func (n *Network) Order() int { return len(n.names.names) }

// Size is the number of edges.
func (n *Network) Size() int { return len(n.edges) }

// Directed reports whether some edge is one-way.
func (n *Network) Directed() bool { return n.directed }

// Name is the name of node v.
func (n *Network) Name(v int) string { return n.names.names[v] }

// Index is the number of the named node, and whether there is one.
func (n *Network) Index(name string) (v int, ok bool) {
	i := n.names.findString(name)
	return max(0, int(i)), i >= 0
}

// EdgeList is every edge, in order. It is the network's own: do not change it.
func (n *Network) EdgeList() []Edge { return n.edges }

// Arcs lists the edges at node v whatever their direction.
func (n *Network) Arcs(v int) []Arc { return n.all.arc[n.all.start[v]:n.all.start[v+1]] }

// OutArcs lists the edges by which v can be left.
func (n *Network) OutArcs(v int) []Arc { return n.out.arc[n.out.start[v]:n.out.start[v+1]] }

// InArcs lists the edges by which v can be reached.
func (n *Network) InArcs(v int) []Arc { return n.in.arc[n.in.start[v]:n.in.start[v+1]] }

// SetPlaces gives each node its coordinates: x and y in any planar unit, or
// longitude and latitude in degrees where geographic. Only for use before the
// network is shared. It takes both slices over.
func (n *Network) SetPlaces(x, y []float64, geographic bool) error {
	if len(x) != n.Order() || len(y) != n.Order() {
		return fmt.Errorf("%d and %d coordinates for %d nodes", len(x), len(y), n.Order())
	}
	n.x, n.y, n.geographic = x, y, geographic
	return nil
}

// Places returns the coordinates of all nodes (nil where there are none), and
// whether they are longitude and latitude in degrees.
func (n *Network) Places() (x, y []float64, geographic bool) { return n.x, n.y, n.geographic }

// SetDistricts names the district of each node; "" is none. Only for use
// before the network is shared. It takes the slice over.
func (n *Network) SetDistricts(district []string) error {
	if len(district) != n.Order() {
		return fmt.Errorf("%d districts for %d nodes", len(district), n.Order())
	}
	n.district = district
	return nil
}

// Districts names the district of each node, or is nil where there are none.
func (n *Network) Districts() []string { return n.district }

// components are the connected parts of a network, once asked for.
type components struct {
	find  sync.Once
	label []int32
	count int
}

// Components numbers the connected parts of the network, directions left
// aside, by their first node, and says how many there are. label is the
// network's own: do not change it. Cost: O(nodes + edges) the first time.
func (n *Network) Components() (label []int32, count int) {
	n.parts.find.Do(func() { n.parts.label, n.parts.count = n.findComponents() })
	return n.parts.label, n.parts.count
}

func (n *Network) findComponents() (label []int32, count int) {
	label = make([]int32, n.Order())
	for v := range label {
		label[v] = -1
	}
	var stack []int32
	for v := range label {
		if label[v] >= 0 {
			continue
		}
		label[v] = int32(count)
		stack = append(stack[:0], int32(v))
		for len(stack) > 0 {
			u := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			for _, a := range n.Arcs(int(u)) {
				if label[a.Node] < 0 {
					label[a.Node] = int32(count)
					stack = append(stack, a.Node)
				}
			}
		}
		count++
	}
	return label, count
}

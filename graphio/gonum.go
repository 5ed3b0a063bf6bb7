package graphio

import (
	"fmt"
	"sort"

	"gonum.org/v1/gonum/graph"
	"gonum.org/v1/gonum/graph/iterator"
	"gonum.org/v1/gonum/graph/simple"
)

var (
	_ graph.WeightedUndirected = (*Network)(nil)
	_ graph.WeightedDirected   = directedView{}
)

// Node is node number id as a gonum node, nil where there is none.
func (n *Network) Node(id int64) graph.Node {
	if id < 0 || id >= int64(n.Order()) {
		return nil
	}
	return simple.Node(id)
}

// Nodes iterates over all nodes in order.
func (n *Network) Nodes() graph.Nodes {
	if n.Order() == 0 {
		return graph.Empty
	}
	return iterator.NewImplicitNodes(0, n.Order(), func(id int) graph.Node { return simple.Node(id) })
}

// From iterates over the neighbours of a node, directions left aside.
func (n *Network) From(id int64) graph.Nodes { return n.neighbours(id, n.Arcs) }

// neighbours lists each node once though two one-way edges may lead to it.
func (n *Network) neighbours(id int64, arcs func(int) []Arc) graph.Nodes {
	if n.Node(id) == nil {
		return graph.Empty
	}
	seen := make(map[int32]bool)
	var nodes []graph.Node
	for _, a := range arcs(int(id)) {
		if !seen[a.Node] {
			seen[a.Node] = true
			nodes = append(nodes, simple.Node(a.Node))
		}
	}
	if nodes == nil {
		return graph.Empty
	}
	return iterator.NewOrderedNodes(nodes)
}

// HasEdgeBetween reports whether an edge joins the two nodes.
func (n *Network) HasEdgeBetween(xid, yid int64) bool { return n.WeightedEdgeBetween(xid, yid) != nil }

// Edge is the edge between two nodes, whatever its direction, or nil.
func (n *Network) Edge(uid, vid int64) graph.Edge { return n.EdgeBetween(uid, vid) }

// EdgeBetween is the edge between two nodes, whatever its direction, or nil.
func (n *Network) EdgeBetween(xid, yid int64) graph.Edge {
	if e := n.WeightedEdgeBetween(xid, yid); e != nil {
		return e
	}
	return nil
}

// WeightedEdge is WeightedEdgeBetween.
func (n *Network) WeightedEdge(uid, vid int64) graph.WeightedEdge {
	return n.WeightedEdgeBetween(uid, vid)
}

// WeightedEdgeBetween is the edge between two nodes, whatever its direction,
// or nil. Its gonum weight is its length: what gonum's shortest paths add up.
// Of two one-way edges that differ in length it is the shorter.
func (n *Network) WeightedEdgeBetween(xid, yid int64) graph.WeightedEdge {
	return n.edgeAmong(n.Arcs, xid, yid)
}

func (n *Network) edgeAmong(arcs func(int) []Arc, xid, yid int64) graph.WeightedEdge {
	if n.Node(xid) == nil || n.Node(yid) == nil {
		return nil
	}
	var found graph.WeightedEdge
	for _, a := range arcs(int(xid)) {
		if int64(a.Node) == yid && (found == nil || n.edges[a.Edge].Length < found.Weight()) {
			found = simple.WeightedEdge{F: simple.Node(xid), T: simple.Node(yid), W: n.edges[a.Edge].Length}
		}
	}
	return found
}

// Weight is the length of the edge between two nodes; 0 for a node and itself.
// ok is false where no edge joins them.
func (n *Network) Weight(xid, yid int64) (w float64, ok bool) {
	if xid == yid && n.Node(xid) != nil {
		return 0, true
	}
	if e := n.WeightedEdgeBetween(xid, yid); e != nil {
		return e.Weight(), true
	}
	return 0, false
}

// AsDirected is the network as a gonum graph that honours one-way edges; an
// edge that runs both ways is two of its edges.
func (n *Network) AsDirected() graph.WeightedDirected { return directedView{n} }

// directedView overrides whatever of Network depends on direction.
type directedView struct{ *Network }

func (d directedView) From(id int64) graph.Nodes { return d.neighbours(id, d.OutArcs) }
func (d directedView) To(id int64) graph.Nodes   { return d.neighbours(id, d.InArcs) }

func (d directedView) WeightedEdge(uid, vid int64) graph.WeightedEdge {
	return d.edgeAmong(d.OutArcs, uid, vid)
}

func (d directedView) Edge(uid, vid int64) graph.Edge {
	if e := d.WeightedEdge(uid, vid); e != nil {
		return e
	}
	return nil
}

func (d directedView) HasEdgeFromTo(uid, vid int64) bool { return d.WeightedEdge(uid, vid) != nil }

func (d directedView) Weight(xid, yid int64) (w float64, ok bool) {
	if xid == yid && d.Node(xid) != nil {
		return 0, true
	}
	if e := d.WeightedEdge(xid, yid); e != nil {
		return e.Weight(), true
	}
	return 0, false
}

// FromGraph makes a network of any gonum weighted graph. Edge weights become
// lengths and affinities 1/length. The edges of a graph.Directed are one-way;
// two opposite ones of the same length become one that runs both ways. Nodes
// are taken in the order of their numbers and named by them, or by String
// where a node has that method. Cost: O(nodes log nodes + edges log edges).
func FromGraph(g graph.Weighted) (*Network, error) {
	nodes := graph.NodesOf(g.Nodes())
	sort.Slice(nodes, func(i, j int) bool { return nodes[i].ID() < nodes[j].ID() })
	at := make(map[int64]int32, len(nodes))
	names := make([]string, len(nodes))
	for i, v := range nodes {
		at[v.ID()] = int32(i)
		names[i] = fmt.Sprint(v.ID())
		if s, ok := v.(fmt.Stringer); ok {
			names[i] = s.String()
		}
	}
	directed, _ := g.(graph.Directed)
	var edges []Edge
	for i, u := range nodes {
		to := graph.NodesOf(g.From(u.ID()))
		sort.Slice(to, func(i, j int) bool { return to[i].ID() < to[j].ID() })
		for _, v := range to {
			e := Edge{From: int32(i), To: at[v.ID()], OneWay: directed != nil}
			e.Length, _ = g.Weight(u.ID(), v.ID())
			e.Weight = 1 / e.Length
			back := false
			if directed != nil && directed.HasEdgeFromTo(v.ID(), u.ID()) {
				w, _ := g.Weight(v.ID(), u.ID())
				back = w == e.Length
			}
			if back || directed == nil {
				e.OneWay = false
				if e.To < e.From {
					continue // met from the other end
				}
			}
			edges = append(edges, e)
		}
	}
	return NewNetwork(names, edges)
}

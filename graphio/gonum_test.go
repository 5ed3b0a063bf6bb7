package graphio_test

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/graph"
	"gonum.org/v1/gonum/graph/path"
	"gonum.org/v1/gonum/graph/simple"
	"gonum.org/v1/gonum/graph/testgraph"
	"gonum.org/v1/gonum/graph/topo"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"example.org/barrow/graphio/shortest"
)

// buildable makes a Network of a case of gonum's conformance tests: nodes are
// numbered from 0, and what a Network cannot hold (loops, edges that stand
// twice, lengths that are not above 0) makes the case not ok.
func buildable(directed bool) testgraph.Builder {
	return func(nodes []graph.Node, lines []testgraph.WeightedLine, _, _ float64) (graph.Graph, []graph.Node, []testgraph.Edge, float64, float64, bool) {
		at := map[int64]int32{}
		var names []string
		add := func(v graph.Node) int32 {
			if _, known := at[v.ID()]; !known {
				at[v.ID()] = int32(len(names))
				names = append(names, string(rune('A'+len(names))))
			}
			return at[v.ID()]
		}
		for _, v := range nodes {
			add(v)
		}
		var edges []graphio.Edge
		var kept []testgraph.Edge
		for _, l := range lines {
			e := graphio.Edge{From: add(l.From()), To: add(l.To()), Length: l.Weight(), OneWay: directed}
			e.Weight = 1 / e.Length
			edges = append(edges, e)
			kept = append(kept, simple.WeightedEdge{F: simple.Node(e.From), T: simple.Node(e.To), W: e.Length})
		}
		net, err := graphio.NewNetwork(names, edges)
		if err != nil {
			return nil, nil, nil, 0, 0, false
		}
		var all []graph.Node
		for v := range names {
			all = append(all, simple.Node(v))
		}
		if directed {
			return net.AsDirected(), all, kept, 0, math.NaN(), true
		}
		return net, all, kept, 0, math.NaN(), true
	}
}

// gonum's own tests of what a graph must do.
func TestIsAGonumGraph(t *testing.T) {
	for _, directed := range []bool{false, true} {
		b := buildable(directed)
		testgraph.ReturnAllNodes(t, b, true)
		testgraph.ReturnNodeSlice(t, b, true)
		testgraph.NodeExistence(t, b)
		testgraph.EdgeExistence(t, b, !directed)
		testgraph.ReturnAdjacentNodes(t, b, true, !directed)
		built := 0
		for seed := range 3 {
			net := graphiotest.Grid(2+seed, 3, uint64(seed))
			if g, _, _, _, _, ok := b(nil, weightedLines(net), 0, 0); ok && g != nil {
				built++
			}
		}
		if built != 3 {
			t.Errorf("directed %v: %d of 3 networks could be built", directed, built)
		}
	}
}

func weightedLines(net *graphio.Network) []testgraph.WeightedLine {
	var lines []testgraph.WeightedLine
	for i, e := range net.EdgeList() {
		lines = append(lines, weightedLine{simple.Node(e.From), simple.Node(e.To), int64(i), e.Length})
	}
	return lines
}

type weightedLine struct {
	from, to graph.Node
	id       int64
	weight   float64
}

func (l weightedLine) From() graph.Node         { return l.from }
func (l weightedLine) To() graph.Node           { return l.to }
func (l weightedLine) ID() int64                { return l.id }
func (l weightedLine) Weight() float64          { return l.weight }
func (l weightedLine) ReversedEdge() graph.Edge { return weightedLine{l.to, l.from, l.id, l.weight} }
func (l weightedLine) ReversedLine() graph.Line { return weightedLine{l.to, l.from, l.id, l.weight} }

// gonum's shortest paths on a Network are those of package shortest, with and
// without directions; its components are Network's own.
func TestGonumAlgorithms(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		for _, directed := range []bool{false, true} {
			var g graph.Graph = c.Net
			dir := shortest.Either
			if directed {
				g, dir = c.Net.AsDirected(), shortest.Forward
			}
			tree := path.DijkstraFrom(simple.Node(0), g)
			dist := make([]float64, c.Net.Order())
			for v := range dist {
				dist[v] = math.Inf(1)
			}
			dist[0] = 0
			shortest.Sweep(c.Net, dist, dir, nil)
			for v, d := range dist {
				if want := tree.WeightTo(int64(v)); math.Abs(d-want) > 1e-12*want && d != want {
					t.Errorf("%s, directed %v: distance to %d is %v, gonum has %v", c.Name, directed, v, d, want)
				}
			}
		}
		if _, count := c.Net.Components(); count != len(topo.ConnectedComponents(graph.Undirect{G: c.Net.AsDirected()})) {
			t.Errorf("%s: %d components, not as gonum counts", c.Name, count)
		}
	}
}

// A network made of gonum's view of another is that network.
func TestFromGraph(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		var g graph.Weighted = c.Net
		if c.Net.Directed() {
			g = c.Net.AsDirected()
		}
		again, err := graphio.FromGraph(g)
		if err != nil {
			t.Errorf("%s: %v", c.Name, err)
			continue
		}
		if got, want := sortedEdges(again), sortedEdges(c.Net); !slices.Equal(got, want) {
			t.Errorf("%s: %d edges, want %d, or others", c.Name, len(got), len(want))
		}
	}
	g := simple.NewWeightedDirectedGraph(0, math.Inf(1))
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(7), T: simple.Node(3), W: 2})
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(3), T: simple.Node(7), W: 2})
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(7), T: simple.Node(9), W: 5})
	net, err := graphio.FromGraph(g)
	if err != nil {
		t.Fatal(err)
	}
	if got, want := listed(net), "3 7 9 | 3-7 2 0.5 | 7>9 5 0.2"; got != want {
		t.Errorf("got %s, want %s", got, want)
	}
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(9), T: simple.Node(3), W: -1})
	if _, err := graphio.FromGraph(g); err == nil {
		t.Error("a length below 0 is accepted")
	}
}

// sortedEdges has each edge once, ends in order where it runs both ways, and
// two opposite one-way edges of one length as one.
func sortedEdges(net *graphio.Network) []graphio.Edge {
	var list []graphio.Edge
	for _, e := range net.EdgeList() {
		e.Weight = 1 / e.Length
		if !e.OneWay && e.From > e.To {
			e.From, e.To = e.To, e.From
		}
		list = append(list, e)
	}
	slices.SortFunc(list, func(a, b graphio.Edge) int {
		if a.From != b.From {
			return int(a.From - b.From)
		}
		return int(a.To - b.To)
	})
	return list
}

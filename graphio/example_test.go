package graphio_test

import (
	"fmt"
	"log"
	"os"
	"path/filepath"
	"strings"

	"gonum.org/v1/gonum/graph/path"
	"gonum.org/v1/gonum/graph/simple"

	"example.org/barrow/graphio"
)

// A street of three corners, and the cars there at two times of day.
func Example() {
	dir, err := os.MkdirTemp("", "street")
	if err != nil {
		log.Fatal(err)
	}
	defer os.RemoveAll(dir)
	edges, counts := filepath.Join(dir, "edges.csv"), filepath.Join(dir, "counts.csv")
	os.WriteFile(edges, []byte("from,to,length\nmill,bridge,120\nbridge,quay,80\n"), 0o644)
	os.WriteFile(counts, []byte("sample,node,value\nmorning,mill,30\nmorning,quay,10\nevening,quay,25\n"), 0o644)

	net, _, err := graphio.ReadNetwork(edges, "", graphio.NetworkOptions{})
	if err != nil {
		log.Fatal(err)
	}
	samples, _, err := graphio.ReadSamples(counts, net, graphio.SampleOptions{})
	if err != nil {
		log.Fatal(err)
	}
	fmt.Println(net.Order(), "nodes,", net.Size(), "edges")
	for i := range samples.Len() {
		s := samples.At(i)
		fmt.Println(s.Name, s.Total(), "at", len(s.Nodes), "nodes")
	}
	// Output:
	// 3 nodes, 2 edges
	// morning 40 at 2 nodes
	// evening 25 at 1 nodes
}

// Faults say where, what, and what would do.
func ExampleReadNetwork_faults() {
	dir, err := os.MkdirTemp("", "street")
	if err != nil {
		log.Fatal(err)
	}
	defer os.RemoveAll(dir)
	path := filepath.Join(dir, "edges.csv")
	os.WriteFile(path, []byte("from,to,length\nmill,bridge,-120\nbridge,bridge,80\n"), 0o644)
	_, _, err = graphio.ReadNetwork(path, "", graphio.NetworkOptions{})
	fmt.Println(strings.ReplaceAll(err.Error(), path, "edges.csv"))
	// Output:
	// edges.csv, line 2, column 3: length "-120"; want a finite number above 0
	// edges.csv, line 3, column 2: an edge from node "bridge" to itself; want two different ends, or no such row
}

// Any weighted graph of gonum becomes a network, and a network is one.
func ExampleFromGraph() {
	g := simple.NewWeightedUndirectedGraph(0, 0)
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(1), T: simple.Node(2), W: 1.5})
	g.SetWeightedEdge(simple.WeightedEdge{F: simple.Node(2), T: simple.Node(3), W: 2})
	net, err := graphio.FromGraph(g)
	if err != nil {
		log.Fatal(err)
	}
	first, _ := net.Index("1")
	last, _ := net.Index("3")
	fmt.Println(path.DijkstraFrom(net.Node(int64(first)), net).WeightTo(int64(last)))
	// Output: 3.5
}

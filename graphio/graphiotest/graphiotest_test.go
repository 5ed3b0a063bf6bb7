package graphiotest_test

import (
	"fmt"
	"math"
	"reflect"
	"sort"
	"testing"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"example.org/barrow/graphio/shortest"
)

func ExampleCases() {
	for _, c := range graphiotest.Cases()[:3] {
		fmt.Println(c.Name, c.Net.Order(), c.Net.Size(), c.P.Total() == c.Q.Total())
	}
	// Output:
	// one edge 2 1 true
	// path 30 29 true
	// cycle 31 31 true
}

// The 10000th value from seed 1 is 1043618065: Park and Miller 1988, value
// from memory.
func TestParkMiller(t *testing.T) {
	s := graphiotest.ParkMiller(1)
	last := uint64(0)
	for range 10000 {
		last = s.Next()
	}
	if last != 1043618065 {
		t.Errorf("the 10000th value is %d, not 1043618065", last)
	}
}

// Sums as LEMON's run found them (see Instances); the distance of the tree is
// recomputed by its closed form, Σ length·|mass below| (Evans and Matsen 2012).
func TestInstances(t *testing.T) {
	for _, c := range graphiotest.Instances() {
		lengths := 0.0
		for _, e := range c.Net.EdgeList() {
			lengths += e.Length
		}
		if lengths != c.Lengths || c.A.Total() != c.Mass || c.B.Total() != c.Mass {
			t.Errorf("%s: lengths %v, masses %v and %v; want %v and %v", c.Name, lengths, c.A.Total(), c.B.Total(), c.Lengths, c.Mass)
		}
		if c.Net.Size() == c.Net.Order()-1 {
			below := make([]float64, c.Net.Order())
			c.A.Dense(below, 1)
			c.B.Dense(below, -1)
			w := 0.0
			for i := c.Net.Size() - 1; i >= 0; i-- {
				e := c.Net.EdgeList()[i]
				w += e.Length * math.Abs(below[e.To])
				below[e.From] += below[e.To]
			}
			if w != c.W {
				t.Errorf("%s: closed form %v, want %v", c.Name, w, c.W)
			}
		}
	}
}

// Each case keeps what Case promises.
func TestCases(t *testing.T) {
	names := make(map[string]bool)
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		if names[c.Name] {
			t.Errorf("%s twice", c.Name)
		}
		names[c.Name] = true
		p, q := c.P.Total(), c.Q.Total()
		if p != q || p <= 0 || !c.P.Counts() || !c.Q.Counts() {
			t.Errorf("%s: totals %v and %v", c.Name, p, q)
		}
		if _, err := graphio.NewSamples(c.Net.Order(), []graphio.Sample{c.P, c.Q}); err != nil {
			t.Errorf("%s: %v", c.Name, err)
		}
		for _, dir := range []shortest.Direction{shortest.Forward, shortest.Backward} {
			for v, d := range shortest.From(c.Net, 0, dir) {
				if math.IsInf(d, 1) {
					t.Errorf("%s: node 0 and node %d do not reach each other", c.Name, v)
				}
			}
		}
	}
	for _, c := range graphiotest.Directed() {
		if !c.Net.Directed() {
			t.Errorf("%s has no one-way edge", c.Name)
		}
	}
}

func connected(net *graphio.Network) bool {
	_, count := net.Components()
	return count == 1
}

func TestGenerators(t *testing.T) {
	makers := map[string]func(seed uint64) *graphio.Network{
		"road":       func(s uint64) *graphio.Network { return graphiotest.Road(5000, s) },
		"tiny road":  func(s uint64) *graphio.Network { return graphiotest.Road(3, s) },
		"grid":       func(s uint64) *graphio.Network { return graphiotest.Grid(30, 40, s) },
		"knn":        func(s uint64) *graphio.Network { return graphiotest.KNN(3000, 2, 4, s) },
		"knn in 5":   func(s uint64) *graphio.Network { return graphiotest.KNN(500, 5, 3, s) },
		"tiny knn":   func(s uint64) *graphio.Network { return graphiotest.KNN(3, 2, 9, s) },
		"scale-free": func(s uint64) *graphio.Network { return graphiotest.ScaleFree(2000, 3, s) },
	}
	for name, make := range makers {
		a, b, c := make(4), make(4), make(5)
		if !reflect.DeepEqual(a.EdgeList(), b.EdgeList()) {
			t.Errorf("%s: the same seed made two networks", name)
		}
		if reflect.DeepEqual(a.EdgeList(), c.EdgeList()) {
			t.Errorf("%s: two seeds made one network", name)
		}
		if !connected(a) || !connected(c) {
			t.Errorf("%s is not connected", name)
		}
	}
}

// Road has the shape of streets: 1.6 edges a node, dead ends, bends, crossings,
// and no length shorter than the straight line (to the centimetre).
func TestRoadIsStreetLike(t *testing.T) {
	net := graphiotest.Road(10000, 1)
	if ratio := float64(net.Size()) / float64(net.Order()); math.Abs(ratio-1.6) > 0.01 {
		t.Errorf("%v edges a node", ratio)
	}
	degrees := make(map[int]int)
	for v := range net.Order() {
		degrees[len(net.Arcs(v))]++
	}
	if degrees[0] > 0 || degrees[1] < 100 || degrees[2] < 1000 || degrees[4] < 1000 {
		t.Errorf("degrees %v", degrees)
	}
	x, y, _ := net.Places()
	for _, e := range net.EdgeList() {
		if line := math.Hypot(x[e.From]-x[e.To], y[e.From]-y[e.To]); e.Length < line-0.006 || e.Length > 1.1*line+0.006 {
			t.Fatalf("length %v over a line of %v", e.Length, line)
		}
	}
}

// The neighbours found in cells are those of a plain search.
func TestKNNAgainstPlainSearch(t *testing.T) {
	const k = 4
	for seed := range uint64(20) {
		net := graphiotest.KNN(300, 2, k, seed)
		x, y, _ := net.Places()
		for v := range net.Order() {
			var gaps []float64
			for u := range net.Order() {
				if u != v {
					gaps = append(gaps, math.Hypot(x[u]-x[v], y[u]-y[v]))
				}
			}
			sort.Float64s(gaps)
			near := 0
			for _, a := range net.Arcs(v) {
				if net.EdgeList()[a.Edge].Length <= gaps[k-1]*(1+1e-12) {
					near++
				}
			}
			if near != k {
				t.Fatalf("seed %d: node %d has %d of its %d nearest", seed, v, near, k)
			}
		}
	}
}

func TestSamples(t *testing.T) {
	net := graphiotest.Road(2000, 3)
	smooth, sparse := graphiotest.Smooth(net, 1), graphiotest.Sparse(net, 50, 1)
	counts := graphiotest.Counts(smooth, 100000, 1)
	if len(smooth.Nodes) != 2000 || len(sparse.Nodes) != 50 || counts.Total() != 100000 || !counts.Counts() {
		t.Errorf("%d, %d entries, %v counts", len(smooth.Nodes), len(sparse.Nodes), counts.Total())
	}
	all := graphiotest.Samples(net, smooth, sparse, counts, graphiotest.Point(7))
	if got := all.Names(); !reflect.DeepEqual(got, []string{"s0", "s1", "s2", "s3"}) {
		t.Errorf("names %v", got)
	}
	// Pearson's χ² of the counts against what they were drawn from: its mean is
	// the entries less one, its standard deviation √(2·that); allow five, and
	// half as much again because far nodes expect less than one count.
	chi, share := 0.0, smooth.Share()
	got := make([]float64, net.Order())
	counts.Dense(got, 1)
	for i, v := range share.Nodes {
		want := 100000 * share.Values[i]
		chi += (got[v] - want) * (got[v] - want) / want
	}
	if free := float64(len(smooth.Nodes) - 1); math.Abs(chi-free) > 7.5*math.Sqrt(2*free) {
		t.Errorf("χ² %v with %v degrees of freedom", chi, free)
	}
}

package exact_test

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// read reads a network and its samples; without samples they are nil.
func read(t *testing.T, edges, samples string, directed bool) (*graphio.Network, *graphio.Samples) {
	t.Helper()
	net, _, err := graphio.ReadNetwork(edges, "", graphio.NetworkOptions{Directed: directed})
	if err != nil {
		t.Fatal(err)
	}
	if samples == "" {
		return net, nil
	}
	list, _, err := graphio.ReadSamples(samples, net, graphio.SampleOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return net, list
}

func named(t *testing.T, samples *graphio.Samples, name string) graphio.Sample {
	t.Helper()
	i, ok := samples.Index(name)
	if !ok {
		t.Fatalf("no sample %q", name)
	}
	return samples.At(i)
}

func point(t *testing.T, net *graphio.Network, name string) graphio.Sample {
	t.Helper()
	v, ok := net.Index(name)
	if !ok {
		t.Fatalf("no node %q", name)
	}
	return graphiotest.Point(v)
}

// IEEE 14-bus test case, length = reactance: data seen in MATPOWER, case14.m;
// values computed by HiGHS (scipy 1.10.1), checked as a 2 × 14 table.
func TestPowerGrid(t *testing.T) {
	net, samples := read(t, "../testdata/ieee14_edges.csv", "../testdata/ieee14_samples.csv", false)
	r := solve(t, net, named(t, samples, "generation"), named(t, samples, "load"), exact.Options{Shares: true})
	if d := r.Distance(); math.Abs(d-0.351055581032889) > 1e-15*4 {
		t.Errorf("from generation to load %v, want 0.351055581032889", d)
	}
	for to, want := range map[string]float64{"14": 0.825, "3": 0.25714} {
		if d := solve(t, net, point(t, net, "1"), point(t, net, to), exact.Options{}).Distance(); math.Abs(d-want) > 1e-15 {
			t.Errorf("from bus 1 to %s: %v, want %v", to, d, want)
		}
	}
}

// NETGEN problem 143 (Klingman, Napier and Stutz 1974), capacities not
// binding: optimum seen in the GLPK 5.0 graph manual, §2.1.8; LEMON 1.3.1 and
// HiGHS (scipy 1.10.1) agree.
func TestNetgen(t *testing.T) {
	net, samples := read(t, "../testdata/netgen143_edges.csv.gz", "../testdata/netgen143_samples.csv.gz", true)
	if net.Order() != 5000 || net.Size() != 25000 {
		t.Fatalf("%d nodes, %d arcs", net.Order(), net.Size())
	}
	r := solve(t, net, named(t, samples, "supply"), named(t, samples, "demand"), exact.Options{})
	if r.Distance() != 18586777 {
		t.Errorf("distance %v, want 18586777", r.Distance())
	}
}

// karate is the network of the file with every edge 1.
func karate(t *testing.T) *graphio.Network {
	t.Helper()
	text, err := os.ReadFile("../testdata/karate_edges.csv")
	if err != nil {
		t.Fatal(err)
	}
	var arcs []arc
	for _, line := range strings.Fields(string(text))[1:] {
		a := arc{length: 1}
		if _, err := fmt.Sscanf(line, "%d,%d", &a.from, &a.to); err != nil {
			t.Fatal(err)
		}
		arcs = append(arcs, a)
	}
	return undirected(34, arcs...)
}

// Karate club (Zachary 1977), every edge 1: the stationary distribution of the
// random walk (degree/156) against the even one, 1704/5304, computed by HiGHS
// (scipy 1.10.1).
func TestStationaryAgainstEven(t *testing.T) {
	net := karate(t)
	degree, even := make([]float64, net.Order()), ones(net.Order())
	for v := range degree {
		degree[v] = float64(len(net.Arcs(v)))
	}
	r := solve(t, net, masses(degree...), masses(even...), exact.Options{Shares: true})
	if d := r.Distance(); math.Abs(d-1704./5304) > 1e-15 {
		t.Errorf("distance %v, want %v", d, 1704./5304)
	}
}

// Sioux Falls (LeBlanc, Morlok and Pierskalla 1975, Transp. Res. 9:309–318; seen
// in the TransportationNetworks collection, which is not free to copy): read
// only where the set lies beside the repository.
func TestSiouxFalls(t *testing.T) {
	set := filepath.Join("..", "..", "shared", "data", "siouxfalls")
	if _, err := os.Stat(set); err != nil {
		t.Log("left out: the Sioux Falls set is not there")
		return
	}
	net, samples := read(t, filepath.Join(set, "edges.csv"), filepath.Join(set, "samples.csv"), false)

	// Largest and sum of all distances, computed by scipy 1.10.1 shortest_path.
	sum, largest := 0.0, 0.0
	solver, err := exact.NewSolver(net, exact.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for u := range net.Order() {
		for v := range net.Order() {
			r, err := solver.Solve(t.Context(), graphiotest.Point(u), graphiotest.Point(v))
			if err != nil {
				t.Fatal(err)
			}
			sum += r.Distance()
			largest = max(largest, r.Distance())
		}
	}
	if sum != 6254 || largest != 23 {
		t.Errorf("distances sum to %v and are up to %v, want 6254 and 23", sum, largest)
	}

	// Trips from zone 1 against those from zone 24, both as shares, and trips
	// out of every zone (hundreds) against trips into it, as amounts: two nearly
	// equal masses. Computed by HiGHS (scipy 1.10.1).
	r := solve(t, net, named(t, samples, "from1"), named(t, samples, "from24"), exact.Options{Shares: true})
	if d := r.Distance(); math.Abs(d-25146./6776) > 1e-14 {
		t.Errorf("from zone 1 to zone 24: %v, want %v", d, 25146./6776)
	}
	out, in := make([]float64, net.Order()), make([]float64, net.Order())
	for v := range net.Order() {
		trips := named(t, samples, "from"+net.Name(v))
		out[v] = trips.Total() / 100
		trips.Dense(in, 1./100)
	}
	for v := range in {
		in[v] = math.Round(in[v]) // whole hundreds
	}
	if d := solve(t, net, masses(out...), masses(in...), exact.Options{}).Distance(); d != 37 {
		t.Errorf("from trips out to trips in: %v, want 37", d)
	}
}

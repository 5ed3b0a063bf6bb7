package exact_test

import (
	"math"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// A reference is a pair of samples whose distance an outside source gives.
// Sources are named with how the value came from them: seen (read there),
// memory (known from the literature and recomputed), computed (by the program
// named).
type reference struct {
	name   string
	net    *graphio.Network
	p, q   graphio.Sample
	opt    exact.Options
	want   float64
	source string
}

// run solves every reference and compares to 1e-12 (relative, absolute below
// 1). On networks without directions it solves the way back too.
func run(t *testing.T, list []reference) {
	t.Helper()
	if len(list) == 0 {
		t.Fatal("no references")
	}
	for _, c := range list {
		ways := []exact.Result{*solve(t, c.net, c.p, c.q, c.opt)}
		if !c.net.Directed() {
			ways = append(ways, *solve(t, c.net, c.q, c.p, c.opt))
		}
		for _, r := range ways {
			if d := r.Distance(); !(math.Abs(d-c.want) <= 1e-12*max(1, c.want)) || !r.Optimal {
				t.Errorf("%s: distance %v, want %v (%s)", c.name, d, c.want, c.source)
			}
		}
	}
}

// An arc goes both ways unless the network is made by oneWay.
type arc struct {
	from, to int
	length   float64
}

func undirected(n int, arcs ...arc) *graphio.Network { return laid(n, false, arcs) }
func oneWay(n int, arcs ...arc) *graphio.Network     { return laid(n, true, arcs) }

func laid(n int, oneWay bool, arcs []arc) *graphio.Network {
	names := make([]string, n)
	for v := range names {
		names[v] = string(rune('a'+v/26)) + string(rune('a'+v%26))
	}
	edges := make([]graphio.Edge, len(arcs))
	for i, a := range arcs {
		edges[i] = graphio.Edge{From: int32(a.from), To: int32(a.to), Length: a.length, Weight: 1, OneWay: oneWay}
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(err)
	}
	return net
}

// masses is a sample of one value a node, from node 0 on.
func masses(values ...float64) graphio.Sample {
	s := graphio.Sample{Name: "by hand"}
	for v, x := range values {
		if x > 0 {
			s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, x)
		}
	}
	return s
}

// A table is a transportation problem: a cost for each source (row) and sink.
type table struct {
	name           string
	cost           [][]float64
	supply, demand []float64
	want           float64
	source         string
}

// reference makes a node of every row and column, and an arc of each cost plus
// extra. Without directions goods may zigzag unless extra is at least the
// largest cost; with extra the distance grows by extra times the mass.
func (c table) reference(extra float64, directed bool) reference {
	rows := len(c.supply)
	var arcs []arc
	for i, row := range c.cost {
		for j, cost := range row {
			arcs = append(arcs, arc{i, rows + j, cost + extra})
		}
	}
	p := masses(c.supply...)
	q := masses(append(make([]float64, rows), c.demand...)...)
	return reference{
		name: c.name, net: laid(rows+len(c.demand), directed, arcs),
		p: p, q: q, want: c.want + extra*p.Total(), source: c.source,
	}
}

func tables() []table {
	return []table{
		{
			// A dummy sink takes what is left, at 1 a unit: 50 are.
			"canning plants", [][]float64{{2.5, 1.7, 1.8, 1}, {2.5, 1.8, 1.4, 1}},
			[]float64{350, 600}, []float64{325, 300, 275, 50}, 153.675/0.09 + 50,
			"Dantzig 1963, Linear Programming and Extensions, §3-3; data and 153.675 (at 0.09 a unit) seen in GLPK 5.0, examples/transp.mod and its output",
		},
		{
			"NAG h03abc", [][]float64{{8, 8, 11}, {5, 8, 14}, {4, 3, 10}},
			[]float64{1, 5, 6}, []float64{4, 4, 4}, 77, "NAG manual, h03abc example program and results, seen",
		},
		{
			"two by three", [][]float64{{3, 5, 7}, {3, 2, 5}},
			[]float64{25, 35}, []float64{20, 30, 10}, 180, "Rosetta Code, Transportation problem, plan seen (20·3+5·7+30·2+5·5)",
		},
		{
			"steel mills", [][]float64{{39, 14, 11, 14, 16, 82, 8}, {27, 9, 12, 9, 26, 95, 17}, {24, 14, 17, 13, 28, 99, 20}},
			[]float64{1400, 2600, 2900}, []float64{900, 1200, 600, 400, 1700, 1100, 1000}, 196200,
			"Fourer, Gay and Kernighan, AMPL, transp.dat; data and optimum seen in JuMP, examples/transp.jl",
		},
		{
			"Powerco", [][]float64{{8, 6, 10, 9}, {9, 12, 13, 7}, {14, 9, 16, 5}},
			[]float64{35, 50, 40}, []float64{45, 20, 30, 30}, 1020, "Winston, Operations Research, memory; computed by HiGHS (scipy 1.10.1)",
		},
		{
			"SunRay", [][]float64{{10, 2, 20, 11}, {12, 7, 9, 20}, {4, 14, 16, 18}},
			[]float64{15, 25, 10}, []float64{5, 15, 15, 15}, 435, "Taha, Operations Research, memory; computed by HiGHS (scipy 1.10.1)",
		},
	}
}

func TestTransportationTables(t *testing.T) {
	var list []reference
	for _, c := range tables() {
		list = append(list, c.reference(0, true), c.reference(100, true), c.reference(100, false))
	}
	// A cost of zero stands only with something added to every arc.
	zero := table{
		"assignment", [][]float64{{4, 1, 3}, {2, 0, 5}, {3, 2, 2}}, []float64{1, 1, 1}, []float64{1, 1, 1}, 5,
		"scipy 1.10.1, linear_sum_assignment docstring, seen",
	}
	list = append(list, zero.reference(1, true), zero.reference(5, false))
	// The sixth sink is a dummy at no cost; at 1 a unit the distance grows by
	// the 900 that go there.
	pulp := "PuLP, A Transportation Problem, balanced table seen; computed by HiGHS (scipy 1.10.1)"
	beer := table{
		"breweries", [][]float64{{2, 4, 5, 2, 1, 1}, {3, 1, 3, 2, 3, 1}},
		[]float64{1000, 4000}, []float64{500, 900, 1800, 200, 700, 900}, 8600 + 900, pulp,
	}
	list = append(list, beer.reference(0, true), beer.reference(10, true), beer.reference(10, false))
	// Without directions goods may zigzag through the dummy: sources and dummy
	// are then one place, and each sink takes the cheaper arc.
	list = append(list, reference{
		name: "breweries, both ways", net: undirected(6, arc{0, 1, 2}, arc{0, 2, 1}, arc{0, 3, 3}, arc{0, 4, 2}, arc{0, 5, 1}),
		p: masses(5000 - 900), q: masses(0, 500, 900, 1800, 200, 700), want: 8400, source: pulp,
	})
	run(t, list)
}

// Arcs, capacities and costs of N3.
var capacitated = []struct {
	from, to       int
	capacity, cost float64
}{
	{1, 2, 15, 4}, {1, 3, 8, 4}, {2, 3, math.Inf(1), 2}, {2, 4, 4, 2}, {2, 5, 10, 6},
	{3, 4, 15, 1}, {3, 5, 5, 3}, {4, 5, math.Inf(1), 2}, {5, 3, 4, 1},
}

// withoutCapacities replaces each arc i → j of capacity u and cost c by a node
// k with demand u, extra supply u at j, and arcs i → k of cost c and j → k of
// cost 0 (Ahuja, Magnanti and Orlin 1993, §2.4, memory). With 1 more on both,
// which avoids lengths of 0, the distance grows by the sum of the u.
func withoutCapacities() reference {
	supply, demand := make([]float64, 5), make([]float64, 5)
	supply[0], demand[3], demand[4] = 20, 5, 15
	var arcs []arc
	for _, a := range capacitated {
		i, j := a.from-1, a.to-1
		if math.IsInf(a.capacity, 1) {
			arcs = append(arcs, arc{i, j, a.cost})
			continue
		}
		k := len(demand)
		demand = append(demand, a.capacity)
		supply[j] += a.capacity
		arcs = append(arcs, arc{i, k, a.cost + 1}, arc{j, k, 1})
	}
	for v := range supply {
		both := min(supply[v], demand[v])
		supply[v], demand[v] = supply[v]-both, demand[v]-both
	}
	return reference{
		name: "capacities", net: oneWay(len(demand), arcs...), p: masses(supply...), q: masses(demand...), want: 150 + 61,
		source: "Bradley, Hax and Magnanti 1977, data and 150 seen in networkx, test_mincost.py::test_digraph1; 211 computed by HiGHS (scipy 1.10.1)",
	}
}

func TestTransshipment(t *testing.T) {
	run(t, []reference{
		{
			name: "Widgetco", // node 6 takes the 90 left over, at 1 a unit
			net: oneWay(7, arc{0, 2, 8}, arc{0, 3, 13}, arc{0, 4, 25}, arc{0, 5, 28}, arc{1, 2, 15}, arc{1, 3, 12}, arc{1, 4, 26}, arc{1, 5, 25},
				arc{2, 3, 6}, arc{3, 2, 6}, arc{2, 4, 16}, arc{2, 5, 17}, arc{3, 4, 14}, arc{3, 5, 16}, arc{0, 6, 1}, arc{1, 6, 1}),
			p: masses(150, 200), q: masses(0, 0, 0, 0, 130, 130, 90), want: 6370 + 90,
			source: "Winston, Operations Research; data seen in hakank's transshipment.mzn; 6370 memory, computed by HiGHS (scipy 1.10.1)",
		},
		withoutCapacities(),
	})
}

// Integer instances that a portable generator makes; their source is beside
// the values.
func TestGeneratedInstances(t *testing.T) {
	var list []reference
	for _, c := range graphiotest.Instances() {
		list = append(list, reference{name: c.Name, net: c.Net, p: c.A, q: c.B, want: c.W, source: "graphiotest.Instances"})
	}
	run(t, list)
}

package exact_test

import (
	"fmt"
	"math"
	"runtime"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// ladder is a chain of triangles whose lengths double from one to the next, in
// the manner of the networks on which label-correcting methods take 2^k steps
// (Shier & Witzgall 1981) and the simplex for flows does by doubling costs and
// supplies (Zadeh 1973); by memory, not taken from a table. Steps that are
// longer come first where rising is false.
func ladder(t *testing.T, steps int, rising, oneWay bool) *graphio.Network {
	t.Helper()
	names := []string{"v0"}
	var edges []graphio.Edge
	for k := range steps {
		double := math.Ldexp(1, k)
		if !rising {
			double = math.Ldexp(1, steps-1-k)
		}
		from, mid, to := int32(2*k), int32(2*k+1), int32(2*k+2)
		names = append(names, fmt.Sprintf("w%d", k), fmt.Sprintf("v%d", k+1))
		for _, e := range []graphio.Edge{
			{From: from, To: mid, Length: double}, {From: mid, To: to, Length: double}, {From: from, To: to, Length: 3 * double},
		} {
			e.Weight, e.OneWay = 1/e.Length, oneWay
			edges = append(edges, e)
		}
	}
	if oneWay { // and a long way home
		edges = append(edges, graphio.Edge{From: int32(2 * steps), To: 0, Length: 1, Weight: 1, OneWay: true})
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	return net
}

// Networks made to be bad for methods of this kind, with supplies that double
// too, take no more than a few pivots a node. Pivots are counted, not timed.
func TestAdversarialNetworks(t *testing.T) {
	const steps = 24
	for _, rising := range []bool{true, false} {
		for _, oneWay := range []bool{true, false} {
			net := ladder(t, steps, rising, oneWay)
			p, q := graphio.Sample{Name: "p"}, graphio.Sample{Name: "q"}
			for v := range int32(net.Order()) {
				s := &p
				if v%2 == 1 {
					s = &q
				}
				s.Nodes = append(s.Nodes, v)
				s.Values = append(s.Values, math.Ldexp(1, int(v)/2))
			}
			r := solve(t, net, p, q, exact.Options{Shares: true})
			if limit := 12 * net.Order(); r.Pivots > limit {
				t.Errorf("rising %v, one-way %v: %d pivots, more than %d", rising, oneWay, r.Pivots, limit)
			}
		}
	}
	// All ties: every length and every mass the same, and opposite quarters.
	grid := graphiotest.Grid(40, 40, 0)
	edges := append([]graphio.Edge(nil), grid.EdgeList()...)
	names := make([]string, grid.Order())
	for v := range names {
		names[v] = grid.Name(v)
	}
	for i := range edges {
		edges[i].Length, edges[i].Weight = 1, 1
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	p, q := graphio.Sample{Name: "p"}, graphio.Sample{Name: "q"}
	for v := range int32(net.Order()) {
		switch row, column := v/40, v%40; {
		case row < 20 && column < 20:
			p.Nodes, p.Values = append(p.Nodes, v), append(p.Values, 1)
		case row >= 20 && column >= 20:
			q.Nodes, q.Values = append(q.Nodes, v), append(q.Values, 1)
		}
	}
	r := solve(t, net, p, q, exact.Options{Shares: true})
	if r.Distance() != 40 { // 20 rows and 20 columns, by translation
		t.Errorf("distance %v between opposite quarters, want 40", r.Distance())
	}
	if limit := 12 * net.Order(); r.Pivots > limit {
		t.Errorf("ties everywhere: %d pivots, more than %d", r.Pivots, limit)
	}
}

// A solver and its result stay within 120 bytes a node and 60 an edge.
func TestMemory(t *testing.T) {
	net := graphiotest.Road(50_000, 1)
	p, q := graphiotest.Smooth(net, 1), graphiotest.Counts(graphiotest.Smooth(net, 2), 500_000, 2)
	held := func() uint64 {
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		return m.HeapAlloc
	}
	before := held()
	s, err := exact.NewSolver(net, exact.Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	var r *exact.Result
	for _, pair := range [][2]graphio.Sample{{p, q}, {q, p}} { // the second starts warm
		if r, err = s.Solve(t.Context(), pair[0], pair[1]); err != nil {
			t.Fatal(err)
		}
	}
	used := float64(held() - before)
	limit := float64(120*net.Order() + 60*net.Size())
	t.Logf("%.0f bytes a node with its %.1f edges; allowed %.0f", used/float64(net.Order()), float64(net.Size())/float64(net.Order()), limit/float64(net.Order()))
	if used > limit {
		t.Errorf("%v bytes, more than %v", used, limit)
	}
	runtime.KeepAlive(s)
	runtime.KeepAlive(r)
}

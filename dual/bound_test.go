package dual

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// program is the transport distance by gonum's dense simplex: least Σ length·f
// with out - in = p - q, two variables for an edge that runs both ways.
func program(t *testing.T, net *graphio.Network, p, q graphio.Sample) float64 {
	t.Helper()
	n := net.Order()
	var cost []float64
	var from, to []int32
	for _, e := range net.EdgeList() {
		cost, from, to = append(cost, e.Length), append(from, e.From), append(to, e.To)
		if !e.OneWay {
			cost, from, to = append(cost, e.Length), append(from, e.To), append(to, e.From)
		}
	}
	a := mat.NewDense(n-1, len(cost), nil) // one balance follows from the rest
	for i := range cost {
		if int(from[i]) < n-1 {
			a.Set(int(from[i]), i, 1)
		}
		if int(to[i]) < n-1 {
			a.Set(int(to[i]), i, -1)
		}
	}
	b := make([]float64, n)
	p.Dense(b, 1)
	q.Dense(b, -1)
	value, _, err := lp.Simplex(cost, a, b[:n-1], 1e-12, nil)
	if err != nil {
		t.Fatalf("gonum's simplex: %v", err)
	}
	return value
}

func sample(name string, values ...float64) graphio.Sample {
	s := graphio.Sample{Name: name}
	for v, x := range values {
		if x > 0 {
			s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, x)
		}
	}
	return s
}

func network(t *testing.T, n int, edges ...graphio.Edge) *graphio.Network {
	t.Helper()
	names := make([]string, n)
	for v := range names {
		names[v] = fmt.Sprint("n", v)
	}
	for i := range edges {
		if edges[i].Weight == 0 {
			edges[i].Weight = 1 / edges[i].Length
		}
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	return net
}

// complete network of five nodes, lengths 1: the distance is ½Σ|μ-ν| = 0.5
// (total variation, textbook).
func TestVariationOnCompleteNetwork(t *testing.T) {
	mu, nu := sample("mu", .5, .2, .2, .1, 0), sample("nu", .1, .3, .1, .1, .4)
	if got := Variation(mu, nu); math.Abs(got-0.5) > 1e-15 {
		t.Errorf("variation %v, want 0.5", got)
	}
	if got := program(t, k5(t), mu, nu); math.Abs(got-0.5) > 1e-12 {
		t.Errorf("distance %v, want 0.5", got)
	}
	if Variation(mu, mu) != 0 || Variation(mu, nu) != Variation(nu, mu) {
		t.Error("variation is no metric")
	}
	if got := Variation(sample("p", 1), sample("q", 0, 0, 1)); got != 1 {
		t.Errorf("variation of masses apart %v, want 1", got)
	}
}

func k5(t *testing.T) *graphio.Network {
	var edges []graphio.Edge
	for u := range int32(5) {
		for v := range u {
			edges = append(edges, graphio.Edge{From: v, To: u, Length: 1})
		}
	}
	return network(t, 5, edges...)
}

// feasible says by how much a potential breaks its bounds, at most 0 if none.
func excess(net *graphio.Network, potential []float64) float64 {
	worst := math.Inf(-1)
	for _, e := range net.EdgeList() {
		d := potential[e.From] - potential[e.To]
		if !e.OneWay {
			d = math.Abs(d)
		}
		worst = max(worst, (d-e.Length)/e.Length)
	}
	return worst
}

// A repaired potential is feasible, lies below the one it came from, and comes
// back unchanged from another repair.
func TestRepair(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		rng := rand.New(rand.NewPCG(1, 1))
		before := make([]float64, c.Net.Order())
		for v := range before {
			before[v] = 3 * rng.NormFloat64()
		}
		keep := append([]float64(nil), before...)
		after := Repair(c.Net, before)
		if x := excess(c.Net, after); x > 1e-9 {
			t.Errorf("%s: repaired potential exceeds a length by %g of it", c.Name, x)
		}
		again := Repair(c.Net, after)
		for v := range after {
			if after[v] > before[v] || before[v] != keep[v] {
				t.Errorf("%s: node %d rose or the input changed", c.Name, v)
			}
			if math.Abs(again[v]-after[v]) > 1e-12*(1+math.Abs(after[v])) {
				t.Errorf("%s: a feasible potential changed at %d", c.Name, v)
			}
		}
	}
}

// Instances with closed forms: path, 8-cycle and 6-cycle (weighted median of
// the cumulated difference: Werman, Peleg, Melter & Kong 1986), tree (Evans &
// Matsen 2012), each also by hand; one-way rings by hand and linear
// programming.
func TestBoundBelowClosedForms(t *testing.T) {
	type edge = graphio.Edge
	path := network(t, 5, edge{From: 0, To: 1, Length: 2}, edge{From: 1, To: 2, Length: 3}, edge{From: 2, To: 3, Length: .5}, edge{From: 3, To: 4, Length: 4})
	var eight, six, ring []edge
	for v := range int32(8) {
		eight = append(eight, edge{From: v, To: (v + 1) % 8, Length: 1})
	}
	for v, l := range []float64{3, 1, 4, 1, 5, 9} {
		six = append(six, edge{From: int32(v), To: int32(v+1) % 6, Length: l})
	}
	for v := range int32(4) {
		ring = append(ring, edge{From: v, To: (v + 1) % 4, Length: float64(v + 1), OneWay: true})
	}
	tree := network(t, 7, edge{From: 0, To: 1, Length: 2}, edge{From: 0, To: 2, Length: 1}, edge{From: 1, To: 3, Length: 4},
		edge{From: 1, To: 4, Length: 1.5}, edge{From: 2, To: 5, Length: 3}, edge{From: 2, To: 6, Length: 2.5})
	mu, nu := sample("mu", .7, .1, .1, .1), sample("nu", .1, .2, .3, .4)
	for _, c := range []struct {
		name string
		net  *graphio.Network
		p, q graphio.Sample
		want float64
	}{
		{"path", path, sample("p", .5, 0, .2, 0, .3), sample("q", .1, .4, 0, .25, .25), 1.1},
		{"8-cycle", network(t, 8, eight...), sample("p", .5, .5), sample("q", 0, 0, 0, 0, 0, 0, .5, .5), 2},
		{"6-cycle", network(t, 6, six...), sample("p", .6, 0, .2, 0, .1, .1), sample("q", 0, .3, 0, .3, .2, .2), 4.3},
		{"tree", tree, sample("p", .1, 0, 0, .4, .1, .2, .2), sample("q", 0, .2, .1, 0, .3, .4), 3.1},
		{"one-way ring", network(t, 4, ring...), mu, nu, 2.5},
		{"one-way ring, back", network(t, 4, ring...), nu, mu, 3.5},
		{"K5", k5(t), sample("mu", .5, .2, .2, .1, 0), sample("nu", .1, .3, .1, .1, .4), .5},
	} {
		if got := program(t, c.net, c.p, c.q); math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%s: distance %.12g, want %.12g", c.name, got, c.want)
		}
		lower := certified(t, c.name, c.net, c.p, c.q)
		if lower > c.want+1e-9 || lower < c.want/3 {
			t.Errorf("%s: lower bound %.12g for a distance of %.12g", c.name, lower, c.want)
		}
	}
}

// certified is the bound from the estimator's own witness, its potential
// checked.
func certified(t *testing.T, name string, net *graphio.Network, p, q graphio.Sample) float64 {
	t.Helper()
	m, err := NewMultiscale(net, Options{})
	if err != nil {
		t.Fatal(err)
	}
	lower, potential := Certify(net, m.Witness(p, q, theory(m)), p, q)
	if x := excess(net, potential); x > 1e-9 {
		t.Errorf("%s: potential exceeds a length by %g of it", name, x)
	}
	if got := LowerBound(potential, p, q); got != lower {
		t.Errorf("%s: bound %g, its potential gives %g", name, lower, got)
	}
	return lower
}

func theory(m *Multiscale) []float64 {
	var w []float64
	for _, s := range m.Scales() {
		w = append(w, s.Weight)
	}
	return w
}

// On networks small enough for a dense simplex the bound is below the distance
// and not far below it.
func TestBoundBelowProgram(t *testing.T) {
	share, count := 0.0, 0.0
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		p, q := c.P.Share(), c.Q.Share()
		if c.Net.Order() > 31 || Variation(p, q) == 0 {
			continue
		}
		want := program(t, c.Net, p, q)
		lower := certified(t, c.Name, c.Net, p, q)
		if lower > want*(1+1e-9) {
			t.Errorf("%s: lower bound %.12g above the distance %.12g", c.Name, lower, want)
		}
		share, count = share+lower/want, count+1
	}
	t.Logf("%g networks: bound / distance is %.3f in the mean", count, share/count)
	if count < 5 || share/count < 0.6 {
		t.Errorf("%g networks: bound / distance is %.3f in the mean, want 0.6 or more on 5 or more", count, share/count)
	}
}

// Compensation keeps a difference of 1e-16 of the terms.
func TestLowerBoundCancels(t *testing.T) {
	p, q := sample("p", 1e16, 1, 0), sample("q", 1e16, 0, 1)
	if got := LowerBound([]float64{3, 1.25, 1}, p, q); got != 0.25 {
		t.Errorf("bound %v, want 0.25", got)
	}
	p, q = sample("p", 1, 1e16, 0), sample("q", 0, 0, 1e16)
	if got := LowerBound([]float64{1, 1, 1}, p, q); got != 1 {
		t.Errorf("bound %v, want 1", got)
	}
}

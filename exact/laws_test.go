package exact_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// shareDistance is the distance of two samples as shares.
func shareDistance(t *testing.T, net *graphio.Network, p, q graphio.Sample) float64 {
	t.Helper()
	return solve(t, net, p, q, exact.Options{Shares: true}).Distance()
}

func anySample(rng *rand.Rand, n int) graphio.Sample {
	values := make([]float64, n)
	values[rng.IntN(n)] = 1
	for v := range values {
		if rng.Float64() < 0.7 {
			values[v] += rng.ExpFloat64()
		}
	}
	return masses(values...)
}

func near(a, b float64) bool { return math.Abs(a-b) <= 1e-12*max(a, b)+1e-15 }

// Distances are a metric: 0 from a sample to itself and not to another, the
// same both ways where there are no directions, and no longer than by way of
// a third. One-way networks keep the first and the last.
func TestMetric(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		rng := rand.New(rand.NewPCG(uint64(c.Net.Order()), 1))
		for range 5 {
			a, b, x := anySample(rng, c.Net.Order()), anySample(rng, c.Net.Order()), anySample(rng, c.Net.Order())
			if d := shareDistance(t, c.Net, a, a); d != 0 {
				t.Errorf("%s: %v from a sample to itself", c.Name, d)
			}
			ab, ba := shareDistance(t, c.Net, a, b), shareDistance(t, c.Net, b, a)
			if !(ab > 0) || !c.Net.Directed() && !near(ab, ba) {
				t.Errorf("%s: %v there, %v back", c.Name, ab, ba)
			}
			if by := shareDistance(t, c.Net, a, x) + shareDistance(t, c.Net, x, b); ab > by*(1+1e-12) {
				t.Errorf("%s: %v, by way of a third %v", c.Name, ab, by)
			}
		}
	}
}

// The distance depends neither on the order of nodes and edges nor on the ends
// of edges without direction, and grows in proportion to the lengths.
func TestOrderAndScale(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		n := c.Net.Order()
		rng := rand.New(rand.NewPCG(uint64(n), 2))
		p, q := anySample(rng, n), anySample(rng, n)
		want := shareDistance(t, c.Net, p, q)
		to := rng.Perm(n)
		factor := math.Exp(3 * rng.NormFloat64())
		moved := func(s graphio.Sample) graphio.Sample {
			values := make([]float64, n)
			for i, v := range s.Nodes {
				values[to[v]] = s.Values[i]
			}
			return masses(values...)
		}
		names := make([]string, n)
		edges := slices.Clone(c.Net.EdgeList())
		for v := range names {
			names[to[v]] = c.Net.Name(v)
		}
		for i, e := range edges {
			e.From, e.To, e.Length = int32(to[e.From]), int32(to[e.To]), factor*e.Length
			if !e.OneWay && rng.IntN(2) == 0 {
				e.From, e.To = e.To, e.From
			}
			edges[i] = e
		}
		rng.Shuffle(len(edges), func(i, j int) { edges[i], edges[j] = edges[j], edges[i] })
		net, err := graphio.NewNetwork(names, edges)
		if err != nil {
			t.Fatal(err)
		}
		if d := shareDistance(t, net, moved(p), moved(q)); !near(d, factor*want) {
			t.Errorf("%s: %v in another order at %v times the lengths, want %v", c.Name, d, factor, factor*want)
		}
	}
}

// difference is the shares of p less those of q, by node.
func difference(n int, p, q graphio.Sample) []float64 {
	d := make([]float64, n)
	p.Dense(d, 1/p.Total())
	q.Dense(d, -1/q.Total())
	return d
}

// On random trees, paths among them: Σ length·|difference below| (Evans and
// Matsen 2012). On random cycles: the least Σ ℓ|F − c| over c, at one of the F
// (Werman, Peleg, Melter and Kong 1986). On complete networks of equal length:
// total variation times the length (textbook).
func TestClosedForms(t *testing.T) {
	for seed := range uint64(150) {
		rng := rand.New(rand.NewPCG(seed, 3))
		n := 3 + rng.IntN(40)
		p, q := anySample(rng, n), anySample(rng, n)
		lengths := make([]float64, n)
		for i := range lengths {
			lengths[i] = math.Exp(2 * rng.NormFloat64())
		}
		check := func(what string, net *graphio.Network, want float64) {
			t.Helper()
			if d := shareDistance(t, net, p, q); !(math.Abs(d-want) <= 1e-11*want) {
				t.Errorf("seed %d: %v on a %s of %d nodes, want %v", seed, d, what, n, want)
			}
		}

		var arcs []arc
		below, want := difference(n, p, q), 0.0
		for v := 1; v < n; v++ {
			parent := v - 1
			if seed%2 == 0 {
				parent = rng.IntN(v)
			}
			arcs = append(arcs, arc{parent, v, lengths[v]})
		}
		for v := n - 1; v > 0; v-- {
			want += lengths[v] * math.Abs(below[v])
			below[arcs[v-1].from] += below[v]
		}
		check("tree", undirected(n, arcs...), want)

		running := difference(n, p, q) // running[i] crosses the edge from i to i+1
		for i := 1; i < n; i++ {
			running[i] += running[i-1]
		}
		want = math.Inf(1)
		for _, c := range running {
			sum := 0.0
			for i, f := range running {
				sum += lengths[i] * math.Abs(f-c)
			}
			want = min(want, sum)
		}
		check("cycle", circle(lengths...), want)

		want = 0
		for _, d := range difference(n, p, q) {
			want += lengths[0] * math.Abs(d) / 2
		}
		check("complete network", complete(n, lengths[0]), want)
	}
}

// Two samples that swap a little mass at any edge are as far apart as that mass
// times the shortest way: nothing is lost where large masses nearly cancel.
func TestSmallDifference(t *testing.T) {
	net := graphiotest.Road(300, 8)
	base := graphiotest.Smooth(net, 1)
	for seed := range uint64(20) {
		rng := rand.New(rand.NewPCG(seed, 4))
		u, v := rng.IntN(300), rng.IntN(300)
		mass := 0x1p-20
		p, q := make([]float64, 300), make([]float64, 300)
		base.Dense(p, 1)
		base.Dense(q, 1)
		p[u], q[v] = p[u]+mass, q[v]+mass
		way := solve(t, net, graphiotest.Point(u), graphiotest.Point(v), exact.Options{}).Distance()
		d := solve(t, net, masses(p...), masses(q...), exact.Options{}).Distance()
		if math.Abs(d-mass*way) > 1e-9*mass*way {
			t.Errorf("%v, want %v", d, mass*way)
		}
	}
}

func ExampleResult_Verify() {
	net := graphiotest.Grid(3, 3, 1)
	r, err := exact.Solve(net, graphiotest.Point(0), graphiotest.Point(8), exact.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(r.Verify(), r.Lower == r.Upper)
	r.Potential[0] += 5 // no longer a proof
	fmt.Println(r.Verify() != nil)
	// Output:
	// <nil> true
	// true
}

// Samples in proportion are the same as shares, but for rounding: no error, and
// a distance of no more than that.
func TestProportion(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		around := 0.0
		for _, e := range c.Net.EdgeList() {
			around += e.Length
		}
		for seed := range uint64(50) {
			p := anySample(rand.New(rand.NewPCG(seed, 5)), c.Net.Order())
			q := p
			q.Values = slices.Clone(p.Values)
			for i, x := range q.Values {
				q.Values[i] = x / 3 * 7
			}
			if d := shareDistance(t, c.Net, p, q); d > 1e-14*around {
				t.Errorf("%s: distance %v", c.Name, d)
			}
		}
	}
}

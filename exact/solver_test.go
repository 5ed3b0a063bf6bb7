package exact_test

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"example.org/barrow/graphio/shortest"
)

func solve(t *testing.T, net *graphio.Network, p, q graphio.Sample, opt exact.Options) *exact.Result {
	t.Helper()
	r, err := exact.Solve(net, p, q, opt)
	if err != nil {
		t.Fatal(err)
	}
	if err := r.Verify(); err != nil {
		t.Error(err)
	}
	return r
}

// Every case of the table solves and verifies, in amounts, in shares and with
// unmatched mass; on networks without directions the distance is symmetric.
func TestCases(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		t.Run(c.Name, func(t *testing.T) {
			there := solve(t, c.Net, c.P, c.Q, exact.Options{})
			back := solve(t, c.Net, c.Q, c.P, exact.Options{})
			if !c.Net.Directed() && there.Distance() != back.Distance() {
				t.Errorf("distance %v, the other way %v", there.Distance(), back.Distance())
			}
			shares := solve(t, c.Net, c.P, c.Q, exact.Options{Shares: true})
			if total := c.P.Total(); math.Abs(shares.Distance()*total-there.Distance()) > 1e-12*there.Distance() {
				t.Errorf("shares %v times %v is not %v", shares.Distance(), total, there.Distance())
			}
			for _, cost := range []float64{1e-6, 0.3, 2, 1e12} {
				if d := solve(t, c.Net, c.P, c.Q, exact.Options{Unmatched: cost}).Distance(); d > there.Distance()*(1+1e-12) {
					t.Errorf("distance %v at a cost %v of unmatched mass, %v without", d, cost, there.Distance())
				}
			}
		})
	}
}

// Totals that differ are refused without a cost of unmatched mass; with one
// the distance is continuous and never falls as the cost grows, up to a cost
// at which it grows by the difference of totals alone.
func TestUnmatchedCost(t *testing.T) {
	net := graphiotest.Road(400, 3)
	p, q := graphiotest.Counts(graphiotest.Smooth(net, 1), 5000, 1), graphiotest.Counts(graphiotest.Smooth(net, 2), 7000, 2)
	if _, err := exact.Solve(net, p, q, exact.Options{}); !errors.Is(err, exact.ErrTotals) {
		t.Errorf("error %v, want ErrTotals", err)
	}
	last, at := 0.0, 0.0
	for cost := 1e-9; cost < 1e15; cost *= 1.7 {
		d := solve(t, net, p, q, exact.Options{Unmatched: cost}).Distance()
		// The derivative is the unmatched mass: between 0 and all of it.
		if d < last*(1-1e-12) || d > last+(cost-at)*12000*(1+1e-12) {
			t.Fatalf("distance %v at cost %v, %v at cost %v", last, at, d, cost)
		}
		last, at = d, cost
	}
	near := solve(t, net, p, q, exact.Options{Unmatched: 1e9}).Distance()
	far := solve(t, net, p, q, exact.Options{Unmatched: 3e9}).Distance()
	if math.Abs(far-near-2e9*2000) > 1e-9*far {
		t.Errorf("from cost 1e9 to 3e9 the distance grows by %v, want %v", far-near, 2e9*2000)
	}
}

// Mass that cannot cross between components is an error that names a node; a
// cost of unmatched mass gives a number.
func TestComponents(t *testing.T) {
	names := []string{"a", "b", "c", "d"}
	net, err := graphio.NewNetwork(names, []graphio.Edge{
		{From: 0, To: 1, Length: 1, Weight: 1}, {From: 2, To: 3, Length: 1, Weight: 1},
	})
	if err != nil {
		t.Fatal(err)
	}
	at := func(name string, values ...float64) graphio.Sample {
		s := graphio.Sample{Name: name}
		for v, x := range values {
			if x > 0 {
				s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, x)
			}
		}
		return s
	}
	if r := solve(t, net, at("p", 1, 0, 2, 0), at("q", 0, 1, 1, 1), exact.Options{}); r.Distance() != 2 {
		t.Errorf("distance %v within components, want 2", r.Distance())
	}
	_, err = exact.Solve(net, at("p", 1), at("q", 0, 0, 1), exact.Options{})
	if !errors.Is(err, exact.ErrTotals) || !strings.Contains(err.Error(), `"p" and "q"`) {
		t.Errorf("error %v, want ErrTotals that names the samples", err)
	}
	if r := solve(t, net, at("p", 1), at("q", 0, 0, 1), exact.Options{Unmatched: 5}); r.Distance() != 10 {
		t.Errorf("distance %v, want 2 × 5", r.Distance())
	}
}

// Without a way along one-way edges there is an error, never a number (common
// practice, no source).
func TestUnreachable(t *testing.T) {
	net, err := graphio.NewNetwork([]string{"up", "down"}, []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1, OneWay: true}})
	if err != nil {
		t.Fatal(err)
	}
	up, down := graphiotest.Point(0), graphiotest.Point(1)
	if _, err := exact.Solve(net, down, up, exact.Options{}); !errors.Is(err, exact.ErrUnreachable) {
		t.Errorf("error %v, want ErrUnreachable", err)
	}
	if r := solve(t, net, up, down, exact.Options{}); r.Distance() != 1 {
		t.Errorf("distance %v, want 1", r.Distance())
	}
}

// Lengths over many orders that are no short decimals, tiny masses beside huge
// ones: the certificate still closes.
func TestWideRanges(t *testing.T) {
	for seed := range uint64(40) {
		rng := rand.New(rand.NewPCG(seed, 3))
		base := graphiotest.Road(500, seed)
		edges := append([]graphio.Edge(nil), base.EdgeList()...)
		for i := range edges {
			edges[i].Length = math.Pow(10, 9*rng.Float64()-4)
		}
		names := make([]string, base.Order())
		for v := range names {
			names[v] = base.Name(v)
		}
		net, err := graphio.NewNetwork(names, edges)
		if err != nil {
			t.Fatal(err)
		}
		p, q := graphiotest.Smooth(base, seed), graphiotest.Smooth(base, seed+100)
		for i := range p.Values {
			p.Values[i] *= math.Pow(10, -12*rng.Float64())
		}
		solve(t, net, p, q, exact.Options{Shares: true})
	}
}

// A gap asked for is kept, with fewer pivots than proof takes, and the
// interval holds the distance.
func TestGap(t *testing.T) {
	net := graphiotest.Road(5000, 4)
	p, q := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2)
	proved := solve(t, net, p, q, exact.Options{Shares: true})
	for _, gap := range []float64{0.1, 0.02} {
		r := solve(t, net, p, q, exact.Options{Shares: true, Gap: gap})
		if r.Gap() > gap || r.Optimal || r.Pivots >= proved.Pivots {
			t.Errorf("gap %v in %d pivots for %v (proof %d)", r.Gap(), r.Pivots, gap, proved.Pivots)
		}
		if d := proved.Distance(); r.Lower > d || r.Upper < d*(1-1e-12) {
			t.Errorf("%v is not between %v and %v", d, r.Lower, r.Upper)
		}
	}
}

// A solver that is interrupted returns a certified interval, and one that is
// watched tells of intervals that hold the distance.
func TestInterrupted(t *testing.T) {
	net := graphiotest.Road(5000, 4)
	p, q := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2)
	d := solve(t, net, p, q, exact.Options{Shares: true}).Distance()
	s, err := exact.NewSolver(net, exact.Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	r, err := s.Solve(ctx, p, q)
	if !errors.Is(err, context.Canceled) || r == nil {
		t.Fatalf("result %v, error %v", r, err)
	}
	if err := r.Verify(); err != nil {
		t.Error(err)
	}
	if r.Lower > d || r.Upper < d || r.Optimal {
		t.Errorf("%v is not between %v and %v", d, r.Lower, r.Upper)
	}
	if r, err = s.Solve(context.Background(), p, q); err != nil || math.Abs(r.Distance()-d) > 1e-12*d {
		t.Errorf("after an interruption: %v, %v; want %v", r, err, d)
	}
}

// Flow marked as unavoidable is the same for every tree the solver may end
// with: here, trees left by other pairs.
func TestUnavoidable(t *testing.T) {
	for seed := range uint64(20) {
		net := graphiotest.Grid(12, 12, seed%2) // grids have many ties
		edges := append([]graphio.Edge(nil), net.EdgeList()...)
		names := make([]string, net.Order())
		for v := range names {
			names[v] = net.Name(v)
		}
		for i := range edges {
			edges[i].Length = 1 + float64((uint64(i)*2654435761>>7+seed)%2)
		}
		net, err := graphio.NewNetwork(names, edges)
		if err != nil {
			t.Fatal(err)
		}
		opt := exact.Options{Shares: true}
		if seed%4 == 3 {
			opt = exact.Options{Unmatched: 3}
		}
		p, q := graphiotest.Sparse(net, 9, seed), graphiotest.Sparse(net, 9, seed+50)
		cold := solve(t, net, p, q, opt)
		mark := cold.Unavoidable()
		marked, differ := 0, 0
		for other := range uint64(8) {
			s, err := exact.NewSolver(net, opt)
			if err != nil {
				t.Fatal(err)
			}
			if _, err := s.Solve(context.Background(), graphiotest.Sparse(net, 40, 100+other), graphiotest.Sparse(net, 30, 200+other)); err != nil {
				t.Fatal(err)
			}
			warm, err := s.Solve(context.Background(), p, q)
			if err != nil {
				t.Fatal(err)
			}
			for i, f := range warm.Flow {
				same := math.Abs(f-cold.Flow[i]) < 1e-12
				if mark[i] && !same {
					t.Fatalf("seed %d: edge %d carries %v and %v, though marked", seed, i, cold.Flow[i], f)
				}
				if mark[i] && f != 0 {
					marked++
				}
				if !same {
					differ++
				}
			}
		}
		if differ == 0 {
			t.Logf("seed %d: all trees gave the same flow", seed)
		}
		if marked == 0 && seed == 0 {
			t.Errorf("seed %d: no flow marked", seed)
		}
	}
}

// Solving allocates for the result only, not by pivot.
func TestAllocations(t *testing.T) {
	net := graphiotest.Road(3000, 5)
	s, err := exact.NewSolver(net, exact.Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	a, b, c := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2), graphiotest.Smooth(net, 3)
	pivots := 0
	allocs := testing.AllocsPerRun(5, func() {
		for _, q := range []graphio.Sample{b, c} {
			r, err := s.Solve(context.Background(), a, q)
			if err != nil {
				t.Fatal(err)
			}
			pivots += r.Pivots
		}
	})
	if pivots < 3000 || allocs > 40 {
		t.Errorf("%v allocations in %d pivots", allocs, pivots/6)
	}
}

// After Reset a solver does what a new one does, pivot by pivot.
func TestReset(t *testing.T) {
	net := graphiotest.Road(900, 6)
	opt := exact.Options{Shares: true}
	s, err := exact.NewSolver(net, opt)
	if err != nil {
		t.Fatal(err)
	}
	p, q := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2)
	if _, err := s.Solve(context.Background(), q, graphiotest.Smooth(net, 3)); err != nil {
		t.Fatal(err)
	}
	s.Reset()
	again, err := s.Solve(context.Background(), p, q)
	if err != nil {
		t.Fatal(err)
	}
	fresh := solve(t, net, p, q, opt)
	if again.Pivots != fresh.Pivots || !slices.Equal(again.Flow, fresh.Flow) || !slices.Equal(again.Potential, fresh.Potential) {
		t.Errorf("%d pivots after Reset, %d on a new solver, or another result", again.Pivots, fresh.Pivots)
	}
	// Also where the first pair has all mass at one node, after others and before.
	for _, next := range []graphio.Sample{graphiotest.Point(7), q, graphiotest.Point(700)} {
		s.Reset()
		again, err := s.Solve(context.Background(), p, next)
		if err != nil {
			t.Fatal(err)
		}
		if fresh := solve(t, net, p, next, opt); again.Pivots != fresh.Pivots || !slices.Equal(again.Flow, fresh.Flow) || !slices.Equal(again.Potential, fresh.Potential) {
			t.Errorf("%q: another result after Reset than on a new solver", next.Name)
		}
	}
}

// To one node and from one node the tree of shortest paths is optimal at once,
// also after other pairs and before them, and one-way.
func TestToAndFromOneNode(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		s, err := exact.NewSolver(c.Net, exact.Options{Shares: true})
		if err != nil {
			t.Fatal(err)
		}
		at := graphiotest.Point(c.Net.Order() / 2)
		to := shortest.From(c.Net, c.Net.Order()/2, shortest.Backward)
		from := shortest.From(c.Net, c.Net.Order()/2, shortest.Forward)
		wantTo, wantFrom := 0.0, 0.0
		for i, v := range c.P.Nodes {
			wantTo += c.P.Values[i] / c.P.Total() * to[v]
			wantFrom += c.P.Values[i] / c.P.Total() * from[v]
		}
		for _, x := range []struct {
			p, q   graphio.Sample
			want   float64
			pivots bool
		}{{c.P, at, wantTo, false}, {c.P, c.Q, math.NaN(), true}, {at, c.P, wantFrom, false}, {c.Q, c.P, math.NaN(), true}, {c.P, at, wantTo, false}} {
			r, err := s.Solve(context.Background(), x.p, x.q)
			if err != nil {
				t.Fatalf("%s: %v", c.Name, err)
			}
			if err := r.Verify(); err != nil {
				t.Errorf("%s: %v", c.Name, err)
			}
			if math.Abs(r.Distance()-x.want) > 1e-12*x.want || !x.pivots && r.Pivots > 0 {
				t.Errorf("%s: distance %v in %d pivots, want %v in none", c.Name, r.Distance(), r.Pivots, x.want)
			}
		}
	}
}

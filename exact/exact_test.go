package exact

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// check verifies every invariant of the tree and its tour from scratch.
func (t *tree) check() error {
	n := len(t.node)
	size := make([]int32, n)
	var open []int32
	seen := 0
	for b := t.tour.head; b >= 0; b = t.tour.block[b].next {
		if next := t.tour.block[b].next; next >= 0 && t.tour.block[next].prev != b {
			return fmt.Errorf("block %d is not before block %d", b, next)
		}
		for k, token := range t.tour.tokens(b) {
			slot, v := b<<t.tour.shift+int32(k), token>>1
			if token&1 == 0 {
				if t.tour.place[v].slot[0] != slot {
					return fmt.Errorf("node %d entered in slot %d, not %d", v, slot, t.tour.place[v].slot[0])
				}
				if len(open) == 0 && v != t.root || len(open) > 0 && open[len(open)-1] != t.node[v].parent {
					return fmt.Errorf("node %d entered below %v", v, open)
				}
				if v != t.root {
					if drop := t.tour.potential(v) - t.tour.potential(t.node[v].parent); drop != t.rise(v) {
						return fmt.Errorf("potential of %d is %d above its parent, want %d", v, drop, t.rise(v))
					}
					if t.node[v].flow == 0 {
						return fmt.Errorf("no flow at node %d", v)
					}
				}
				open = append(open, v)
				size[v]++
				seen++
				continue
			}
			if t.tour.place[v].slot[1] != slot || open[len(open)-1] != v {
				return fmt.Errorf("node %d left in slot %d", v, slot)
			}
			open = open[:len(open)-1]
			if v != t.root {
				size[t.node[v].parent] += size[v]
			}
			if size[v] != t.node[v].size {
				return fmt.Errorf("node %d has %d nodes below, not %d", v, size[v], t.node[v].size)
			}
		}
	}
	if seen != n {
		return fmt.Errorf("tour of %d nodes, not %d", seen, n)
	}
	return nil
}

func randomNetwork(rng *rand.Rand, n int, extra float64, oneWay bool) *graphio.Network {
	names := make([]string, n)
	for v := range names {
		names[v] = fmt.Sprint(v)
	}
	have := make(map[[2]int32]bool)
	var edges []graphio.Edge
	add := func(u, v int32, one bool) {
		if u == v || have[[2]int32{u, v}] {
			return
		}
		have[[2]int32{u, v}] = true
		if !one {
			have[[2]int32{v, u}] = true
		}
		edges = append(edges, graphio.Edge{From: u, To: v, Length: math.Exp(3 * rng.NormFloat64()), Weight: 1, OneWay: one})
	}
	for v := 1; v < n; v++ {
		add(int32(v), int32(rng.IntN(v)), false)
	}
	for range int(extra * float64(n)) {
		u, v := int32(rng.IntN(n)), int32(rng.IntN(n))
		if !have[[2]int32{v, u}] || oneWay {
			add(u, v, oneWay)
		}
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(err)
	}
	return net
}

func randomSample(rng *rand.Rand, name string, n int, fill float64, counts bool) graphio.Sample {
	s := graphio.Sample{Name: name}
	for v := range n {
		if rng.Float64() < fill || v == n-1 && len(s.Nodes) == 0 {
			x := rng.ExpFloat64()
			if counts {
				x = float64(1 + rng.IntN(20))
			}
			s.Nodes = append(s.Nodes, int32(v))
			s.Values = append(s.Values, x)
		}
	}
	return s
}

// linearProgram solves the transshipment problem with gonum's dense simplex:
// an independent reference for small networks.
func linearProgram(t *testing.T, net *graphio.Network, p, q graphio.Sample, unmatched float64) float64 {
	t.Helper()
	var from, to []int
	var cost []float64
	for _, e := range net.EdgeList() {
		from, to, cost = append(from, int(e.From)), append(to, int(e.To)), append(cost, e.Length)
		if !e.OneWay {
			from, to, cost = append(from, int(e.To)), append(to, int(e.From)), append(cost, e.Length)
		}
	}
	n := net.Order()
	b := make([]float64, n)
	p.Dense(b, 1)
	q.Dense(b, -1)
	if unmatched > 0 {
		for v := range n {
			from, to, cost = append(from, v, n), append(to, n, v), append(cost, unmatched, unmatched)
		}
		n++
	}
	// The last row is minus the sum of the others: leave it out.
	a := mat.NewDense(n-1, len(cost), nil)
	for j := range cost {
		if from[j] < n-1 {
			a.Set(from[j], j, 1)
		}
		if to[j] < n-1 {
			a.Set(to[j], j, -1)
		}
	}
	opt, _, err := lp.Simplex(cost, a, b[:n-1], 1e-10, nil)
	if err != nil {
		t.Fatalf("linear program: %v", err)
	}
	return opt
}

// The solver agrees with an independent linear program, its invariants hold
// after every pivot, and its results verify: on networks with and without
// one-way edges and unmatched mass, for counts and other masses, from cold and
// warm trees.
func TestSolveAgainstLinearProgram(t *testing.T) {
	for seed := range uint64(300) {
		rng := rand.New(rand.NewPCG(seed, 7))
		n := 2 + rng.IntN(14)
		net := randomNetwork(rng, n, 1.5, seed%3 == 0)
		opt := Options{Shares: seed%2 == 0}
		if seed%5 == 0 {
			opt = Options{Unmatched: math.Exp(2 * rng.NormFloat64())}
		}
		s, err := NewSolver(net, opt)
		if err != nil {
			t.Fatal(err)
		}
		for pair := range 3 {
			p := randomSample(rng, "p", n, 0.6, seed%4 < 2)
			q := randomSample(rng, "q", n, 0.6, seed%4 < 2)
			if opt.Unmatched == 0 && !opt.Shares {
				p, q = p.Share(), q.Share()
			}
			s.lay(p, q)
			if err := s.setSupplies(p, q); err != nil {
				t.Fatalf("seed %d: %v", seed, err)
			}
			s.load()
			for {
				if err := s.tree.check(); err != nil {
					t.Fatalf("seed %d pair %d: %v", seed, pair, err)
				}
				i, forward, excess := s.price.next(&s.tree)
				if excess == 0 {
					break
				}
				s.tree.pivot(i, forward, excess)
			}
			r, err := s.Solve(context.Background(), p, q)
			if err != nil {
				t.Fatalf("seed %d: %v", seed, err)
			}
			if err := r.Verify(); err != nil {
				t.Errorf("seed %d: %v", seed, err)
			}
			if opt.Shares {
				p, q = p.Share(), q.Share()
			}
			if want := linearProgram(t, net, p, q, opt.Unmatched); math.Abs(r.Distance()-want) > 1e-8*want+1e-12 {
				t.Errorf("seed %d pair %d: distance %v, linear program %v", seed, pair, r.Distance(), want)
			}
		}
	}
}

// The invariants hold on a tree of many blocks, through thousands of pivots.
func TestInvariantsOnLargerNetwork(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 7))
	net := randomNetwork(rng, 3000, 0.8, false)
	s, err := NewSolver(net, Options{Shares: true})
	if err != nil {
		t.Fatal(err)
	}
	for range 2 {
		p, q := randomSample(rng, "p", 3000, 0.5, true), randomSample(rng, "q", 3000, 0.5, false)
		s.lay(p, q)
		if err := s.setSupplies(p, q); err != nil {
			t.Fatal(err)
		}
		s.load()
		for k := 0; ; k++ {
			i, forward, excess := s.price.next(&s.tree)
			if excess == 0 {
				break
			}
			s.tree.pivot(i, forward, excess)
			if k%37 == 0 {
				if err := s.tree.check(); err != nil {
					t.Fatalf("after %d pivots: %v", k, err)
				}
			}
		}
		r, err := s.Solve(context.Background(), p, q)
		if err != nil {
			t.Fatal(err)
		}
		if err := r.Verify(); err != nil {
			t.Error(err)
		}
	}
}

// Early results are intervals about the optimum; where mass still runs against
// a one-way edge nothing is known from above.
func TestEarlyResultsBound(t *testing.T) {
	blocked := 0
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		s, err := NewSolver(c.Net, Options{Shares: true})
		if err != nil {
			t.Fatal(err)
		}
		s.lay(c.P, c.Q)
		if err := s.setSupplies(c.P, c.Q); err != nil {
			t.Fatal(err)
		}
		s.start(c.P, c.Q)
		early := s.result(c.P, c.Q, 0, false)
		whole, err := Solve(c.Net, c.P, c.Q, Options{Shares: true})
		if err != nil {
			t.Fatalf("%s: %v", c.Name, err)
		}
		if math.IsInf(early.Upper, 1) {
			blocked++
		} else if err := early.Verify(); err != nil {
			t.Errorf("%s: %v", c.Name, err)
		}
		if slack := 1e-12 * whole.Upper; early.Lower > whole.Lower+slack || early.Upper < whole.Upper-slack {
			t.Errorf("%s: %v to %v at the start; the optimum is %v", c.Name, early.Lower, early.Upper, whole.Upper)
		}
	}
	if blocked == 0 {
		t.Error("no case starts against a one-way edge: nothing was tried")
	}
}

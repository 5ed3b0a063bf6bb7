package exact_test

import (
	"math"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// Movements begin where p exceeds q, end where q exceeds p, and cost the
// distance: in every case, one-way too, and with mass created and removed.
func TestMovementsAddUp(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		for _, opt := range []exact.Options{{Shares: true}, {}, {Unmatched: 0.7}, {Unmatched: 1e-3}} {
			r := solve(t, c.Net, c.P, c.Q, opt)
			perP, perQ := 1.0, 1.0
			if opt.Shares {
				perP, perQ = c.P.Total(), c.Q.Total()
			}
			left := make([]float64, c.Net.Order())
			c.P.Dense(left, 1/perP)
			c.Q.Dense(left, -1/perQ)
			cost, mass := 0.0, 0.0
			for _, m := range r.Movements() {
				if m.Mass <= 0 || m.Length < 0 || m.From == m.To {
					t.Fatalf("%s, %+v: movement %+v", c.Name, opt, m)
				}
				cost += m.Mass * m.Length
				mass += m.Mass
				if m.From != exact.Outside {
					left[m.From] -= m.Mass
				}
				if m.To != exact.Outside {
					left[m.To] += m.Mass
				}
			}
			if math.Abs(cost-r.Upper) > 1e-12*r.Upper {
				t.Errorf("%s, %+v: movements cost %v, the distance is %v", c.Name, opt, cost, r.Upper)
			}
			for v, x := range left {
				if math.Abs(x) > 1e-12*(c.P.Total()/perP) {
					t.Fatalf("%s, %+v: node %d is left with %v", c.Name, opt, v, x)
				}
			}
			if opt.Shares && math.Abs(mass+r.Stayed()-1) > 1e-12 {
				t.Errorf("%s: %v moved and %v stayed", c.Name, mass, r.Stayed())
			}
		}
	}
}

// By hand: on the path a – b – c – d (lengths 1, 2, 4) two units at a and one at
// b go to c and d. What comes first to a node goes on first.
func TestMovementsByHand(t *testing.T) {
	net, err := graphio.NewNetwork([]string{"a", "b", "c", "d"}, []graphio.Edge{
		{From: 0, To: 1, Length: 1, Weight: 1}, {From: 1, To: 2, Length: 2, Weight: 1}, {From: 2, To: 3, Length: 4, Weight: 1}})
	if err != nil {
		t.Fatal(err)
	}
	p := graphio.Sample{Name: "p", Nodes: []int32{0, 1}, Values: []float64{2, 2}}
	q := graphio.Sample{Name: "q", Nodes: []int32{1, 2, 3}, Values: []float64{1, 1, 2}}
	r := solve(t, net, p, q, exact.Options{})
	want := []exact.Movement{{From: 0, To: 2, Mass: 1, Length: 3}, {From: 0, To: 3, Mass: 1, Length: 7}, {From: 1, To: 3, Mass: 1, Length: 6}}
	got := r.Movements()
	if len(got) != len(want) {
		t.Fatalf("%+v", got)
	}
	for k := range want {
		if got[k] != want[k] {
			t.Errorf("%+v, want %+v", got[k], want[k])
		}
	}
	if r.Stayed() != 1 {
		t.Errorf("%v stayed, want 1", r.Stayed())
	}
	c := r.Corridors(9)
	if len(c) != 1 || len(c[0].Nodes) != 4 || c[0].Length != 7 || c[0].Cost != r.Upper {
		t.Errorf("corridors %+v", c)
	}
}

// Corridors share no edge and cost no more than the whole.
func TestCorridors(t *testing.T) {
	net := graphiotest.Road(2000, 3)
	r := solve(t, net, graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2), exact.Options{Shares: true})
	list := r.Corridors(10)
	cost := 0.0
	for k, c := range list {
		cost += c.Cost
		if k > 0 && c.Mass > 4*list[0].Mass || len(c.Nodes) < 2 {
			t.Errorf("corridor %+v", c)
		}
	}
	if len(list) != 10 || cost > r.Upper || cost < 0.05*r.Upper {
		t.Errorf("%d corridors cost %v of %v", len(list), cost, r.Upper)
	}
	if all := r.Corridors(1 << 20); true {
		sum := 0.0
		for _, c := range all {
			sum += c.Cost
		}
		if math.Abs(sum-r.Upper) > 1e-9*r.Upper {
			t.Errorf("all corridors cost %v, the distance is %v", sum, r.Upper)
		}
	}
}

// Sums by district keep all cost; quantiles by hand: 1 goes 3, 1 goes 6, 1 goes 7.
func TestBetween(t *testing.T) {
	list := []exact.Movement{{From: 0, To: 2, Mass: 1, Length: 3}, {From: 0, To: 3, Mass: 1, Length: 7}, {From: 1, To: exact.Outside, Mass: 1, Length: 6}}
	got := exact.Between(list, []string{"old", "old", "new", "new"}, "outside")
	want := []exact.Transfer{{From: "old", To: "new", Mass: 2, Cost: 10}, {From: "old", To: "outside", Mass: 1, Cost: 6}}
	if len(got) != 2 || got[0] != want[0] || got[1] != want[1] {
		t.Errorf("%+v, want %+v", got, want)
	}
	for share, length := range map[float64]float64{0.3: 3, 0.5: 6, 0.9: 7} {
		if d := exact.Travelled(list, share); d != length {
			t.Errorf("%v of the mass goes up to %v, want %v", share, d, length)
		}
	}
	if exact.Travelled(nil, 0.5) != 0 {
		t.Error("nothing goes somewhere")
	}
}

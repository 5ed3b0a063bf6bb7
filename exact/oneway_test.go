package exact

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"example.org/barrow/graphio"
)

// oneWayNetwork has one-way edges mostly and, often, no way back.
func oneWayNetwork(rng *rand.Rand, n int) *graphio.Network {
	names := make([]string, n)
	for v := range names {
		names[v] = fmt.Sprint(v)
	}
	have := make(map[[2]int32]bool)
	var edges []graphio.Edge
	for range n + rng.IntN(2*n) {
		u, v, one := int32(rng.IntN(n)), int32(rng.IntN(n)), rng.IntN(4) > 0
		if u == v || have[[2]int32{u, v}] || !one && have[[2]int32{v, u}] {
			continue
		}
		have[[2]int32{u, v}] = true
		have[[2]int32{v, u}] = have[[2]int32{v, u}] || !one
		edges = append(edges, graphio.Edge{From: u, To: v, Length: math.Exp(rng.NormFloat64()), Weight: 1, OneWay: one})
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		panic(err)
	}
	return net
}

// walked is the sample with every mass taken along some one-way walk.
func walked(rng *rand.Rand, net *graphio.Network, p graphio.Sample) graphio.Sample {
	values := make([]float64, net.Order())
	for i, v := range p.Nodes {
		for range 3 { // a mass in three parts, each along a walk of its own
			at := int(v)
			for arcs := net.OutArcs(at); len(arcs) > 0 && rng.IntN(4) > 0; arcs = net.OutArcs(at) {
				at = int(arcs[rng.IntN(len(arcs))].Node)
			}
			values[at] += p.Values[i] / 3
		}
	}
	q := graphio.Sample{Name: "q"}
	for v, x := range values {
		if x > 0 {
			q.Nodes, q.Values = append(q.Nodes, int32(v)), append(q.Values, x)
		}
	}
	return q
}

// Where mass can get where it is wanted it is never refused, though most nodes
// cannot reach one another, and sums of its parts do not quite cancel.
func TestOneWayWithoutReturn(t *testing.T) {
	for seed := range uint64(1500) {
		rng := rand.New(rand.NewPCG(seed, 9))
		n := 3 + rng.IntN(8)
		net := oneWayNetwork(rng, n)
		p := randomSample(rng, "p", n, 0.5, false)
		q := walked(rng, net, p)
		r, err := Solve(net, p, q, Options{Shares: true})
		if err != nil {
			t.Errorf("seed %d: %v", seed, err)
			continue
		}
		if err := r.Verify(); err != nil {
			t.Errorf("seed %d: %v", seed, err)
		}
		// Unmatched mass at a cost no path exceeds: none is, and the program is
		// feasible in spite of rounding.
		if want := linearProgram(t, net, p.Share(), q.Share(), 1e4); !(math.Abs(r.Distance()-want) <= 1e-8*want+1e-9) {
			t.Errorf("seed %d: distance %v, linear program %v", seed, r.Distance(), want)
		}
	}
}

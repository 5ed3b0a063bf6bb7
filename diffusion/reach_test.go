package diffusion

import (
	"fmt"
	"math"
	"testing"

	"example.org/barrow/graphio"
)

// On a ring of edges of length 3 every step is 3 long and none ends early, so a
// walk gets 3 √t far (the variance of a sum of independent steps, by hand) and 3 in the
// mean where steps of squared length 1 and 5 take turns.
func TestReach(t *testing.T) {
	const n = 600
	names, edges := make([]string, n), make([]graphio.Edge, n)
	for v := range n {
		names[v] = fmt.Sprint(v)
		edges[v] = graphio.Edge{From: int32(v), To: int32((v + 1) % n), Length: 3, Weight: 1}
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	c, err := NewCascade(net, Options{})
	if err != nil {
		t.Fatal(err)
	}
	step := make([]float64, n)
	for v := range step {
		step[v] = 9
	}
	for k, reach := range c.Reach(step) {
		if len(reach) != c.Size(k) {
			t.Fatalf("scale %d: %d values for %d nodes", k, len(reach), c.Size(k))
		}
		from := c.Schedule.Times[0] / 2
		if k > 0 {
			from = c.Schedule.Times[k-1]
		}
		for v, r := range reach {
			if want := 3 * math.Sqrt(from); math.Abs(r-want) > 1e-9*want {
				t.Fatalf("scale %d, node %d: reach %g, by hand %g", k, v, r, want)
			}
		}
	}
	// steps of 1 and 5 in turn: half of each after a long time
	step = make([]float64, n)
	for v := range step {
		step[v] = float64(1 + 4*(v%2))
	}
	all := c.Reach(step)
	last := len(all) - 1
	for _, r := range all[last] {
		if want := math.Sqrt(3 * c.Schedule.Times[last-1]); math.Abs(r-want) > 0.02*want {
			t.Fatalf("reach %g after a long time, by hand %g", r, want)
		}
	}
}

package pairwise

import (
	"context"
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// No bound lies below the exact distance, which the solver proves, and none is
// far above; on trees the hierarchy is exact.
func TestFlowAndHierarchyBound(t *testing.T) {
	for _, c := range graphiotest.Cases() {
		samples := graphiotest.Samples(c.Net, c.P, c.Q, graphiotest.Smooth(c.Net, 1), c.P)
		tree := c.Net.Size() == c.Net.Order()-1
		for _, m := range []method{{"flow", Flow}, {"hierarchy", Hierarchy}} {
			for _, hold := range []string{"", "disk"} {
				r := must(t, m, c.Net, samples, Options{Shares: true, Hold: hold, Scratch: t.TempDir()})
				for i := range 4 {
					for j := range i {
						want, err := exact.Solve(c.Net, samples.At(i), samples.At(j), exact.Options{Shares: true})
						if err != nil {
							t.Fatal(err)
						}
						_, upper, ok := r.Matrix.Bounds(i, j)
						if !ok || upper < want.Lower || i == 3 && j == 0 && upper != 0 {
							t.Errorf("%s, %s: %d to %d is at most %g, and at least %g", c.Name, m.name, i, j, upper, want.Lower)
						}
						if d := r.Matrix.At(i, j); tree && math.Abs(d-want.Distance()) > 1e-5*want.Distance()+1e-9 {
							t.Errorf("%s, %s: %g, exactly %g", c.Name, m.name, d, want.Distance())
						}
					}
				}
			}
		}
	}
}

// One-way edges are left aside, so nothing is bounded.
func TestFlowOneWay(t *testing.T) {
	c := graphiotest.Directed()[2]
	samples := graphiotest.Samples(c.Net, c.P, c.Q)
	for _, m := range []method{{"flow", Flow}, {"hierarchy", Hierarchy}} {
		if r := must(t, m, c.Net, samples, Options{Shares: true}); r.Matrix.Upper != nil || r.Matrix.At(0, 1) <= 0 {
			t.Errorf("%s: bounds %v of a distance of %g", m.name, r.Matrix.Upper, r.Matrix.At(0, 1))
		}
	}
}

// Fitted conductances bring the bound close, and a calibrated hierarchy ranks.
func TestFlowIsClose(t *testing.T) {
	net, samples := town(t, 24)
	want := must(t, method{"exact", Exact}, net, samples, Options{Shares: true}).Matrix.Value
	flow := must(t, method{"flow", Flow}, net, samples, Options{Shares: true, Seed: 1}).Matrix.Value
	var ratio []float64
	for i, x := range want {
		ratio = append(ratio, flow[i]/x)
	}
	slices.Sort(ratio)
	if middle := ratio[len(ratio)/2]; ratio[0] < 1-1e-6 || middle > 1.25 {
		t.Errorf("bounds are %.3f times the distance at least, %.3f in the middle", ratio[0], middle)
	}
	h := must(t, method{"hierarchy", Hierarchy}, net, samples, Options{Shares: true, Seed: 1, Calibrate: -1})
	if r := stat.Correlation(want, h.Matrix.Value, nil); r < 0.75 || h.Calibration == nil {
		t.Errorf("hierarchy: correlation %.3f", r)
	}
}

// awkward is a network in several parts, with a hub of degree 100 thousand,
// isolated nodes and lengths nine orders apart.
func awkward(t *testing.T) *graphio.Network {
	t.Helper()
	const leaves = 100_000
	names := make([]string, leaves+60)
	var edges []graphio.Edge
	join := func(u, v int, length float64) {
		edges = append(edges, graphio.Edge{From: int32(u), To: int32(v), Length: length, Weight: 1 / length})
	}
	for v := range names {
		names[v] = string(rune('a'+v%26)) + string(rune('a'+v/26%26)) + string(rune('a'+v/676%26)) + string(rune('a'+v/17576))
		if v > 0 && v <= leaves {
			join(0, v, math.Pow(10, float64(v%10)-4)) // 1e-4 to 1e5
		}
	}
	for v := leaves + 1; v < leaves+40; v++ {
		join(v, v+1, 2) // a part of its own; what follows is isolated
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	return net
}

// Every method takes awkward networks and samples: one node, the same sample
// twice, mass in every part alike, two samples, and one.
func TestAwkward(t *testing.T) {
	net := awkward(t)
	at := func(name string, nodes ...int32) graphio.Sample {
		s := graphio.Sample{Name: name, Nodes: nodes}
		for range nodes {
			s.Values = append(s.Values, 1)
		}
		return s
	}
	list := []graphio.Sample{
		at("a", 3, 100_005, 100_055), at("b", 14, 100_030, 100_055), at("c", 3, 100_005, 100_055),
		at("d", 99_999, 100_001, 100_055), at("e", 0, 100_040, 100_055),
	}
	for _, m := range []method{{"multiscale", Multiscale}, {"flow", Flow}, {"hierarchy", Hierarchy}, {"exact", Exact}, {"kernel", Kernel}} {
		for _, count := range []int{5, 2} {
			samples, err := graphio.NewSamples(net.Order(), list[:count])
			if err != nil {
				t.Fatal(err)
			}
			r := must(t, m, net, samples, Options{Shares: true, Calibrate: -1, Seed: 1})
			for i := range count {
				for j := range i {
					d := r.Matrix.At(i, j)
					if equal := i == 2 && j == 0; !(d >= 0) || math.IsInf(d, 1) || (d == 0) != equal {
						t.Errorf("%s: %d and %d are %g apart", m.name, i, j, d)
					}
				}
			}
		}
	}
	alike, err := graphio.NewSamples(net.Order(), []graphio.Sample{list[0], list[2]})
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range []method{{"multiscale", Multiscale}, {"flow", Flow}, {"hierarchy", Hierarchy}} {
		r := must(t, m, net, alike, Options{Shares: true, Calibrate: -1, Seed: 1})
		if d := r.Matrix.At(0, 1); d != 0 {
			t.Errorf("%s: nothing but the same sample twice, %g apart", m.name, d)
		}
	}
	one, err := graphio.NewSamples(net.Order(), list[:1])
	if err != nil {
		t.Fatal(err)
	}
	if r, err := Multiscale(context.Background(), net, one, Options{Shares: true, Calibrate: -1}); err != nil || len(r.Matrix.Value) != 0 {
		t.Errorf("one sample: %v, %v", r, err)
	}
}

// Counts of one source are 0 apart on average by the unbiased kernel, and
// counts of two are not.
func TestUnbiasedKernel(t *testing.T) {
	net := graphiotest.Road(220, 4)
	var list []graphio.Sample
	for i := range uint64(40) {
		list = append(list, graphiotest.Counts(graphiotest.Smooth(net, i/20), 300, i))
	}
	r := must(t, method{"kernel", Kernel}, net, graphiotest.Samples(net, list...), Options{Shares: true, Unbiased: true})
	var within, between []float64
	for i := range list {
		for j := range i {
			if d := r.Matrix.At(i, j); i/20 == j/20 {
				within = append(within, d)
			} else {
				between = append(between, d)
			}
		}
	}
	mean, spread := stat.MeanStdDev(within, nil)
	// 380 pairs of 40 samples: some 40 independent ones.
	if math.Abs(mean) > 4*spread/math.Sqrt(40) || slices.Min(within) >= 0 {
		t.Errorf("within a source %g apart on average, spread %g, least %g", mean, spread, slices.Min(within))
	}
	if least := slices.Min(between); least < 3*spread {
		t.Errorf("between sources %g apart at least", least)
	}
}

package dual

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func someTerms(t *testing.T, net *graphio.Network) *Terms {
	t.Helper()
	rng := rand.New(rand.NewPCG(1, 2))
	use := make([]float64, net.Size())
	conductance := make([]float64, net.Size())
	for e := range use {
		use[e] = rng.Float64()
		conductance[e] = (0.01 + use[e]) / net.EdgeList()[e].Length
	}
	_, _, levels, err := HierarchyTree(net)
	if err != nil {
		t.Fatal(err)
	}
	terms, err := NewTerms(net, TermOptions{Levels: levels, Flows: [][]float64{nil, conductance}, Use: use, Groups: 3})
	if err != nil {
		t.Fatal(err)
	}
	return terms
}

// The vectors' L1 distance is the weighted sum of the terms, for any weights,
// and terms without weight take no room.
func TestEstimatorAddsUpTerms(t *testing.T) {
	net := graphiotest.Road(500, 3)
	samples := mixture(t, net, 20)
	terms := someTerms(t, net)
	var pairs []Pair
	for i := range samples.Len() - 1 {
		pairs = append(pairs, Pair{samples.At(i), samples.At(i + 1)})
	}
	pairs = append(pairs, Pair{samples.At(0), samples.At(samples.Len() - 1)}) // the same
	values, err := terms.Of(context.Background(), pairs, 0)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(3, 4))
	for range 5 {
		weights := make([]float64, len(terms.Names()))
		for k := range weights {
			weights[k] = max(0, rng.Float64()-0.5)
		}
		e, err := terms.Weigh(weights)
		if err != nil {
			t.Fatal(err)
		}
		all, err := e.Embed(context.Background(), samples, 0, nil)
		if err != nil {
			t.Fatal(err)
		}
		if all.Width != e.Width() || all.Width >= terms.MostWidth() {
			t.Errorf("width %d, of %d at most", all.Width, terms.MostWidth())
		}
		for at := range pairs {
			i, j := at, at+1
			if at == len(pairs)-1 {
				i, j = 0, samples.Len()-1
			}
			want := 0.0
			for k, w := range weights {
				want += w * values[at][k]
			}
			var got [1]float64
			all.AddDistances(got[:], i, i+1, j, j+1)
			if math.Abs(got[0]-want) > 1e-5*want {
				t.Fatalf("%d and %d: vectors are %g apart, terms add up to %g", i, j, got[0], want)
			}
		}
	}
	if last := values[len(values)-1]; slices.Max(last) != 0 {
		t.Errorf("terms %v of a sample and itself", last)
	}
}

// A vector depends neither on threads nor on the other samples.
func TestEstimatorAlone(t *testing.T) {
	net := graphiotest.Road(300, 3)
	samples := mixture(t, net, 40)
	terms := someTerms(t, net)
	weights := make([]float64, len(terms.Names()))
	for k := range weights {
		weights[k] = float64(1 + k)
	}
	e, err := terms.Weigh(weights)
	if err != nil {
		t.Fatal(err)
	}
	var all [2]*Embedding
	for i := range all {
		if all[i], err = e.Embed(context.Background(), samples, 1+i, nil); err != nil {
			t.Fatal(err)
		}
	}
	if !slices.Equal(all[0].Vectors, all[1].Vectors) {
		t.Error("threads change vectors")
	}
	alone, err := e.Embed(context.Background(), graphiotest.Samples(net, samples.At(33)), 0, nil)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(alone.Row(0), all[0].Row(33)) {
		t.Error("other samples change a vector")
	}
}

// Reweighting for one pair comes close to its cheapest flow; for several it
// makes them all cheaper in the mean.
func TestReweight(t *testing.T) {
	net := graphiotest.Grid(8, 9, 5)
	p, q := graphiotest.Sparse(net, 9, 1).Share(), graphiotest.Sparse(net, 12, 2).Share()
	cost := func(conductance []float64, p, q graphio.Sample) float64 {
		return flows(t, net, graphiotest.Samples(net, p, q), FlowOptions{Conductance: conductance}, 0).Upper(0, 1)
	}
	c, err := Reweight(context.Background(), net, []Pair{{p, q}}, 0, 12, 0)
	if err != nil {
		t.Fatal(err)
	}
	best := program(t, net, p, q)
	if got := cost(c, p, q); got < best*(1-1e-6) || got > 1.03*best {
		t.Errorf("reweighted flow costs %g, the cheapest %g, the current %g", got, best, cost(nil, p, q))
	}
	var pairs []Pair
	for i := range uint64(10) {
		pairs = append(pairs, Pair{graphiotest.Sparse(net, 5, 10+i).Share(), graphiotest.Sparse(net, 5, 30+i).Share()})
	}
	if c, err = Reweight(context.Background(), net, pairs, 0, 6, 0); err != nil {
		t.Fatal(err)
	}
	plain, reweighted := 0.0, 0.0
	for _, at := range pairs {
		plain += cost(nil, at.P, at.Q)
		reweighted += cost(c, at.P, at.Q)
	}
	if reweighted > 0.97*plain {
		t.Errorf("reweighted flows cost %g, plain ones %g", reweighted, plain)
	}
}

// taxi is close to manhattan for any length, the same both ways, and its blocks
// have the bits of the plain form.
func TestTaxi(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for _, n := range []int{0, 1, 63, 64, 65, 200, 2048, 2049, 10000} {
		a, b := make([]float32, n), make([]float32, n)
		for i := range a {
			a[i], b[i] = float32(rng.NormFloat64()), float32(rng.NormFloat64())
		}
		want := manhattan(a, b)
		if got := taxi(a, b); math.Abs(got-want) > 1e-6*want || got != taxi(b, a) {
			t.Errorf("length %d: %g one way, %g the other, %g by manhattan", n, got, taxi(b, a), want)
		}
		var fast, plain [8]float64
		taxiBlocks(&fast, a[:n&^63], b[:n&^63])
		taxiPlain(&plain, a[:n&^63], b[:n&^63])
		if fast != plain {
			t.Errorf("length %d: %v in assembly, %v plain", n, fast, plain)
		}
	}
}

// The terms of the levels by hand: on a path of four nodes, lengths 1, 4 and 2,
// the ends join first, then the middle. A unit from the first to the last node
// differs by 1 in both nodes, of size 1 and 2, and in both pairs, of size the
// mean of all lengths, 7/3.
func TestLevels(t *testing.T) {
	list := []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1}, {From: 1, To: 2, Length: 4, Weight: 0.25}, {From: 2, To: 3, Length: 2, Weight: 0.5}}
	net := network(t, 4, list...)
	h := diffusion.NewHierarchy(diffusion.NewWalk(net))
	if h.Levels() != 1 {
		t.Fatalf("%d levels of four nodes", h.Levels())
	}
	levels := &Levels{parent: [][]int32{{0, 0, 1, 1}, {0, 0}}}
	levels.setSizes([]graphio.Edge{list[0], list[2], list[1]}, []float64{1, 1, 2})
	terms, err := NewTerms(net, TermOptions{NoScales: true, Levels: levels})
	if err != nil {
		t.Fatal(err)
	}
	got, err := terms.Of(context.Background(), []Pair{{graphiotest.Point(0), graphiotest.Point(3)}}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if want := []float64{3, 14. / 3}; math.Abs(got[0][0]-want[0]) > 1e-6 || math.Abs(got[0][1]-want[1]) > 1e-6 {
		t.Errorf("terms %v, by hand %v", got[0], want)
	}
}

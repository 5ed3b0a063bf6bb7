package dual

import (
	"context"
	"encoding/json"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/floats"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func estimator(t *testing.T, net *graphio.Network, opt Options) *Multiscale {
	t.Helper()
	m, err := NewMultiscale(net, opt)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func embed(t *testing.T, m *Multiscale, samples *graphio.Samples, threads int) *Embedding {
	t.Helper()
	e, err := m.Embed(context.Background(), samples, threads, nil)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// mixture is smooth, sparse and point samples over a network, as shares; the
// last is the first again.
func mixture(t *testing.T, net *graphio.Network, count int) *graphio.Samples {
	t.Helper()
	var list []graphio.Sample
	for i := range uint64(count - 1) {
		switch i % 3 {
		case 0:
			list = append(list, graphiotest.Smooth(net, i).Share())
		case 1:
			list = append(list, graphiotest.Sparse(net, 20, i).Share())
		default:
			list = append(list, graphiotest.Point(int(i*37)%net.Order()))
		}
	}
	return graphiotest.Samples(net, append(list, list[0])...)
}

// 0 for the same sample wherever it stands, the same both ways, and no detour
// is shorter: an L1 distance.
func TestMetric(t *testing.T) {
	net := graphiotest.Road(600, 2)
	for _, full := range []bool{false, true} {
		samples := mixture(t, net, 2*16+5)
		e := embed(t, estimator(t, net, Options{Full: full}), samples, 0)
		w := e.Theory()
		n := e.Rows
		for _, x := range e.Terms(0, n-1, nil) {
			if x != 0 {
				t.Errorf("a sample is %g from itself", x)
			}
		}
		for i := range n {
			for j := range n {
				d := e.Distance(i, j, w)
				if d != e.Distance(j, i, w) || !(d >= 0) || (d == 0) != (i == j || i+j == n-1 && i*j == 0) {
					t.Fatalf("distance of %d and %d is %g one way and %g the other", i, j, d, e.Distance(j, i, w))
				}
				for k := range n {
					if d > (e.Distance(i, k, w)+e.Distance(k, j, w))*(1+1e-5) {
						t.Fatalf("%d to %d is farther than by %d", i, j, k)
					}
				}
			}
		}
	}
}

func TestSameBytesForAnyThreads(t *testing.T) {
	net := graphiotest.Road(500, 3)
	samples := mixture(t, net, 70)
	m := estimator(t, net, Options{})
	one := embed(t, m, samples, 1)
	for _, threads := range []int{2, 3, 9} {
		if !slices.Equal(embed(t, m, samples, threads).Vectors, one.Vectors) {
			t.Errorf("%d threads give other bytes than one", threads)
		}
	}
	if again := embed(t, estimator(t, net, Options{}), samples, 2); !slices.Equal(again.Vectors, one.Vectors) {
		t.Error("a second estimator gives other bytes")
	}
}

// Distances has the bits of Distance, and manhattan those of its plain form.
func TestDistancesInBlocks(t *testing.T) {
	net := graphiotest.Road(3000, 3)
	e := embed(t, estimator(t, net, Options{}), mixture(t, net, 12), 0)
	w := e.Theory()
	dst := make([]float64, 5*7)
	e.Distances(dst, 2, 7, 4, 11, w)
	for i := range 5 {
		for j := range 7 {
			if got, want := dst[i*7+j], e.Distance(2+i, 4+j, w); got != want {
				t.Errorf("block has %v for %d and %d, pair %v", got, 2+i, 4+j, want)
			}
		}
	}
}

func TestManhattan(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for n := range 200 {
		a, b := make([]float32, n), make([]float32, n)
		want := 0.0
		for i := range a {
			a[i], b[i] = float32(rng.NormFloat64()), float32(rng.NormFloat64())
			want += math.Abs(float64(a[i] - b[i]))
		}
		var fast, plain [16]float64
		absolute(&fast, a[:n&^15], b[:n&^15])
		absolutePlain(&plain, a[:n&^15], b[:n&^15])
		if fast != plain {
			t.Fatalf("%d values: lanes %v, plain %v", n, fast, plain)
		}
		if got := manhattan(a, b); math.Abs(got-want) > 1e-12*(1+want) || got != manhattan(b, a) {
			t.Fatalf("%d values: %v, want %v", n, got, want)
		}
	}
}

// Lengths times 8, weights 1/length: the walk has the same bits. Times 3: the
// same up to rounding.
func TestScalingOfLengths(t *testing.T) {
	net := graphiotest.Road(400, 4)
	samples := mixture(t, net, 9)
	base := embed(t, estimator(t, net, Options{}), samples, 0)
	for factor, tolerance := range map[float64]float64{8: 0, 3: 1e-4} {
		edges := slices.Clone(net.EdgeList())
		names := make([]string, net.Order())
		for v := range names {
			names[v] = net.Name(v)
		}
		for i := range edges {
			edges[i].Length *= factor
			edges[i].Weight = 1 / edges[i].Length
		}
		scaled, err := graphio.NewNetwork(names, edges)
		if err != nil {
			t.Fatal(err)
		}
		e := embed(t, estimator(t, scaled, Options{}), samples, 0)
		for i := range e.Rows {
			a, b := base.Distance(0, i, base.Theory()), e.Distance(0, i, e.Theory())
			if math.Abs(a-b) > tolerance*a {
				t.Errorf("lengths times %g: distance %g becomes %g", factor, a, b)
			}
		}
	}
}

// The order of the nodes does not matter to the full form. In the coarse one
// ties between aggregates are broken by it, which moves most distances by a
// few in a hundred, and those of point masses close together by more.
func TestOrderOfNodes(t *testing.T) {
	net := graphiotest.Road(500, 5)
	samples := mixture(t, net, 30)
	order := rand.New(rand.NewPCG(5, 5)).Perm(net.Order()) // new number of a node
	names := make([]string, net.Order())
	for v, u := range order {
		names[u] = net.Name(v)
	}
	edges := slices.Clone(net.EdgeList())
	for i := range edges {
		edges[i].From, edges[i].To = int32(order[edges[i].From]), int32(order[edges[i].To])
	}
	other, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	var list []graphio.Sample
	for i := range samples.Len() {
		x, y := make([]float64, net.Order()), make([]float64, net.Order())
		samples.At(i).Dense(x, 1)
		for v, u := range order {
			y[u] = x[v]
		}
		list = append(list, sample(samples.At(i).Name, y...))
	}
	for full, tolerance := range map[bool][2]float64{true: {1e-4, 1e-3}, false: {0.1, 0.3}} {
		a := embed(t, estimator(t, net, Options{Full: full}), samples, 0)
		b := embed(t, estimator(t, other, Options{Full: full}), graphiotest.Samples(other, list...), 0)
		var changes []float64
		for i := range a.Rows {
			for j := range i {
				x, y := a.Distance(i, j, a.Theory()), b.Distance(i, j, b.Theory())
				if x > 0 {
					changes = append(changes, math.Abs(y/x-1))
				}
			}
		}
		slices.Sort(changes)
		median, most := changes[len(changes)/2], changes[len(changes)*95/100]
		t.Logf("full %v: distances change by %.2g in the median, %.2g at the 95th percentile", full, median, most)
		if median > tolerance[0] || most > tolerance[1] {
			t.Errorf("full %v: distances change by %g in the median, %g at the 95th percentile", full, median, most)
		}
	}
}

// On a complete network H is a multiple of I on differences of equal mass, so
// every term is a multiple of total variation (textbook).
func TestCompleteNetworkIsVariation(t *testing.T) {
	net := k5(t)
	list := []graphio.Sample{sample("mu", .5, .2, .2, .1, 0), sample("nu", .1, .3, .1, .1, .4), sample("c", 1), sample("d", 0, .25, .25, .25, .25)}
	e := embed(t, estimator(t, net, Options{}), graphiotest.Samples(net, list...), 0)
	base := e.Terms(0, 1, nil)
	for i := range list {
		for j := range i {
			ratio := Variation(list[i], list[j]) / 0.5
			for k, x := range e.Terms(i, j, nil) {
				if math.Abs(x-ratio*base[k]) > 2e-6 {
					t.Errorf("scale %d of %d and %d is %g, want %g", k, i, j, x, ratio*base[k])
				}
			}
		}
	}
	s := e.Scales[0] // 1 - e^{-λ t0} with λ t0 = 1
	if want := 2 * 0.5 * (1 - math.Exp(-1)); math.Abs(base[0]-want) > 1e-5 {
		t.Errorf("scale %s is %g, want %g", s.Name, base[0], want)
	}
}

// The witness attains the estimate, φ·(p - q) = Σ c_k ‖·‖₁, and the embedding
// is it to what float32 holds: worst, with lengths nine orders apart, 2e-3.
func TestWitnessAttainsEstimate(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		for _, full := range []bool{false, true} {
			p, q := c.P.Share(), c.Q.Share()
			m := estimator(t, c.Net, Options{Full: full})
			e := embed(t, m, graphiotest.Samples(c.Net, p, q), 0)
			x := make([]float64, c.Net.Order())
			p.Dense(x, 1)
			q.Dense(x, -1)
			estimate, rounding := 0.0, 0.0
			for k, y := range m.cascade.Split(x) {
				estimate += e.Scales[k].Weight * floats.Norm(y, 1)
				rounding += 3e-7 * e.Scales[k].Weight
			}
			got := LowerBound(m.Witness(p, q, e.Theory()), p, q)
			if math.Abs(got-estimate) > 1e-9*estimate {
				t.Errorf("%s, full %v: witness %.12g, estimate %.12g", c.Name, full, got, estimate)
			}
			if short := e.Distance(0, 1, e.Theory()); math.Abs(short-estimate) > 5e-3*estimate+rounding {
				t.Errorf("%s, full %v: %g in float32, %g in float64", c.Name, full, short, estimate)
			}
		}
	}
}

func TestEmbedStopsAndRefuses(t *testing.T) {
	net := graphiotest.Road(300, 1)
	m := estimator(t, net, Options{})
	ctx, cancel := context.WithCancel(context.Background())
	calls := 0
	e, err := m.Embed(ctx, mixture(t, net, 80), 2, func(done, total int) {
		calls++
		if done > total || total != 80 {
			t.Errorf("progress %d of %d", done, total)
		}
		cancel()
	})
	if err == nil || e != nil || calls == 0 || calls > 3 {
		t.Errorf("a cancelled run returned %v, %v after %d calls", e, err, calls)
	}
	other := graphiotest.Road(301, 1)
	if _, err := m.Embed(context.Background(), mixture(t, other, 2), 1, nil); err == nil {
		t.Error("samples of another network were embedded")
	}
	for _, opt := range []Options{{Alpha: 2}, {Alpha: -1}, {Alpha: math.NaN()}, {Tolerance: 1}, {Width: -1}} {
		if _, err := NewMultiscale(net, opt); err == nil {
			t.Errorf("options %+v were taken", opt)
		}
	}
}

// The record goes through JSON unchanged and weights grow as t^{α/2}.
func TestDescription(t *testing.T) {
	m := estimator(t, graphiotest.Road(300, 1), Options{Alpha: 0.5})
	d := m.Describe()
	data, err := json.Marshal(d)
	if err != nil {
		t.Fatal(err)
	}
	var back Description
	if err := json.Unmarshal(data, &back); err != nil {
		t.Fatal(err)
	}
	if len(back.Times) != len(d.Times) || back.Alpha != 0.5 || back.Width != m.Width() || len(back.Scales) != len(d.Times)+1 {
		t.Errorf("the record came back as %s", data)
	}
	for k := 2; k < len(d.Scales)-1; k++ {
		if r := d.Scales[k].Weight / d.Scales[k-1].Weight; math.Abs(r-math.Pow(2, 0.25)) > 1e-12 {
			t.Errorf("weight %d is %g times the one before, want 2^(α/2)", k, r)
		}
	}
}

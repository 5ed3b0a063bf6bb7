package resistor

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"example.org/barrow/graphio/shortest"
)

func circuit(t testing.TB, net *graphio.Network, opt Options) *Circuit {
	t.Helper()
	c, err := New(net, opt)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func route(c *Circuit, samples ...graphio.Sample) (rows [][]float32, slack [Lanes]float64) {
	for range samples {
		rows = append(rows, make([]float32, c.Size()))
	}
	var p Panel
	slack = c.Route(&p, samples, rows)
	return rows, slack
}

// current solves densely, by gonum's: f = C B L⁺ b with one node grounded.
func current(net *graphio.Network, conductance []float64, b []float64) []float64 {
	n := net.Order()
	l := mat.NewDense(n-1, n-1, nil)
	add := func(u, v int32, x float64) {
		if int(u) < n-1 && int(v) < n-1 {
			l.Set(int(u), int(v), l.At(int(u), int(v))+x)
		}
	}
	for i, e := range net.EdgeList() {
		c := conductance[i]
		add(e.From, e.From, c)
		add(e.To, e.To, c)
		add(e.From, e.To, -c)
		add(e.To, e.From, -c)
	}
	var x mat.VecDense
	if err := x.SolveVec(l, mat.NewVecDense(n-1, b[:n-1])); err != nil {
		if _, poor := err.(mat.Condition); !poor {
			panic(err)
		}
	}
	x0 := append(append([]float64{}, x.RawVector().Data...), 0)
	flow := make([]float64, net.Size())
	for i, e := range net.EdgeList() {
		flow[i] = conductance[i] * (x0[e.From] - x0[e.To])
	}
	return flow
}

// On every small network the flow is the current that gonum's dense solver
// finds, whatever the conductances.
func TestCurrent(t *testing.T) {
	cases := graphiotest.Cases()
	if len(cases) == 0 {
		t.Fatal("no cases")
	}
	for _, k := range cases {
		n := k.Net.Order()
		rng := rand.New(rand.NewPCG(1, 1))
		conductance := make([]float64, k.Net.Size())
		for i, e := range k.Net.EdgeList() {
			conductance[i] = (0.1 + rng.Float64()) / e.Length
		}
		rows, _ := route(circuit(t, k.Net, Options{Conductance: conductance}), k.P, k.Q)
		b := make([]float64, n)
		k.P.Dense(b, 1)
		k.Q.Dense(b, -1)
		want := current(k.Net, conductance, b)
		scale, off := 0.0, 0.0
		for i, e := range k.Net.EdgeList() {
			scale += math.Abs(e.Length * want[i])
			off += math.Abs(e.Length*want[i] - float64(rows[0][i]-rows[1][i]))
		}
		// float32 holds the flows of the samples, which add up to more than
		// their difference
		size := 0.0
		for i := range rows[0] {
			size += math.Abs(float64(rows[0][i]))
		}
		if off > 1e-6*(scale+size) {
			t.Errorf("%s: costs differ by %g in all of %g", k.Name, off, scale)
		}
	}
}

// larger networks, where elimination is exact only at first and ends with a
// full matrix, or is sampled
func larger() map[string]*graphio.Network {
	return map[string]*graphio.Network{
		"road":       graphiotest.Road(3000, 1),
		"neighbours": graphiotest.KNN(3000, 2, 8, 1),
		"high":       graphiotest.KNN(4000, 8, 10, 1),
		"scale-free": graphiotest.ScaleFree(4000, 5, 1),
		"grid":       graphiotest.Grid(150, 150, 1),
	}
}

// The residual that the solver leaves is a small part of what it was given,
// also where the elimination is sampled, and some of the networks here are.
func TestSolve(t *testing.T) {
	sampled := 0
	for name, net := range larger() {
		c := circuit(t, net, Options{})
		if !c.factor.exact() {
			sampled++
		}
		var p Panel
		p.fit(c)
		rng := rand.New(rand.NewPCG(1, 1))
		b, mean := make([]row, net.Order()), row{}
		for i := range b {
			for l := range b[i] {
				b[i][l] = rng.NormFloat64()
				mean[l] += b[i][l] / float64(len(b))
			}
		}
		for i := range b {
			for l := range b[i] {
				b[i][l] -= mean[l]
			}
		}
		copy(p.x, b)
		c.solve(&p)
		var left, all float64
		for i, e := range net.EdgeList() {
			from, to := c.factor.place[e.From], c.factor.place[e.To]
			for l := range mean {
				current := c.conductance[i] * (p.x[from][l] - p.x[to][l])
				b[from][l] -= current
				b[to][l] += current
			}
		}
		for i := range b {
			for _, r := range b[i] {
				left += r * r
				all++
			}
		}
		if ratio := math.Sqrt(left / all); ratio > 10*aim {
			t.Errorf("%s: residual of %.2g after %d steps", name, ratio, c.steps)
		}
	}
	if sampled == 0 {
		t.Error("no network was sampled")
	}
}

// The sum of what the stored costs carry, in exact arithmetic as far as float64
// goes, differs from the sample by no more than the slack pays for.
func TestSlack(t *testing.T) {
	for _, k := range graphiotest.Cases() {
		c := circuit(t, k.Net, Options{})
		rows, slack := route(c, k.P.Share(), k.Q.Share())
		dist := shortest.From(k.Net, int(c.tree.roots[0]), shortest.Either)
		for s, sample := range []graphio.Sample{k.P.Share(), k.Q.Share()} {
			left := make([]float64, k.Net.Order())
			sample.Dense(left, 1)
			for v := range left {
				left[v] -= 1 / float64(len(left))
			}
			for i, e := range k.Net.EdgeList() {
				f := float64(rows[s][i]) / e.Length
				left[e.From] -= f
				left[e.To] += f
			}
			// A potential of the distances to the root is 1-Lipschitz, so what
			// is left costs at least this to carry off.
			cost := 0.0
			for v, x := range left {
				cost += x * dist[v]
			}
			if math.Abs(cost) > slack[s]+1e-12*c.tree.height {
				t.Errorf("%s: %g of cost is left, and the slack is %g", k.Name, cost, slack[s])
			}
			if slack[s] > 1e-5*c.tree.height {
				t.Errorf("%s: a slack of %g where paths are %g", k.Name, slack[s], c.tree.height)
			}
		}
	}
}

// Components rest by themselves, isolated nodes keep their mass, and a hub of
// degree 100 thousand is no trouble.
func TestAwkward(t *testing.T) {
	var edges []graphio.Edge
	names := make([]string, 100004)
	for v := range names {
		names[v] = fmt.Sprint(v)
		if v > 0 && v <= 100000 {
			edges = append(edges, graphio.Edge{From: 0, To: int32(v), Length: 1, Weight: 1})
		}
	}
	for v := int32(1); v < 100000; v += 2 {
		edges = append(edges, graphio.Edge{From: v, To: v + 1, Length: 1, Weight: 1})
	}
	edges = append(edges, graphio.Edge{From: 100001, To: 100002, Length: 3, Weight: 1})
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	c := circuit(t, net, Options{})
	p := graphio.Sample{Name: "p", Nodes: []int32{1, 100001, 100003}, Values: []float64{1, 1, 2}}
	q := graphio.Sample{Name: "q", Nodes: []int32{2, 100002, 100003}, Values: []float64{1, 1, 2}}
	rows, slack := route(c, p, q)
	sum := 0.0
	for i := range rows[0] {
		sum += math.Abs(float64(rows[0][i]) - float64(rows[1][i]))
	}
	// Nodes 1 and 2 are joined by an edge of 1 and a way of 2 through the hub:
	// two thirds of the current and one third; by hand, 2/3 + 2·1/3 + 3.
	if want := 2./3 + 2./3 + 3; math.Abs(sum-want) > 1e-5 {
		t.Errorf("cost %g, by hand %g", sum, want)
	}
	if slack[0] > 1e-4 {
		t.Errorf("slack %g", slack[0])
	}
}

// With an extra node, mass without a counterpart comes from there: between two
// samples of 1 and 3 on one edge, 2 are created (by hand).
func TestUnmatched(t *testing.T) {
	net, err := graphio.NewNetwork([]string{"a", "b"}, []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1}})
	if err != nil {
		t.Fatal(err)
	}
	c := circuit(t, net, Options{Unmatched: 10, Conductance: []float64{1, 1, 1e-9}})
	rows, _ := route(c,
		graphio.Sample{Name: "p", Nodes: []int32{0}, Values: []float64{1}},
		graphio.Sample{Name: "q", Nodes: []int32{1}, Values: []float64{3}})
	want := []float64{1 + 2, -2 * 10, 0} // 3 units move from b to a; 2 come in at a
	for i, w := range want {
		if d := float64(rows[0][i] - rows[1][i]); math.Abs(d-w) > 1e-5 {
			t.Errorf("edge %d: %g, by hand %g", i, d, w)
		}
	}
}

func TestErrors(t *testing.T) {
	net := graphiotest.Grid(3, 3, 1)
	for _, bad := range [][]float64{{1}, {1, 1, 1, 1, 0, 1, 1, 1, 1, 1, 1, 1}, {1, 1, 1, 1, math.Inf(1), 1, 1, 1, 1, 1, 1, 1}} {
		if _, err := New(net, Options{Conductance: bad}); err == nil {
			t.Errorf("conductances %v are taken", bad)
		}
	}
}

// The assembly has the bits of the plain forms.
func TestRowsPlain(t *testing.T) {
	c := circuit(t, graphiotest.KNN(4000, 8, 10, 1), Options{})
	if c.factor.exact() {
		t.Fatal("no core to try the product on")
	}
	rng := rand.New(rand.NewPCG(1, 3))
	fill := func(n int) []row {
		b := make([]row, n)
		for i := range b {
			for l := range b[i] {
				b[i][l] = rng.NormFloat64()
			}
		}
		return b
	}
	n, core := len(c.factor.order), len(c.laplacian.diagonal)
	fast, plain := fill(n), make([]row, n)
	copy(plain, fast)
	c.factor.forward(fast, 3, n)
	c.factor.forwardPlain(plain, 3, n)
	c.factor.backward(fast, 3, n)
	c.factor.backwardPlain(plain, 3, n)
	if !slices.Equal(fast, plain) {
		t.Error("factors differ")
	}
	x := fill(core)
	a, b := make([]row, core), make([]row, core)
	c.laplacian.product(a, x, 5, core)
	c.laplacian.productPlain(b, x, 5, core)
	if !slices.Equal(a, b) {
		t.Error("products differ")
	}
}

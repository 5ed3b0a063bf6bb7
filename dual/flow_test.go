package dual

import (
	"context"
	"slices"
	"testing"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func flows(t *testing.T, net *graphio.Network, samples *graphio.Samples, opt FlowOptions, threads int) *FlowEmbedding {
	t.Helper()
	f, err := NewFlow(net, opt)
	if err != nil {
		t.Fatal(err)
	}
	e, err := f.Embed(context.Background(), samples, threads, nil)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// On every small network the bound lies above the distance that gonum's
// simplex finds, and on trees, where there is only one flow, it is that.
func TestUpper(t *testing.T) {
	for _, c := range graphiotest.Cases() {
		p, q := c.P.Share(), c.Q.Share()
		want := program(t, c.Net, p, q)
		e := flows(t, c.Net, graphiotest.Samples(c.Net, p, q, p), FlowOptions{}, 0)
		upper := e.Upper(0, 1)
		if upper < want*(1-1e-9) || upper > 3*want+1.001*(e.Slack[0]+e.Slack[1]) {
			t.Errorf("%s: bound %g of a distance of %g", c.Name, upper, want)
		}
		if c.Net.Size() == c.Net.Order()-1 && upper > want*(1+1e-5)+1e-9 {
			t.Errorf("%s: bound %g of a distance of %g on a tree", c.Name, upper, want)
		}
		if upper != e.Upper(1, 0) || e.Upper(1, 1) != 0 {
			t.Errorf("%s: bounds %g and %g of the two orders, %g of a sample and itself", c.Name, upper, e.Upper(1, 0), e.Upper(1, 1))
		}
		if !slices.Equal(e.Row(0), e.Row(2)) {
			t.Errorf("%s: the same sample has different vectors", c.Name)
		}
	}
}

// Mass may be created and removed at a cost: with gonum's simplex on the network
// with a node more.
func TestUpperUnmatched(t *testing.T) {
	net := graphiotest.Grid(5, 6, 3)
	p, q := graphiotest.Sparse(net, 6, 1), graphiotest.Sparse(net, 9, 2)
	const cost = 0.4
	e := flows(t, net, graphiotest.Samples(net, p, q), FlowOptions{Unmatched: cost}, 0)
	edges := append([]graphio.Edge{}, net.EdgeList()...)
	for v := range int32(30) {
		edges = append(edges, graphio.Edge{From: v, To: 30, Length: cost, Weight: 1})
	}
	more := network(t, 31, edges...)
	pad := func(s, other graphio.Sample) graphio.Sample {
		if d := other.Total() - s.Total(); d > 0 {
			s.Nodes, s.Values = append(slices.Clone(s.Nodes), 30), append(slices.Clone(s.Values), d)
		}
		return s
	}
	want := program(t, more, pad(p, q), pad(q, p))
	if upper := e.Upper(0, 1); upper < want*(1-1e-9) || upper > 3*want {
		t.Errorf("bound %g of a distance of %g", upper, want)
	}
}

// A sample's vector depends neither on threads nor on the other samples.
func TestFlowAlone(t *testing.T) {
	net := graphiotest.KNN(800, 8, 10, 1) // sampled elimination: many steps
	samples := mixture(t, net, 21)
	one, two := flows(t, net, samples, FlowOptions{}, 1), flows(t, net, samples, FlowOptions{}, 2)
	if !slices.Equal(one.Vectors, two.Vectors) || !slices.Equal(one.Slack, two.Slack) {
		t.Error("threads change vectors")
	}
	alone := flows(t, net, graphiotest.Samples(net, samples.At(13)), FlowOptions{}, 0)
	if !slices.Equal(alone.Row(0), one.Row(13)) {
		t.Error("other samples change a vector")
	}
}

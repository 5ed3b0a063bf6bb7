package graphio_test

import (
	"math"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func TestNewNetworkRefuses(t *testing.T) {
	edge := graphio.Edge{From: 0, To: 1, Length: 1, Weight: 1}
	with := func(change func(*graphio.Edge)) []graphio.Edge {
		e := edge
		change(&e)
		return []graphio.Edge{e}
	}
	for name, c := range map[string]struct {
		names []string
		edges []graphio.Edge
		word  string
	}{
		"name twice":       {[]string{"a", "a"}, nil, `"a"`},
		"no name":          {[]string{"a", ""}, nil, "name"},
		"not UTF-8":        {[]string{"a", "\xff"}, nil, "UTF-8"},
		"end out of range": {[]string{"a"}, []graphio.Edge{edge}, "node"},
		"loop":             {[]string{"a", "b"}, with(func(e *graphio.Edge) { e.To = 0 }), "a self-loop"},
		"no length":        {[]string{"a", "b"}, with(func(e *graphio.Edge) { e.Length = 0 }), "length 0"},
		"length NaN":       {[]string{"a", "b"}, with(func(e *graphio.Edge) { e.Length = math.NaN() }), "length NaN"},
		"weight below 0":   {[]string{"a", "b"}, with(func(e *graphio.Edge) { e.Weight = -1 }), "weight -1"},
		"edge twice":       {[]string{"a", "b"}, []graphio.Edge{edge, edge}, "as edge number 1 does"},
	} {
		_, err := graphio.NewNetwork(c.names, c.edges)
		if err == nil || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s: error %v, want one with %q", name, err, c.word)
		}
	}
	net := path3(t)
	if err := net.SetPlaces([]float64{1}, []float64{1}, false); err == nil {
		t.Error("fewer places than nodes are accepted")
	}
	if err := net.SetDistricts([]string{"x"}); err == nil {
		t.Error("fewer districts than nodes are accepted")
	}
}

// Arcs lead both ways unless the edge is one-way, and add up to the edges.
func TestArcs(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		all, out, in, ways := 0, 0, 0, 0
		for v := range c.Net.Order() {
			all += len(c.Net.Arcs(v))
			out += len(c.Net.OutArcs(v))
			in += len(c.Net.InArcs(v))
			for _, a := range c.Net.OutArcs(v) {
				e := c.Net.EdgeList()[a.Edge]
				if e.From^e.To^a.Node != int32(v) || e.OneWay && e.From != int32(v) {
					t.Fatalf("%s: arc %v of node %d is not of edge %v", c.Name, a, v, e)
				}
			}
		}
		for _, e := range c.Net.EdgeList() {
			ways++
			if !e.OneWay {
				ways++
			}
		}
		if all != 2*c.Net.Size() || out != ways || in != ways {
			t.Errorf("%s: %d arcs, %d out, %d in, of %d edges with %d ways", c.Name, all, out, in, c.Net.Size(), ways)
		}
	}
}

// Components do not depend on the order of nodes and edges.
func TestComponents(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 30).Draw(t, "nodes")
		var edges []graphio.Edge
		for from := range int32(n) {
			for to := range from {
				if rapid.IntRange(0, n).Draw(t, "edge") == 0 {
					edges = append(edges, graphio.Edge{From: from, To: to, Length: 1, Weight: 1})
				}
			}
		}
		make := func(edges []graphio.Edge) *graphio.Network {
			names := make([]string, n)
			for v := range names {
				names[v] = string(rune('A' + v))
			}
			net, err := graphio.NewNetwork(names, edges)
			if err != nil {
				t.Fatal(err)
			}
			return net
		}
		label, count := make(edges).Components()
		turned := slices.Clone(edges)
		slices.Reverse(turned)
		again, countAgain := make(turned).Components()
		if count != countAgain || !slices.Equal(label, again) {
			t.Fatalf("labels %v, in another order of edges %v", label, again)
		}
		for _, e := range edges {
			if label[e.From] != label[e.To] {
				t.Fatalf("edge %v leads from component %d to %d", e, label[e.From], label[e.To])
			}
		}
		// n − edges of a spanning forest are the components.
		joined, find := n, joiner(n)
		for _, e := range edges {
			if a, b := find(e.From), find(e.To); a != b {
				find(-1 - a*int32(n) - b)
				joined--
			}
		}
		if joined != count {
			t.Fatalf("%d components, %d by joining", count, joined)
		}
	})
}

// joiner is union-find by relabelling: find(v), and find(-1-a*n-b) joins a to b.
func joiner(n int) func(int32) int32 {
	label := make([]int32, n)
	for v := range label {
		label[v] = int32(v)
	}
	return func(v int32) int32 {
		if v >= 0 {
			return label[v]
		}
		a, b := (-1-v)/int32(n), (-1-v)%int32(n)
		for i := range label {
			if label[i] == a {
				label[i] = b
			}
		}
		return b
	}
}

func TestSamples(t *testing.T) {
	s := graphio.Sample{Name: "s", Nodes: []int32{0, 2}, Values: []float64{1, 3}}
	if s.Total() != 4 || !s.Counts() || !slices.Equal(s.Share().Values, []float64{0.25, 0.75}) {
		t.Errorf("total %v, counts %v, share %v", s.Total(), s.Counts(), s.Share())
	}
	dst := []float64{1, 1, 1}
	s.Dense(dst, -2)
	if !slices.Equal(dst, []float64{-1, 1, -5}) {
		t.Errorf("dense %v", dst)
	}
	// A thousand thousandths are 1, not 1 and some rounding.
	tenth := graphio.Sample{Nodes: make([]int32, 1000), Values: make([]float64, 1000)}
	for i := range tenth.Values {
		tenth.Values[i] = 0.001
	}
	if total := tenth.Total(); math.Abs(total-1) > 1e-16 {
		t.Errorf("total %v, want 1", total)
	}
	for name, list := range map[string][]graphio.Sample{
		"no name":      {{}},
		"name twice":   {{Name: "a"}, {Name: "a"}},
		"descending":   {{Name: "a", Nodes: []int32{1, 0}, Values: []float64{1, 1}}},
		"out of range": {{Name: "a", Nodes: []int32{3}, Values: []float64{1}}},
		"zero":         {{Name: "a", Nodes: []int32{1}, Values: []float64{0}}},
		"infinite":     {{Name: "a", Nodes: []int32{1}, Values: []float64{math.Inf(1)}}},
		"lengths":      {{Name: "a", Nodes: []int32{1}}},
	} {
		if _, err := graphio.NewSamples(3, list); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	two, err := graphio.NewSamples(3, []graphio.Sample{s, {Name: "empty"}})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := two.Shares(); err == nil || !strings.Contains(err.Error(), `"empty" has no mass`) {
		t.Errorf("error %v", err)
	}
	if i, ok := two.Index("empty"); i != 1 || !ok {
		t.Errorf("index %d %v", i, ok)
	}
}

func TestCheckConnected(t *testing.T) {
	net, err := graphio.NewNetwork([]string{"a", "b", "c", "d"}, []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1}, {From: 2, To: 3, Length: 1, Weight: 1}})
	if err != nil {
		t.Fatal(err)
	}
	sample := func(name string, values ...float64) graphio.Sample {
		s := graphio.Sample{Name: name}
		for v, x := range values {
			if x > 0 {
				s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, x)
			}
		}
		return s
	}
	for name, c := range map[string]struct {
		list  []graphio.Sample
		words []string // nil: connected
	}{
		"one part":           {[]graphio.Sample{sample("p", 1, 2), sample("q", 3)}, nil},
		"the same shares":    {[]graphio.Sample{sample("p", 1, 2, 1), sample("q", 30, 0, 5, 5)}, nil},
		"other shares":       {[]graphio.Sample{sample("p", 1, 2, 1), sample("q", 30)}, []string{`"p" has 25 %`, "--bridge LENGTH", "--mass amount --unmatched COST"}},
		"in different parts": {[]graphio.Sample{sample("p", 5), sample("q", 0, 0, 0, 1)}, []string{`first at node`}},
		"one without mass":   {[]graphio.Sample{sample("p", 1), sample("q")}, nil},
	} {
		samples, err := graphio.NewSamples(4, c.list)
		if err != nil {
			t.Fatal(err)
		}
		err = graphio.CheckConnected(net, samples)
		if (err == nil) != (c.words == nil) {
			t.Errorf("%s: error %v", name, err)
			continue
		}
		for _, w := range c.words {
			if !strings.Contains(err.Error(), w) {
				t.Errorf("%s: %v lacks %q", name, err, w)
			}
		}
	}
}

func TestMean(t *testing.T) {
	list := []graphio.Sample{{Nodes: []int32{0, 2}, Values: []float64{1, 3}}, {Nodes: []int32{2}, Values: []float64{5}}}
	m := graphio.Mean("m", 3, list, nil)
	if m.Name != "m" || !slices.Equal(m.Nodes, []int32{0, 2}) || !slices.Equal(m.Values, []float64{0.5, 4}) {
		t.Errorf("%+v", m)
	}
	if m = graphio.Mean("m", 3, list, []float64{3, 1}); !slices.Equal(m.Values, []float64{0.75, 3.5}) {
		t.Errorf("%+v", m)
	}
	if m = graphio.Mean("m", 3, list, []float64{0, 2}); !slices.Equal(m.Nodes, []int32{2}) || m.Values[0] != 5 {
		t.Errorf("%+v", m)
	}
}

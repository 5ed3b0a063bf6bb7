package exact_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func line(lengths ...float64) *graphio.Network {
	var arcs []arc
	for i, l := range lengths {
		arcs = append(arcs, arc{i, i + 1, l})
	}
	return undirected(len(lengths)+1, arcs...)
}

func circle(lengths ...float64) *graphio.Network {
	var arcs []arc
	for i, l := range lengths {
		arcs = append(arcs, arc{i, (i + 1) % len(lengths), l})
	}
	return undirected(len(lengths), arcs...)
}

func complete(n int, length float64) *graphio.Network {
	var arcs []arc
	for i := range n {
		for j := range i {
			arcs = append(arcs, arc{j, i, length})
		}
	}
	return undirected(n, arcs...)
}

// star has its hub as the last node.
func star(leaves int, length float64) *graphio.Network {
	var arcs []arc
	for i := range leaves {
		arcs = append(arcs, arc{i, leaves, length})
	}
	return undirected(leaves+1, arcs...)
}

func ones(n int) []float64 {
	list := make([]float64, n)
	for i := range list {
		list[i] = 1
	}
	return list
}

// binomial is the distribution of the number of successes in n trials.
func binomial(n int, chance float64) graphio.Sample {
	p := make([]float64, n+1)
	choose := 1.0
	for k := range p {
		p[k] = choose * math.Pow(chance, float64(k)) * math.Pow(1-chance, float64(n-k))
		choose = choose * float64(n-k) / float64(k+1)
	}
	return masses(p...)
}

func TestPathsAndCycles(t *testing.T) {
	scipy := "scipy 1.10.1, wasserstein_distance docstring, seen"
	cyclic := "least Σℓ|F − c| over c, a weighted median: Werman, Peleg, Melter and Kong 1986; by hand"
	eight := [2]graphio.Sample{masses(.5, .5), masses(0, 0, 0, 0, 0, 0, .5, .5)}
	run(t, []reference{
		{"points 0 1 3 and 5 6 8", line(1, 2, 2, 1, 2), masses(1, 1, 1), masses(0, 0, 0, 1, 1, 1), exact.Options{Shares: true}, 5, scipy},
		{"points 0 1", line(1), masses(3, 1), masses(2, 2), exact.Options{Shares: true}, 0.25, scipy},
		{
			"points 1.4 to 7.8", line(3.4-1.4, 3.9-3.4, 4.5-3.9, 7.5-4.5, 7.8-7.5),
			masses(0, 1.4, .9, 0, 3.1, 7.2), masses(3.5, 0, 0, 3.2), exact.Options{Shares: true}, 4.078133143804786, scipy,
		},
		{
			"path of 5", line(2, 3, .5, 4), masses(.5, 0, .2, 0, .3), masses(.1, .4, 0, .25, .25), exact.Options{}, 1.1,
			"Σℓ|F|, F the difference of running sums; by hand",
		},
		{
			"binomials", line(ones(10)...), binomial(10, .3), binomial(10, .5), exact.Options{Shares: true}, 2,
			"stochastic order: the difference of means, memory",
		},
		{"cycle of 8", circle(ones(8)...), eight[0], eight[1], exact.Options{}, 2, cyclic},
		{"cycle of 8, cut", line(ones(7)...), eight[0], eight[1], exact.Options{}, 6, "Σℓ|F|, by hand"},
		{
			"cycle of 6", circle(3, 1, 4, 1, 5, 9), masses(.6, 0, .2, 0, .1, .1), masses(0, .3, 0, .3, .2, .2), exact.Options{}, 4.3,
			cyclic + ", computed by HiGHS (scipy 1.10.1)",
		},
	})
}

func TestTreeAndComplete(t *testing.T) {
	p, q := masses(.5, .2, .2, .1, 0), masses(.1, .3, .1, .1, .4)
	run(t, []reference{
		{
			"tree of 7", undirected(7, arc{0, 1, 2}, arc{0, 2, 1}, arc{1, 3, 4}, arc{1, 4, 1.5}, arc{2, 5, 3}, arc{2, 6, 2.5}),
			masses(.1, 0, 0, .4, .1, .2, .2), masses(0, .2, .1, 0, .3, .4), exact.Options{}, 3.1,
			"Σℓ|difference below|: Evans and Matsen 2012, memory; by hand, computed by HiGHS (scipy 1.10.1)",
		},
		{"complete of 5", complete(5, 1), p, q, exact.Options{}, 0.5, "total variation, textbook"},
		{"star of 5", star(5, .5), p, q, exact.Options{}, 0.5, "total variation, textbook"},
	})
}

// The mean distance of two samples drawn evenly from all on a unit path of n
// nodes: Bourn and Willenbring 2020, recursion from memory, agreed with 4·10⁵
// simulated pairs. Four standard errors are allowed.
func TestMeanOnPath(t *testing.T) {
	for n, want := range map[int]float64{2: 1. / 3, 3: 8. / 15, 4: 24. / 35, 5: 256. / 315, 10: 294912. / 230945} {
		rng := rand.New(rand.NewPCG(uint64(n), 5))
		draw := func() graphio.Sample {
			values := make([]float64, n) // exponential shares are even on the simplex
			for v := range values {
				values[v] = rng.ExpFloat64()
			}
			return masses(values...)
		}
		solver, err := exact.NewSolver(line(ones(n-1)...), exact.Options{Shares: true})
		if err != nil {
			t.Fatal(err)
		}
		const pairs = 4000
		sum, squares := 0.0, 0.0
		for range pairs {
			r, err := solver.Solve(t.Context(), draw(), draw())
			if err != nil {
				t.Fatal(err)
			}
			sum += r.Distance()
			squares += r.Distance() * r.Distance()
		}
		mean := sum / pairs
		if limit := 4 * math.Sqrt((squares/pairs-mean*mean)/pairs); math.Abs(mean-want) > limit {
			t.Errorf("%d nodes: mean distance %v, want %v ± %v", n, mean, want, limit)
		}
	}
}

// Two point masses are as far apart as their nodes: Cormen, Leiserson, Rivest
// and Stein, the figure of Dijkstra's algorithm, memory; graph and s→x seen in
// networkx, test_weighted.py; all computed by networkx 2.8.8.
func TestPointMasses(t *testing.T) {
	const s, x, y, z, u = 0, 1, 2, 3, 4
	net := oneWay(5, arc{s, u, 10}, arc{s, y, 5}, arc{u, x, 1}, arc{u, y, 2}, arc{y, u, 3}, arc{y, x, 9}, arc{y, z, 2}, arc{x, z, 4}, arc{z, x, 6}, arc{z, s, 7})
	var list []reference
	for _, c := range []arc{{s, y, 5}, {s, z, 7}, {s, u, 8}, {s, x, 9}, {u, s, 11}, {x, u, 19}} {
		list = append(list, reference{
			name: fmt.Sprint("point masses at ", c.from, " and ", c.to), net: net,
			p: graphiotest.Point(c.from), q: graphiotest.Point(c.to), want: c.length, source: "Cormen et al.",
		})
	}
	run(t, list)
}

// neighbours spreads idle mass on v and the rest evenly on its neighbours.
func neighbours(net *graphio.Network, v int, idle float64) graphio.Sample {
	values := make([]float64, net.Order())
	values[v] = idle
	for _, a := range net.Arcs(v) {
		values[a.Node] += (1 - idle) / float64(len(net.Arcs(v)))
	}
	return masses(values...)
}

func cube(dimension int) *graphio.Network {
	var arcs []arc
	for v := range 1 << dimension {
		for d := range dimension {
			if u := v ^ 1<<d; v < u {
				arcs = append(arcs, arc{v, u, 1})
			}
		}
	}
	return undirected(1<<dimension, arcs...)
}

func petersen() *graphio.Network {
	var arcs []arc
	for i := range 5 {
		arcs = append(arcs, arc{i, (i + 1) % 5, 1}, arc{i, i + 5, 1}, arc{5 + i, 5 + (i+2)%5, 1})
	}
	return undirected(10, arcs...)
}

func torus(n int) *graphio.Network {
	var arcs []arc
	for r := range n {
		for c := range n {
			arcs = append(arcs, arc{r*n + c, r*n + (c+1)%n, 1}, arc{r*n + c, (r+1)%n*n + c, 1})
		}
	}
	return undirected(n*n, arcs...)
}

// The measures of two adjacent nodes (Ollivier 2009; Lin, Lu and Yau 2011 and
// 2014; Jost and Liu 2014): closed forms from memory, each computed by HiGHS
// (scipy 1.10.1).
func TestNeighbourMeasures(t *testing.T) {
	// Nodes 0 and 1 of degrees 3 and 4.
	tree := undirected(7, arc{0, 1, 1}, arc{0, 2, 1}, arc{0, 3, 1}, arc{1, 4, 1}, arc{1, 5, 1}, arc{1, 6, 1})
	var list []reference
	for _, c := range []struct {
		name       string
		net        *graphio.Network
		idle, want float64
	}{
		{"complete of 4", complete(4, 1), 0, 1. / 3},
		{"complete of 7", complete(7, 1), 0, 1. / 6},
		{"cycle of 6", circle(ones(6)...), 0, 1},
		{"cycle of 7", circle(ones(7)...), .3, 1},
		{"cycle of 12", circle(ones(12)...), .5, 1},
		{"cycle of 5", circle(ones(5)...), 0, 1},
		{"cycle of 4", circle(ones(4)...), 0, 1},
		{"cycle of 3", circle(ones(3)...), 0, .5},
		{"cycle of 5", circle(ones(5)...), .5, .75},
		{"cycle of 4", circle(ones(4)...), .5, .5},
		{"cycle of 3", circle(ones(3)...), .5, .25},
		{"square", cube(2), .5, 1. / 2},
		{"cube", cube(3), .5, 2. / 3},
		{"cube in 6 dimensions", cube(6), .5, 5. / 6},
		{"tree", tree, 0, 11. / 6},
		{"Petersen graph", petersen(), 0, 4. / 3},
		{"Petersen graph", petersen(), .25, 1},
		{"Petersen graph", petersen(), .5, 1},
		{"torus of 5 by 5", torus(5), 0, 1},
		{"torus of 5 by 5", torus(5), .5, 7. / 8},
	} {
		list = append(list, reference{
			name: fmt.Sprintf("%s, idle %v", c.name, c.idle), net: c.net, p: neighbours(c.net, 0, c.idle), q: neighbours(c.net, 1, c.idle),
			opt: exact.Options{Shares: true}, want: c.want, source: "Ollivier 2009 and after",
		})
	}
	run(t, list)
}

// The Kantorovich–Rubinstein norm (Hanin 1992; Jabłoński and
// Marciniak-Czochra, arXiv 1304.3501, abstract seen), where creating or
// removing a unit of mass costs λ. By hand, computed by HiGHS (scipy 1.10.1).
func TestUnmatchedMass(t *testing.T) {
	at := func(v int, mass float64) graphio.Sample {
		return graphio.Sample{Name: "at", Nodes: []int32{int32(v)}, Values: []float64{mass}}
	}
	spread, other := masses(.6, 0, .4), masses(0, .3, 0, 0, .9)
	net := line(ones(4)...)
	var list []reference
	for _, c := range []struct {
		p, q         graphio.Sample
		lambda, want float64
	}{
		{at(0, 1), at(4, 1), .5, 1}, {at(0, 1), at(4, 1), 1, 2}, {at(0, 1), at(4, 1), 2, 4}, {at(0, 1), at(4, 1), 3, 4},
		{at(0, 2), at(1, 1), 3, 4},
		{masses(3, 0, 0, 0, 1), at(1, 2), 1, 4},
		{masses(), masses(.5, .5, 0, 0, 1), 1.25, 2.5},
		{spread, other, .25, .55}, {spread, other, .5, 1.1}, {spread, other, 1, 1.9},
		{spread, other, 1.5, 2.3}, {spread, other, 2, 2.7}, {spread, other, 4, 3.1},
	} {
		list = append(list, reference{
			name: fmt.Sprintf("from %v at %v to %v at %v, λ %v", c.p.Values, c.p.Nodes, c.q.Values, c.q.Nodes, c.lambda),
			net:  net, p: c.p, q: c.q, opt: exact.Options{Unmatched: c.lambda}, want: c.want, source: "by hand and linear program",
		})
	}
	run(t, list)
}

// One-way networks: by hand, computed by HiGHS (scipy 1.10.1). On the ring the
// distance is Σℓ(F − min F).
func TestOneWay(t *testing.T) {
	ring := []arc{{0, 1, 1}, {1, 2, 2}, {2, 3, 3}, {3, 0, 4}}
	mesh := oneWay(4, arc{0, 1, 1}, arc{1, 2, 1}, arc{2, 0, 5}, arc{0, 3, 2}, arc{3, 2, 2})
	p, q := masses(.7, .1, .1, .1), masses(.1, .2, .3, .4)
	start, end := masses(.5, .5), masses(0, 0, .25, .75)
	source := "by hand and linear program"
	run(t, []reference{
		{"ring", oneWay(4, ring...), p, q, exact.Options{}, 2.5, source},
		{"ring, back", oneWay(4, ring...), q, p, exact.Options{}, 3.5, source},
		{"ring, both ways", undirected(4, ring...), p, q, exact.Options{}, 1.9, source},
		{"mesh", mesh, start, end, exact.Options{}, 3.25, source},
		{"mesh, back", mesh, end, start, exact.Options{}, 7, source},
	})
}

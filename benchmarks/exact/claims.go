package main

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"time"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// claims measures what no other solver is needed for, and prints a Markdown
// table: what ties, empty areas, one-way edges and unmatched mass cost against
// a plain case of the same size, what a gap saves, and what pairs in a row do.
func claims(nodes, runs int, seed uint64) error {
	fmt.Println("| road-like, nodes | case | seconds | pivots a node | times the plain case |")
	fmt.Println("|--:|---|--:|--:|--:|")
	c := claimant{nodes: nodes, runs: runs, net: graphiotest.Road(nodes, seed)}
	c.p, c.q = renamed(graphiotest.Smooth(c.net, seed), "p"), renamed(graphiotest.Smooth(c.net, seed+1), "q")
	share := exact.Options{Shares: true}
	if err := c.cold("plain: smooth samples", c.net, c.p, c.q, share); err != nil {
		return err
	}
	equal, err := relengthened(c.net, func(graphio.Edge) float64 { return 1 }, false)
	if err != nil {
		return err
	}
	whole, err := relengthened(c.net, func(e graphio.Edge) float64 { return max(1, float64(int(e.Length/10))) }, false)
	if err != nil {
		return err
	}
	oneWay, err := relengthened(c.net, func(e graphio.Edge) float64 { return e.Length }, true)
	if err != nil {
		return err
	}
	side := int(0.5 + math.Sqrt(float64(nodes)))
	steps := []struct {
		text string
		net  *graphio.Network
		p, q graphio.Sample
		opt  exact.Options
	}{
		{"all lengths equal", equal, c.p, c.q, share},
		{"lengths of a few whole numbers", whole, c.p, c.q, share},
		{"integer grid", unitGrid(side, side), graphiotest.Smooth(unitGrid(side, side), seed), graphiotest.Smooth(unitGrid(side, side), seed+1), share},
		{"counts: 10 a node", c.net, graphiotest.Counts(c.p, 10*nodes, seed), graphiotest.Counts(c.q, 10*nodes, seed+1), share},
		{"large empty areas: mass at 1 node in 100", c.net, graphiotest.Sparse(c.net, nodes/100, seed), graphiotest.Sparse(c.net, nodes/100, seed+1), share},
		{"mass in two corners only", c.net, corner(c.net, false), corner(c.net, true), share},
		{"point masses", c.net, graphiotest.Point(nodes / 3), graphiotest.Point(2 * nodes / 3), share},
		{"a longer way back along a third of the edges", oneWay, c.p, c.q, share},
		{"to a gap of 1 %", c.net, c.p, c.q, exact.Options{Shares: true, Gap: 0.01}},
		{"to a gap of 5 %", c.net, c.p, c.q, exact.Options{Shares: true, Gap: 0.05}},
	}
	for _, s := range steps {
		if err := c.cold(s.text, s.net, s.p, s.q, s.opt); err != nil {
			return err
		}
	}
	for _, times := range []float64{0.001, 0.1, 0.5, 1, 2, 1000} {
		opt := exact.Options{Shares: true, Unmatched: times * c.distance}
		if err := c.cold(fmt.Sprintf("unmatched mass at %v of the distance", times), c.net, c.p, c.q, opt); err != nil {
			return err
		}
	}
	return c.series(seed)
}

func renamed(s graphio.Sample, name string) graphio.Sample {
	s.Name = name
	return s
}

// relengthened is the network with other lengths, and with a longer way back
// along every third edge where wanted.
func relengthened(net *graphio.Network, length func(graphio.Edge) float64, oneWay bool) (*graphio.Network, error) {
	names := make([]string, net.Order())
	for v := range names {
		names[v] = net.Name(v)
	}
	edges := slices.Clone(net.EdgeList())
	for i := range net.Size() {
		edges[i].Length = length(edges[i])
		edges[i].Weight = 1 / edges[i].Length
		if oneWay && i%3 == 0 {
			edges[i].OneWay = true
			back := edges[i]
			back.From, back.To, back.Length = back.To, back.From, 1.5*back.Length
			edges = append(edges, back)
		}
	}
	return graphio.NewNetwork(names, edges)
}

// corner has mass at the first or last twentieth of the nodes.
func corner(net *graphio.Network, last bool) graphio.Sample {
	n := net.Order()
	s := graphio.Sample{Name: fmt.Sprint("corner ", last)}
	for v := range n / 20 {
		if last {
			v += n - n/20
		}
		s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, 1)
	}
	return s
}

// A claimant measures on one network, against its plain case.
type claimant struct {
	nodes, runs int
	net         *graphio.Network
	p, q        graphio.Sample
	plain       float64 // seconds
	distance    float64
}

func (c *claimant) cold(text string, net *graphio.Network, p, q graphio.Sample, opt exact.Options) error {
	var seconds []float64
	var r *exact.Result
	for range c.runs {
		start := time.Now()
		var err error
		r, err = exact.Solve(net, p, q, opt)
		seconds = append(seconds, time.Since(start).Seconds())
		if err == nil {
			err = r.Verify()
		}
		if err != nil {
			fmt.Printf("| %d | %s | – | – | %v |\n", c.nodes, text, err)
			return nil
		}
	}
	took := middle(seconds)
	if c.plain == 0 {
		c.plain, c.distance = took, r.Distance()
	}
	fmt.Printf("| %d | %s | %.3g | %.2f | %.2f |\n", c.nodes, text, took, float64(r.Pivots)/float64(net.Order()), took/c.plain)
	return nil
}

// series solves pairs in a row on one solver, and the same pairs cold.
func (c *claimant) series(seed uint64) error {
	fmt.Println()
	fmt.Println("| road-like, nodes | pairs in a row on one solver | warm, ms a pair | cold, ms a pair | warm : cold |")
	fmt.Println("|--:|---|--:|--:|--:|")
	r := rand.New(rand.NewPCG(seed, 7))
	reference := graphiotest.Smooth(c.net, seed+2)
	drift := make([]graphio.Sample, 12) // each step moves 2 % of the way to another sample
	for k := range drift {
		drift[k] = mixed(c.p, c.q, 0.02*float64(k))
	}
	hours := make([]graphio.Sample, 12) // the same with 10 counts a node
	for k := range hours {
		hours[k] = graphiotest.Counts(drift[k], 10*c.nodes, seed+uint64(k)+10)
	}
	rich := make([]graphio.Sample, 12) // and with 10,000 a node
	for k := range rich {
		rich[k] = poisson(r, drift[k], 1e4*float64(c.nodes))
	}
	for _, s := range []struct {
		text    string
		samples []graphio.Sample
	}{
		{"a smooth sample that drifts, against one reference", drift},
		{"the same in 10,000 counts a node", rich},
		{"the same in 10 counts a node", hours},
	} {
		warm, err := exact.NewSolver(c.net, exact.Options{Shares: true})
		if err != nil {
			return err
		}
		if _, err := warm.Solve(context.Background(), s.samples[0], reference); err != nil {
			return err
		}
		var warmTime, coldTime time.Duration
		for _, p := range s.samples[1:] {
			start := time.Now()
			if _, err := warm.Solve(context.Background(), p, reference); err != nil {
				return err
			}
			warmTime += time.Since(start)
			start = time.Now()
			if _, err := exact.Solve(c.net, p, reference, exact.Options{Shares: true}); err != nil {
				return err
			}
			coldTime += time.Since(start)
		}
		pairs := float64(len(s.samples) - 1)
		fmt.Printf("| %d | %s | %.3g | %.3g | %.2f |\n", c.nodes, s.text, 1e3*warmTime.Seconds()/pairs, 1e3*coldTime.Seconds()/pairs, warmTime.Seconds()/coldTime.Seconds())
	}
	return nil
}

// mixed is (1 − x) p + x q, both with mass at every node.
func mixed(p, q graphio.Sample, x float64) graphio.Sample {
	s := graphio.Sample{Name: fmt.Sprintf("mixed %v", x), Nodes: p.Nodes, Values: make([]float64, len(p.Values))}
	byP, byQ := p.Total(), q.Total()
	for i := range s.Values {
		s.Values[i] = (1-x)*p.Values[i]/byP + x*q.Values[i]/byQ
	}
	return s
}

// poisson draws counts around a sample, by the normal approximation: there are
// many at every node.
func poisson(r *rand.Rand, s graphio.Sample, total float64) graphio.Sample {
	out := graphio.Sample{Name: s.Name + " counted"}
	sum := s.Total()
	for i, v := range s.Nodes {
		mean := s.Values[i] / sum * total
		if x := float64(int(mean + math.Sqrt(mean)*r.NormFloat64() + 0.5)); x > 0 {
			out.Nodes, out.Values = append(out.Nodes, v), append(out.Values, x)
		}
	}
	return out
}

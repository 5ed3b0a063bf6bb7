package resistor

import (
	"math"

	"example.org/barrow/graphio"
)

// Lanes is how many samples are routed at once.
const Lanes = lanes

// A Panel is the memory one goroutine needs to route samples. The zero value is
// ready to use; it grows with the first samples.
//
// Memory: 320 bytes a node.
type Panel struct {
	r, z, d, x []row // by place
	left       []row // by node: mass still to be carried off
}

func (p *Panel) fit(c *Circuit) {
	if n := len(c.factor.order); len(p.r) != n {
		p.r, p.z, p.d, p.x, p.left = make([]row, n), make([]row, n), make([]row, n), make([]row, n), make([]row, n)
	}
}

// Route sends up to Lanes samples to rest: evenly spread over each component,
// or, with Options.Unmatched, all at the extra node. It sets dst[i], one value
// an edge, to the cost length × flow of the i-th sample, flow from From to To
// being positive, and returns for each a slack: there is a flow that carries
// exactly the sample's mass to rest and whose costs differ from dst[i] by slack
// in all, rounding to float32 and rounding in the sums included. So the
// transport distance of two samples that have equal totals on every component
// is at most
//
//	Σ |dst[i] - dst[j]| + slack[i] + slack[j].
//
// What happens to a sample does not depend on the others.
//
// Cost: O((nodes + edges) Lanes) for each of Steps steps.
func (c *Circuit) Route(p *Panel, samples []graphio.Sample, dst [][]float32) (slack [Lanes]float64) {
	total := c.load(p, samples)
	for i, v := range c.factor.order {
		p.r[i] = p.left[v]
	}
	c.solve(p)
	var moved row // Σ|flow|
	for e, u := range c.from {
		if c.tree.inTree[e] {
			continue
		}
		v := c.to[e]
		x, y := &p.x[c.factor.place[u]], &p.x[c.factor.place[v]]
		a, b := &p.left[u], &p.left[v]
		for l := range dst {
			cost := float32(c.length[e] * c.conductance[e] * (x[l] - y[l]))
			dst[l][e] = cost
			flow := float64(cost) / c.length[e]
			a[l] -= flow
			b[l] += flow
			moved[l] += math.Abs(flow)
		}
	}
	for i := len(c.tree.order) - 1; i >= 0; i-- {
		v := c.tree.order[i]
		e := c.tree.via[v]
		if e == none {
			continue
		}
		a, b, sign := &p.left[v], &p.left[c.tree.parent[v]], 1.0
		if c.from[e] != v {
			sign = -1
		}
		for l := range dst {
			flow := a[l]
			b[l] += flow
			cost := sign * c.length[e] * flow
			dst[l][e] = float32(cost)
			slack[l] += math.Abs(float64(dst[l][e]) - cost)
			moved[l] += math.Abs(flow)
		}
	}
	// Rounding of the sums, in float64: each of the terms 2 moved + 2 total is
	// rounded in adds + 4 operations at most, and what that makes of it goes
	// up to height far.
	unit := 0x1p-53 * (c.tree.adds + 4) * c.tree.height
	for l := range dst {
		slack[l] += 2 * unit * (moved[l] + total[l])
		slack[l] *= 1 + 1e-9 // of adding up the slack itself
	}
	return slack
}

// load sets p.left to the samples less where they come to rest, and the lanes
// that are not used to 0.
func (c *Circuit) load(p *Panel, samples []graphio.Sample) (total row) {
	p.fit(c)
	clear(p.left)
	for l, s := range samples {
		rest := make([]float64, len(c.tree.roots))
		for k, v := range s.Nodes {
			p.left[v][l] += s.Values[k]
			rest[c.tree.label[v]] += s.Values[k]
		}
		for part, x := range rest {
			total[l] += x
			rest[part] /= c.tree.size[part]
		}
		if c.extra {
			p.left[c.order][l] -= total[l]
			continue
		}
		for v, part := range c.tree.label {
			p.left[v][l] -= rest[part]
		}
	}
	return total
}

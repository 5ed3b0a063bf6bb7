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
// Memory: 128 bytes a node, 192 a node of the core and 32 an edge.
type Panel struct {
	x       []row // by place
	r, z, d []row // of the core
	left    []row // by place: mass still to be carried off
	cost    []costs
}

// costs are those of an edge in all lanes.
type costs = [lanes]float32

func (p *Panel) fit(c *Circuit) {
	if n := len(c.factor.order); len(p.x) != n {
		p.x, p.left = make([]row, n), make([]row, n)
	}
	if n := len(c.factor.order) - c.factor.cut; len(p.r) != n {
		p.r, p.z, p.d = make([]row, n), make([]row, n), make([]row, n)
	}
	if n := len(c.length); len(p.cost) != n {
		p.cost = make([]costs, n)
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
	copy(p.x, p.left)
	c.solve(p)
	var moved row // Σ|flow|
	c.crossing(p, &moved)
	c.alongTree(p, &moved, (*row)(&slack))
	for l, to := range dst {
		for e := range to {
			to[e] = p.cost[e][l]
		}
	}
	// Rounding of the sums, in float64: each of the terms 2 moved + 2 total is
	// rounded in adds + 5 operations at most, and what that makes of it goes
	// up to height far.
	unit := 0x1p-53 * (c.tree.adds + 5) * c.tree.height
	for l := range dst {
		slack[l] += 2 * unit * (moved[l] + total[l])
		slack[l] *= 1 + 1e-9 // of adding up the slack itself
	}
	return slack
}

// crossing sets the costs of the edges beside the tree to those of the current,
// rounded, and takes what they carry off the nodes.
func (c *Circuit) crossing(p *Panel, moved *row) {
	for i := range c.beside {
		e := &c.beside[i]
		x, y := &p.x[e.from], &p.x[e.to]
		a, b, to := &p.left[e.from], &p.left[e.to], &p.cost[e.edge]
		for l := range to {
			cost := float32(e.scale * (x[l] - y[l]))
			to[l] = cost
			flow := e.back * float64(cost)
			a[l] -= flow
			b[l] += flow
			moved[l] += math.Abs(flow)
		}
	}
}

// alongTree carries what is left to the roots.
func (c *Circuit) alongTree(p *Panel, moved, slack *row) {
	for i := range c.along {
		e := &c.along[i]
		a, b, to := &p.left[e.from], &p.left[e.to], &p.cost[e.edge]
		for l := range to {
			flow := a[l]
			b[l] += flow
			cost := e.scale * flow
			to[l] = float32(cost)
			slack[l] += math.Abs(float64(to[l]) - cost)
			moved[l] += math.Abs(flow)
		}
	}
}

// load sets p.left to the samples less where they come to rest, and the lanes
// that are not used to 0.
func (c *Circuit) load(p *Panel, samples []graphio.Sample) (total row) {
	p.fit(c)
	clear(p.left)
	for l, s := range samples {
		rest := make([]float64, len(c.tree.roots))
		for k, v := range s.Nodes {
			p.left[c.factor.place[v]][l] += s.Values[k]
			rest[c.tree.label[v]] += s.Values[k]
		}
		for part, x := range rest {
			total[l] += x
			rest[part] /= c.tree.size[part]
		}
		if c.extra {
			p.left[c.factor.place[c.order]][l] -= total[l]
			continue
		}
		for i, v := range c.factor.order {
			p.left[i][l] -= rest[c.tree.label[v]]
		}
	}
	return total
}

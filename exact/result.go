package exact

import (
	"math"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// A Result is the transport cost from p to q between two bounds, and what
// proves them. Shares: a mean distance; amounts: mass times length.
type Result struct {
	// Lower is Σ φ(p − q) of the potential, Upper Σ ℓ|f| of the flow: +Inf
	// while the flow of an early result runs against a one-way edge (below 0).
	Lower, Upper float64

	// Flow holds, by edge of the network, the mass that moves along it: above 0
	// from From to To, below 0 the other way. It is one optimal flow among
	// possibly many: one whose edges form no cycle.
	Flow []float64

	// Potential holds a value by node that falls by no more than the length of
	// an edge along it, in either direction it can be travelled.
	Potential []float64

	// Unmatched holds, by node, the mass removed there (above 0) or created
	// (below 0); nil where that is not allowed.
	Unmatched []float64

	// Optimal says that the solver ended with proof, not early.
	Optimal bool

	// Pivots is how many steps of the simplex it took.
	Pivots int

	net  *graphio.Network
	p, q graphio.Sample
	opt  Options
}

// Distance is the transport cost: the upper bound, as what the flow costs.
func (r *Result) Distance() float64 { return r.Upper }

// closed reports whether the bounds are equal: to 1e-9, or to what rounding of
// the masses is worth over the largest difference of potential, which is all
// there is between samples that are alike.
func (r *Result) closed() bool {
	low, high := math.Inf(1), math.Inf(-1)
	for _, pot := range r.Potential {
		low, high = min(low, pot), max(high, pot)
	}
	return r.Upper-r.Lower <= 1e-9*r.Upper+strayMass(r.opt, r.p, r.q)*(high-low)
}

// Gap is (Upper − Lower) / Upper, 0 where both are 0 and 1 where Upper is +Inf.
func (r *Result) Gap() float64 {
	switch {
	case r.Upper <= r.Lower:
		return 0
	case math.IsInf(r.Upper, 1):
		return 1
	}
	return (r.Upper - r.Lower) / r.Upper
}

// result reads flow and potential off the tree. Before the optimum its
// potential is not feasible and is repaired. Cost: O(nodes + edges), with a
// repair O(edges log nodes).
func (s *Solver) result(p, q graphio.Sample, pivots int, optimal bool) *Result {
	r := &Result{
		Flow: make([]float64, s.net.Size()), Potential: make([]float64, s.net.Order()),
		Optimal: optimal, Pivots: pivots, net: s.net, p: p, q: q, opt: s.opt,
	}
	if s.opt.Unmatched > 0 {
		r.Unmatched = make([]float64, s.net.Order())
	}
	s.readFlow(r)
	if !optimal && s.blocked(r) >= 0 {
		r.Upper = math.Inf(1)
	}
	if optimal {
		s.readPotential(r)
	} else {
		s.repairPotential(r)
	}
	if s.opt.Unmatched > s.space.unmatched {
		s.raiseUnmatched(r)
	}
	r.Lower = max(0, min(r.Lower, r.Upper)) // equal but for rounding in the last place
	return r
}

// raiseUnmatched goes from the cost of unmatched mass that the solver worked
// with to the one asked for: what a component has too much or too little of
// is removed or created at that, and the potential of all its nodes moves.
func (s *Solver) raiseUnmatched(r *Result) {
	more := s.opt.Unmatched - s.space.unmatched
	label, parts := s.net.Components()
	left := make([]doubled, parts)
	for v, u := range r.Unmatched {
		left[label[v]].add(u)
	}
	for _, l := range left {
		r.Lower += more * math.Abs(l.value())
	}
	for v := range r.Potential {
		switch l := left[label[v]].value(); {
		case l > 0:
			r.Potential[v] += more
		case l < 0:
			r.Potential[v] -= more
		}
	}
}

// readFlow sets the flow of every edge, and what it costs.
func (s *Solver) readFlow(r *Result) {
	t, list := &s.tree, s.net.EdgeList()
	below := s.trueFlows()
	stray := strayMass(s.opt, r.p, r.q)
	var cost doubled
	for v := range t.node {
		x := &t.node[v]
		f := below[v]
		if x.parent < 0 || f == 0 {
			continue
		}
		if !s.space.own(x.edge) {
			if s.opt.Unmatched > 0 {
				end := t.edge[x.edge].u // the other end is the extra node
				if end != int32(v) {
					f = -f
				}
				r.Unmatched[s.space.label[end]] = f
				cost.addProduct(s.opt.Unmatched, math.Abs(f))
			}
			continue
		}
		along := f > 0 == (t.edge[x.edge].u == int32(v)) // from u to v
		i := s.space.fwd[x.edge]
		if !along {
			i = s.space.bwd[x.edge]
		}
		if i == noEdge { // a one-way edge backwards
			// Sums that should cancel are rounded; more, blocked reports.
			if s.wholeFlow(x) != 0 && (s.amount == nil || math.Abs(f) > stray) {
				r.Flow[max(s.space.fwd[x.edge], s.space.bwd[x.edge])] = -math.Abs(f)
			}
			continue
		}
		f = math.Abs(f)
		cost.addProduct(list[i].Length, f)
		from := t.edge[x.edge].u
		if !along {
			from = t.edge[x.edge].v
		}
		if list[i].From != s.space.label[from] {
			f = -f
		}
		r.Flow[i] = f
	}
	r.Upper = cost.value()
}

// wholeFlow is the flow of a node's edge to its parent without the
// perturbation, which sends a unit up from every node of the subtree, or down
// to it.
func (s *Solver) wholeFlow(x *node) int64 {
	return (x.flow - s.sign*int64(x.size)) / int64(len(s.tree.node)+1)
}

// trueFlows is the flow of each node's edge to its parent in units of mass:
// from the integers where those are exact, otherwise from the true supplies.
func (s *Solver) trueFlows() []float64 {
	t := &s.tree
	flow := make([]float64, len(t.node))
	if s.amount == nil {
		for v := range t.node {
			if x := &t.node[v]; x.parent >= 0 {
				flow[v] = float64(s.wholeFlow(x)) * s.unit
			}
		}
		return flow
	}
	copy(flow, s.amount)
	for b := t.tour.head; b >= 0; b = t.tour.block[b].next {
		for _, token := range t.tour.tokens(b) {
			if p := t.node[token>>1].parent; token&1 == 1 && p >= 0 {
				flow[p] += flow[token>>1]
			}
		}
	}
	return flow
}

// readPotential sets the potential, and the bound it gives: summed exactly
// over the integers, where it is feasible without rounding.
func (s *Solver) readPotential(r *Result) {
	t := &s.tree
	base := int64(0)
	if s.opt.Unmatched > 0 {
		base = t.tour.potential(int32(len(t.node) - 1))
	}
	var whole wide
	var sum doubled
	for v := range int32(len(t.node)) {
		pot := t.tour.potential(v) - base
		if l := s.space.label[v]; l >= 0 {
			r.Potential[l] = float64(pot) * s.space.quantum
		}
		if s.amount != nil {
			high := pot &^ (1<<30 - 1) // both halves are exact as floats
			sum.addProduct(float64(high), s.amount[v])
			sum.addProduct(float64(pot-high), s.amount[v])
			continue
		}
		whole.addProduct(pot, s.supply[v])
	}
	r.Lower = sum.value() * s.space.quantum
	if s.amount == nil {
		r.Lower = whole.float() * s.space.quantum * s.unit
	}
}

// repairPotential sets the largest feasible potential below that of the tree.
func (s *Solver) repairPotential(r *Result) {
	t, net := &s.tree, s.net
	for v, l := range s.space.number {
		r.Potential[v] = float64(t.tour.potential(l)) * s.space.quantum
	}
	if s.opt.Unmatched > 0 {
		// Within λ of the extra node's potential, which counts as 0.
		base := float64(t.tour.potential(int32(len(t.node)-1))) * s.space.quantum
		for v, pot := range r.Potential {
			r.Potential[v] = min(max(pot-base, -s.space.unmatched), s.space.unmatched)
		}
	}
	// φ may fall by ℓ along an edge: it rises by no more than ℓ against it.
	shortest.Sweep(net, r.Potential, shortest.Backward, nil)
	var sum doubled
	perP, perQ := r.units()
	for i, v := range r.p.Nodes {
		sum.addProduct(r.Potential[v], r.p.Values[i]/perP)
	}
	for i, v := range r.q.Nodes {
		sum.addProduct(r.Potential[v], -r.q.Values[i]/perQ)
	}
	r.Lower = max(0, sum.value()-rounding(r))
	if r.Lower == 0 {
		clear(r.Potential)
	}
}

// units are the masses that count as 1 in p and q.
func (r *Result) units() (perP, perQ float64) {
	if r.opt.Shares {
		return r.p.Total(), r.q.Total()
	}
	return 1, 1
}

// rounding bounds what the last places of a repaired potential may add.
func rounding(r *Result) float64 {
	largest := 0.0
	for _, pot := range r.Potential {
		largest = max(largest, math.Abs(pot))
	}
	mass := 2.0
	if !r.opt.Shares {
		mass = r.p.Total() + r.q.Total()
	}
	return 0x1p-50 * largest * mass
}

// blocked is a one-way edge that carries mass backwards, -1 if none does.
func (s *Solver) blocked(r *Result) int {
	if !s.net.Directed() {
		return -1
	}
	for i, e := range s.net.EdgeList() {
		if e.OneWay && r.Flow[i] < 0 {
			return i
		}
	}
	return -1
}

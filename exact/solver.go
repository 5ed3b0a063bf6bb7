package exact

import (
	"context"
	"errors"
	"fmt"
	"math"
	"time"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// Options say what is solved and how far.
type Options struct {
	// Shares compares the samples divided by their totals: the cost is then a
	// mean distance a unit of mass. Otherwise their amounts are compared, and
	// the cost has the unit mass times length.
	Shares bool

	// Unmatched > 0 is the cost of creating or removing a unit of mass anywhere
	// (the Kantorovich–Rubinstein or flat norm, Hanin 1992), in the unit of
	// length. At 0 no mass is created or removed, and totals must be equal.
	Unmatched float64

	// Gap > 0 stops once (Upper − Lower) / Upper is no more than it. At 0 the
	// solver goes on to the proved optimum.
	Gap float64

	// Watch, if set, is told the interval reached so far now and then in a long
	// run, seldom enough to cost a small part of the time. It changes nothing.
	Watch func(lower, upper float64)
}

var (
	// ErrTotals: the samples differ in total, in all or within a component, and
	// no cost of unmatched mass was given.
	ErrTotals = errors.New("totals differ")
	// ErrUnreachable: one-way edges leave no way for some of the mass.
	ErrUnreachable = errors.New("no way along the one-way edges")
	// ErrCertificate: a result does not prove what it should. Never expected.
	ErrCertificate = errors.New("certificate does not hold")
)

// A Solver solves pairs of samples on one network. It keeps its tree from pair
// to pair, so similar pairs in a row are cheap; where the pairs are not, it
// starts anew. It is not safe for concurrent
// use; a goroutine needs one of its own.
type Solver struct {
	net   *graphio.Network
	opt   Options
	space *space // nil before the first pair
	tree  tree
	price pricing
	lone  int32 // the one node the space was laid out around, -1 for the middle
	fresh bool  // no pair since NewSolver or Reset

	supply []int64   // by solver node
	amount []float64 // the same in units of mass; nil where integers are exact
	unit   float64   // mass of one integer unit

	perturbed []int64 // what the tree carries
	sign      int64   // of the perturbation

	warm bool      // the tree is not the one to start from
	flow []float64 // scratch of startCost

	part      []int32 // component of each solver node, once asked for
	partCount int
}

// NewSolver is a solver for a network. Errors: an option out of range, or no
// node. Cost: O(1); the first pair prepares the network, in O((nodes + edges)
// log nodes).
func NewSolver(net *graphio.Network, opt Options) (*Solver, error) {
	switch {
	case net.Order() == 0:
		return nil, errors.New("the network has no nodes")
	case !(opt.Unmatched >= 0) || math.IsInf(opt.Unmatched, 1):
		return nil, fmt.Errorf("cost of unmatched mass %v; want 0 or a finite length above", opt.Unmatched)
	case !(opt.Gap >= 0 && opt.Gap < 1):
		return nil, fmt.Errorf("gap %v; want 0 or more and below 1", opt.Gap)
	}
	return &Solver{net: net, opt: opt, lone: noNode, fresh: true}, nil
}

const noNode = -1

// prepare lays the network out around a node, or around its middle.
func (s *Solver) prepare(lone int32) {
	sp := newSpace(s.net, s.opt.Unmatched, lone)
	n := len(sp.label)
	s.space, s.lone = sp, lone
	s.supply, s.amount, s.perturbed, s.flow, s.part = make([]int64, n), nil, nil, nil, nil
	s.tree = tree{node: make([]node, n), tour: newTour(n), edge: sp.edge}
	s.tree.grow(sp.startEdge, sp.startOrder)
	s.sign, s.warm = 1, false
	s.price = newPricing(len(sp.edge))
}

// lay sees to it that the network is laid out: around the lone node of the
// first pair, if it has one, and around the middle from the first other pair on.
func (s *Solver) lay(p, q graphio.Sample) {
	lone := noNode
	if l, _ := s.loneNode(p, q); l != noNode && !s.net.Directed() {
		lone = int(l)
	}
	switch {
	case s.space == nil || s.fresh && s.lone != int32(lone):
		s.prepare(int32(lone))
	case s.lone != noNode && s.lone != int32(lone):
		s.prepare(noNode)
	}
	s.fresh = false
}

// loneNode is the one node that all mass goes to (sign 1) or comes from (-1).
func (s *Solver) loneNode(p, q graphio.Sample) (node int32, sign int64) {
	switch {
	case s.opt.Unmatched > 0:
	case len(q.Nodes) == 1:
		return q.Nodes[0], 1
	case len(p.Nodes) == 1:
		return p.Nodes[0], -1
	}
	return noNode, 1
}

// Reset forgets the pairs before: the next solve starts as on a new Solver, and
// so ends in the same tree, without the price of preparing the network again.
func (s *Solver) Reset() {
	s.regrow()
	s.fresh = true
}

// regrow goes back to the first tree.
func (s *Solver) regrow() {
	if s.warm {
		s.tree.grow(s.space.startEdge, s.space.startOrder)
		s.sign, s.warm = 1, false
	}
	s.price.cursor = 0
}

// Solve finds the transport cost from p to q. Both must lie on the solver's
// network. Where ctx ends first it returns the certified interval reached so
// far together with ctx.Err(). Errors: ErrTotals, ErrUnreachable,
// ErrCertificate, or a sample without mass (Shares).
func (s *Solver) Solve(ctx context.Context, p, q graphio.Sample) (*Result, error) {
	s.lay(p, q)
	if err := s.setSupplies(p, q); err != nil {
		return nil, err
	}
	s.start(p, q)
	pivots := 0
	early := stopRule{gap: s.opt.Gap, every: max(256, len(s.tree.node)/20), last: math.Inf(1)}
	watch := watcher{call: s.opt.Watch, since: time.Now()}
	for {
		i, forward, excess := s.price.next(&s.tree)
		if excess == 0 {
			break
		}
		s.tree.pivot(i, forward, excess)
		pivots++
		if pivots&255 == 0 {
			if ctx.Err() != nil {
				return s.result(p, q, pivots, false), ctx.Err()
			}
			watch.look(func() *Result { return s.result(p, q, pivots, false) })
		}
		if early.due(pivots, s) {
			if r := s.result(p, q, pivots, false); r.Gap() <= s.opt.Gap {
				return r, nil
			}
			early.wait(pivots)
		}
	}
	r := s.result(p, q, pivots, true)
	if e := s.blocked(r); e >= 0 {
		edge := s.net.EdgeList()[e]
		return nil, fmt.Errorf("from %q to %q: %w (edge %s → %s would be used backwards)",
			p.Name, q.Name, ErrUnreachable, s.net.Name(int(edge.From)), s.net.Name(int(edge.To)))
	}
	if !r.closed() {
		return nil, fmt.Errorf("from %q to %q: %w: lower %v, upper %v", p.Name, q.Name, ErrCertificate, r.Lower, r.Upper)
	}
	return r, nil
}

// stopRule says when a look at the bounds is worth its price, a sweep over the
// network: while a round of pivots still lowers the cost by much more than the
// gap asked for, the gap is larger than that; and a look in vain is not
// followed by another before some rounds have passed.
type stopRule struct {
	gap   float64
	every int
	last  float64 // cost at the last round
	next  int     // pivots before which no look is due
}

func (e *stopRule) wait(pivots int) { e.next = pivots + 3*e.every }

func (e *stopRule) due(pivots int, s *Solver) bool {
	if e.gap == 0 || pivots%e.every != 0 {
		return false
	}
	cost := s.cost()
	due := e.last-cost <= e.gap*cost && pivots >= e.next
	e.last = cost
	return due
}

// watcher reports bounds no more often than ten times the time a report takes.
type watcher struct {
	call  func(lower, upper float64)
	since time.Time
	took  time.Duration
}

func (w *watcher) look(at func() *Result) {
	if w.call == nil || time.Since(w.since) < max(time.Second/4, 10*w.took) {
		return
	}
	start := time.Now()
	r := at()
	w.call(r.Lower, r.Upper)
	w.since = time.Now()
	w.took = w.since.Sub(start)
}

// cost is what the flow of the tree costs, roughly and in solver units: only
// for comparison.
func (s *Solver) cost() float64 {
	cost := 0.0
	for v := range s.tree.node {
		if x := &s.tree.node[v]; x.parent >= 0 {
			cost += float64(abs(x.flow)) * float64(abs(s.tree.rise(int32(v))))
		}
	}
	return cost
}

// start chooses the tree: of the pair before, or the first, whichever carries
// the pair at less cost; where all mass goes to one node or comes from one, that
// of shortest paths there, which is optimal.
func (s *Solver) start(p, q graphio.Sample) {
	if node, sign := s.loneNode(p, q); node != noNode {
		s.regrow()
		if node != s.lone {
			s.tree.grow(s.star(node, sign))
		}
		s.sign = sign
		s.load()
		s.warm = true
		return
	}
	s.load()
	if s.warm && s.startCost() < s.cost() {
		s.regrow()
		s.load()
	}
	s.warm = true
}

// star is the tree of shortest paths to a node, or from it where sign is -1:
// then the perturbation, too, comes from there.
func (s *Solver) star(node int32, sign int64) (parentEdge, order []int32) {
	direction := shortest.Backward
	if sign < 0 {
		direction = shortest.Forward
	}
	sp, n := s.space, s.net.Order()
	dist, via := make([]float64, n), make([]int32, n)
	for v := range dist {
		dist[v] = math.Inf(1)
	}
	dist[node] = 0
	shortest.Sweep(s.net, dist, direction, via)
	f := newForest(n)
	own := make([]int32, s.net.Size())
	for k := range sp.edge {
		for _, i := range [...]int32{sp.fwd[k], sp.bwd[k]} {
			if i != noEdge {
				own[i] = int32(k)
			}
		}
	}
	for _, i := range via {
		if i != noEdge {
			f.add(sp.edge, own[i])
		}
	}
	for k := range sp.edge { // what cannot be reached
		f.add(sp.edge, int32(k))
	}
	return f.rooted(sp.edge, sp.number[node])
}

// startCost is the cost of the same supplies on the tree to start from cold.
func (s *Solver) startCost() float64 {
	if s.flow == nil {
		s.flow = make([]float64, len(s.supply))
	}
	for v, b := range s.supply {
		s.flow[v] = float64(b) * float64(len(s.supply)+1) // as cost has it
	}
	cost := 0.0
	for i := len(s.space.startOrder) - 1; i >= 0; i-- {
		v := s.space.startOrder[i]
		k := s.space.startEdge[v]
		if k == noEdge {
			continue
		}
		e := &s.tree.edge[k]
		length := e.fwd
		if (e.u == v) != (s.flow[v] > 0) {
			length = e.bwd
		}
		cost += math.Abs(s.flow[v]) * float64(length)
		s.flow[e.u^e.v^v] += s.flow[v]
	}
	return cost
}

// Solve is NewSolver and Solver.Solve for a single pair.
func Solve(net *graphio.Network, p, q graphio.Sample, opt Options) (*Result, error) {
	s, err := NewSolver(net, opt)
	if err != nil {
		return nil, err
	}
	return s.Solve(context.Background(), p, q)
}

// pricing looks for edges whose ends differ in potential by more than their
// length: in blocks of edges, round and round, the largest excess of a block
// at a time (Kovács 2015, block search). Blocks are shorter than the √m usual
// there, as pivots are cheaper here; edges are in tree order, so what a block
// reads of its nodes is mostly in the cache already.
type pricing struct {
	cursor, block int
}

func newPricing(edges int) pricing {
	return pricing{block: max(16, int(4*math.Sqrt(math.Sqrt(float64(edges)))))}
}

// next returns an edge to pivot on, whether flow goes along it from u to v,
// and the excess; 0 if no edge has any, so the potential is feasible.
func (p *pricing) next(t *tree) (best int32, forward bool, excess int64) {
	left := p.block
	for range t.edge {
		if p.cursor == len(t.edge) {
			p.cursor = 0
		}
		e := &t.edge[p.cursor]
		drop := t.tour.potential(e.u) - t.tour.potential(e.v)
		if d := drop - e.fwd; d > excess {
			best, forward, excess = int32(p.cursor), true, d
		}
		if d := -drop - e.bwd; d > excess {
			best, forward, excess = int32(p.cursor), false, d
		}
		p.cursor++
		if left--; left == 0 {
			if excess > 0 {
				return best, forward, excess
			}
			left = p.block
		}
	}
	return best, forward, excess
}

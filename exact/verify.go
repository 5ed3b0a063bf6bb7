package exact

import (
	"fmt"
	"math"
)

// Verify checks the result against the network and the samples alone: that
// the flow starts where p exceeds q and ends where q exceeds p, that one-way
// edges are honoured, that the potential is feasible, that the bounds are what
// flow and potential give, and, for an optimum, that they are equal to 1e-9.
// Errors wrap ErrCertificate. Cost: O(nodes + edges).
func (r *Result) Verify() error {
	fail := func(format string, args ...any) error {
		return fmt.Errorf("%w: %s", ErrCertificate, fmt.Sprintf(format, args...))
	}
	n := r.net.Order()
	supply, excess := make([]float64, n), make([]doubled, n)
	perP, perQ := r.units()
	for i, v := range r.p.Nodes {
		supply[v] += r.p.Values[i] / perP
	}
	for i, v := range r.q.Nodes {
		supply[v] -= r.q.Values[i] / perQ
	}
	mass, largest := 0.0, 0.0
	var value, cost doubled
	for v, b := range supply {
		mass += math.Abs(b)
		largest = max(largest, math.Abs(r.Potential[v]))
		value.addProduct(r.Potential[v], b)
		excess[v].add(b)
		if r.Unmatched != nil {
			excess[v].add(-r.Unmatched[v])
			cost.addProduct(r.opt.Unmatched, math.Abs(r.Unmatched[v]))
			if math.Abs(r.Potential[v]) > r.opt.Unmatched*(1+1e-12) {
				return fail("potential %v at node %q is past the cost %v of unmatched mass", r.Potential[v], r.net.Name(v), r.opt.Unmatched)
			}
		}
	}
	slack := 0x1p-50 * largest
	for i, e := range r.net.EdgeList() {
		f := r.Flow[i]
		if e.OneWay && f < 0 {
			return fail("flow %v along one-way edge %s → %s", f, r.net.Name(int(e.From)), r.net.Name(int(e.To)))
		}
		excess[e.From].add(-f)
		excess[e.To].add(f)
		cost.addProduct(e.Length, math.Abs(f))
		drop := r.Potential[e.From] - r.Potential[e.To]
		if drop > e.Length+slack || !e.OneWay && -drop > e.Length+slack {
			return fail("potential drops by %v along edge %s → %s of length %v", drop, r.net.Name(int(e.From)), r.net.Name(int(e.To)), e.Length)
		}
	}
	stray := strayMass(r.opt, r.p, r.q)
	for v := range excess {
		if x := excess[v].value(); math.Abs(x) > max(1e-12*mass, stray) {
			return fail("flow leaves %v too much at node %q", x, r.net.Name(v))
		}
	}
	near := func(a, b float64) bool { return math.Abs(a-b) <= 1e-9*r.Upper+slack*mass }
	switch {
	case !near(cost.value(), r.Upper):
		return fail("the flow costs %v, not %v", cost.value(), r.Upper)
	case r.Lower > 0 && value.value() < r.Lower && !near(value.value(), r.Lower): // 0 needs no proof
		return fail("the potential gives %v, not %v", value.value(), r.Lower)
	case r.Lower > r.Upper:
		return fail("lower bound %v above upper bound %v", r.Lower, r.Upper)
	case r.Optimal && !r.closed():
		return fail("lower bound %v and upper bound %v differ", r.Lower, r.Upper)
	}
	return nil
}

// doubled is a sum in twice the working precision (Ogita, Rump & Oishi 2005).
type doubled struct{ hi, lo float64 }

func (d *doubled) add(x float64) {
	s := d.hi + x
	b := s - d.hi
	d.lo += (d.hi - (s - b)) + (x - b)
	d.hi = s
}

func (d *doubled) addProduct(a, b float64) {
	p := float64(a * b)
	d.lo += math.FMA(a, b, -p)
	d.add(p)
}

func (d *doubled) value() float64 { return d.hi + d.lo }

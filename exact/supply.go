package exact

import (
	"fmt"
	"math"
	"math/bits"

	"example.org/barrow/graphio"
)

// setSupplies turns p − q into integer supplies.
//
// Counts stay exact: amounts are subtracted, shares brought to the common
// denominator P·Q. Other masses are scaled by a power of two and rounded, the
// finest that fits; the flow of the result is made from the true ones.
func (s *Solver) setSupplies(p, q graphio.Sample) error {
	pTotal, qTotal := p.Total(), q.Total()
	if s.opt.Shares {
		for _, x := range []graphio.Sample{p, q} {
			if len(x.Nodes) == 0 {
				return fmt.Errorf("sample %q has no mass to divide into shares", x.Name)
			}
		}
	} else if s.opt.Unmatched == 0 && math.Abs(pTotal-qTotal) > 1e-9*max(pTotal, qTotal) {
		return fmt.Errorf("%w: %q has %v, %q has %v; compare shares, or give a cost of unmatched mass", ErrTotals, p.Name, pTotal, q.Name, qTotal)
	}
	clear(s.supply)
	if !s.wholeSupplies(p, q, pTotal, qTotal) {
		s.roundedSupplies(p, q, pTotal, qTotal)
	}
	return s.balance(p, q)
}

// load puts the supplies on the tree, perturbed: with n nodes a supply b becomes
// (n+1)·b + 1, and the root takes up the rest (the perturbation behind strongly
// feasible trees: Cunningham 1976; Ahuja, Magnanti & Orlin 1993, §11.6). A tree
// edge then carries (n+1) times the true flow plus the number of nodes below
// it, which is never 0 in any tree: no pivot is degenerate, and the tree that
// is optimal for these supplies is for the true ones. Where s.sign is -1 every
// node takes up a unit and the root gives it.
func (s *Solver) load() {
	n := int64(len(s.supply))
	if s.perturbed == nil {
		s.perturbed = make([]int64, n)
	}
	for v, b := range s.supply {
		s.perturbed[v] = b*(n+1) + s.sign
	}
	s.perturbed[s.tree.root] -= s.sign * n
	s.tree.load(s.perturbed)
}

// room is the largest total of supplies that leaves space for the
// perturbation.
func (s *Solver) room() float64 { return float64(int64(1)<<61) / float64(len(s.supply)+1) }

// wholeSupplies sets exact supplies, or reports that it cannot.
func (s *Solver) wholeSupplies(p, q graphio.Sample, pTotal, qTotal float64) bool {
	if !p.Counts() || !q.Counts() || pTotal+qTotal >= 1<<53 {
		return false
	}
	byP, byQ := int64(1), int64(1)
	s.unit = 1
	if s.opt.Shares {
		g := gcd(int64(pTotal), int64(qTotal))
		byP, byQ = int64(qTotal)/g, int64(pTotal)/g
		s.unit = 1 / (pTotal * float64(byP))
	}
	if pTotal*float64(byP) >= s.room() || qTotal*float64(byQ) >= s.room() {
		return false
	}
	for i, v := range p.Nodes {
		s.supply[s.space.number[v]] += int64(p.Values[i]) * byP
	}
	for i, v := range q.Nodes {
		s.supply[s.space.number[v]] -= int64(q.Values[i]) * byQ
	}
	s.amount = nil
	return true
}

func gcd(a, b int64) int64 {
	for b != 0 {
		a, b = b, a%b
	}
	return a
}

// roundedSupplies sets s.amount to the true supplies and s.supply to the
// nearest integers in the finest unit that fits.
func (s *Solver) roundedSupplies(p, q graphio.Sample, pTotal, qTotal float64) {
	if s.amount == nil {
		s.amount = make([]float64, len(s.supply))
	}
	clear(s.amount)
	byP, byQ := 1.0, 1.0
	if s.opt.Shares {
		byP, byQ = pTotal, qTotal
	}
	for i, v := range p.Nodes {
		s.amount[s.space.number[v]] += p.Values[i] / byP
	}
	for i, v := range q.Nodes {
		s.amount[s.space.number[v]] -= q.Values[i] / byQ
	}
	moved := 0.0
	for _, a := range s.amount {
		moved += math.Abs(a)
	}
	_, exp := math.Frexp(moved / s.room())
	s.unit = math.Ldexp(1, exp)
	for v, a := range s.amount {
		s.supply[v] = int64(math.RoundToEven(a / s.unit))
	}
}

// balance makes the supplies of every part sum to 0: what rounding left goes
// to the largest, and an extra node takes up all there is.
func (s *Solver) balance(p, q graphio.Sample) error {
	part, parts := s.parts()
	stray := strayMass(s.opt, p, q)
	sum, magnitude := make([]int64, parts), make([]int64, parts)
	largest := make([]int32, parts)
	true0 := make([]float64, parts)
	for c := range largest {
		largest[c] = -1
	}
	for v, b := range s.supply {
		c := part[v]
		sum[c] += b
		magnitude[c] += abs(b)
		if s.amount != nil {
			true0[c] += s.amount[v]
		}
		if l := largest[c]; l < 0 || abs(b) > abs(s.supply[l]) {
			largest[c] = int32(v)
		}
	}
	if s.opt.Unmatched > 0 {
		last := len(s.supply) - 1
		s.supply[last] -= sum[0]
		if s.amount != nil {
			s.amount[last] -= true0[0]
		}
		return nil
	}
	for c, left := range sum {
		if left == 0 {
			continue
		}
		// Rounding leaves half a unit a node at the most, and sums of shares
		// some units in the last place, of all mass where p and q are alike.
		if s.amount == nil || math.Abs(true0[c]) > max(1e-9*float64(magnitude[c])*s.unit, stray) {
			return fmt.Errorf("%w within a component, the one of node %q: %q and %q have %v more and less there; join the components, or give a cost of unmatched mass",
				ErrTotals, s.net.Name(int(s.space.label[largest[c]])), p.Name, q.Name, float64(left)*s.unit)
		}
		s.supply[largest[c]] -= left
	}
	return nil
}

// strayMass is what may be left where masses should cancel: a sum of shares, or
// of amounts that are no whole numbers, is some units in the last place off.
func strayMass(opt Options, p, q graphio.Sample) float64 {
	if opt.Shares {
		return 0x1p-48
	}
	return 0x1p-48 * max(p.Total(), q.Total())
}

// parts numbers the component of every solver node: all of one where an extra
// node joins them.
func (s *Solver) parts() (part []int32, count int) {
	if s.part == nil {
		s.part, s.partCount = make([]int32, len(s.supply)), 1
		if s.opt.Unmatched == 0 {
			label, k := s.net.Components()
			for v, c := range label {
				s.part[s.space.number[v]] = c
			}
			s.partCount = k
		}
	}
	return s.part, s.partCount
}

func abs(x int64) int64 {
	if x < 0 {
		return -x
	}
	return x
}

// wide is a signed 128-bit sum of products.
type wide struct {
	hi int64
	lo uint64
}

func (w *wide) addProduct(a, b int64) {
	hi, lo := bits.Mul64(uint64(abs(a)), uint64(abs(b)))
	if (a < 0) != (b < 0) {
		var borrow uint64
		w.lo, borrow = bits.Sub64(w.lo, lo, 0)
		w.hi -= int64(hi + borrow)
		return
	}
	var carry uint64
	w.lo, carry = bits.Add64(w.lo, lo, 0)
	w.hi += int64(hi + carry)
}

func (w wide) float() float64 {
	hi, lo, sign := w.hi, w.lo, 1.0
	if hi < 0 {
		var borrow uint64
		lo, borrow = bits.Sub64(0, lo, 0)
		hi, sign = -hi-int64(borrow), -1
	}
	return sign * math.FMA(float64(hi), 0x1p64, float64(lo))
}

package pairwise

import (
	"context"
	"math"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// bounds is what is proved of every pair: the Lower and Upper of a matrix
// without direction, which only ever come closer. Sums are rounded outwards.
type bounds struct {
	*Matrix
	solved   []bool
	toI, toJ []float64 // scratch of settle
}

func newBounds(names []string) *bounds {
	b := &bounds{Matrix: newMatrix(names, false, true)}
	b.solved = make([]bool, len(b.Lower))
	for k := range b.Upper {
		b.Upper[k] = math.Inf(1)
	}
	b.toI, b.toJ = make([]float64, len(names)), make([]float64, len(names))
	return b
}

// outward is more than the rounding of a few sums and products.
const outward = 0x1p-49

// settle takes what a solve proved of the pair i, j, and what follows for all
// others by the triangle inequality: no pair is farther apart than by way of
// this one, and none nearer than this one less the ways to it. Cost: O(n²).
func (b *bounds) settle(i, j int, lower, upper float64) {
	at := b.Index(i, j)
	b.solved[at] = true
	b.Lower[at] = max(b.Lower[at], min(lower, b.Upper[at]))
	b.Upper[at] = min(b.Upper[at], max(upper, b.Lower[at]))
	lower, upper = b.Lower[at], b.Upper[at]
	n := len(b.Names)
	for k := range n {
		b.toI[k], b.toJ[k] = b.farthest(k, i), b.farthest(k, j)
	}
	at = 0
	for a := range n {
		ai, aj := b.toI[a], b.toJ[a]
		for c := a + 1; c < n; c++ {
			ways := min(ai+b.toJ[c], aj+b.toI[c])
			b.Upper[at] = min(b.Upper[at], (ways+upper)*(1+outward))
			b.Lower[at] = max(b.Lower[at], min(lower-ways*(1+outward)-outward*lower, b.Upper[at]))
			at++
		}
	}
}

func (b *bounds) farthest(i, j int) float64 {
	if i == j {
		return 0
	}
	return b.Upper[b.Index(i, j)]
}

// witness raises lower bounds by the heights of all samples on one potential,
// which may be off by slack.
func (b *bounds) witness(height []float64, slack float64) (raised int) {
	at := 0
	for i, h := range height {
		for _, g := range height[i+1:] {
			if l := min(math.Abs(h-g)-slack, b.Upper[at]); l > b.Lower[at] {
				if l > b.Lower[at]*(1+1e-3) {
					raised++
				}
				b.Lower[at] = l
			}
			at++
		}
	}
	return raised
}

// gap is (upper − lower) / upper of a pair, 0 where both are 0.
func (b *bounds) gap(at int) float64 {
	switch l, u := b.Lower[at], b.Upper[at]; {
	case u <= l:
		return 0
	case math.IsInf(u, 1):
		return 1
	default:
		return (u - l) / u
	}
}

// ceilings lowers the upper bounds by what the samples' flows through a network
// of resistors cost; conductances nil are 1/length.
func (b *bounds) ceilings(ctx context.Context, net *graphio.Network, compared *graphio.Samples, conductance []float64, opt Options) error {
	flow, err := dual.NewFlow(net, dual.FlowOptions{Conductance: conductance, Unmatched: opt.Unmatched})
	if err != nil {
		return err
	}
	e, err := flow.Embed(ctx, compared, opt.Threads, nil)
	if err != nil {
		return err
	}
	return tiles(ctx, opt.threads(), len(b.Names), func(int, int) {}, func(i0, i1, j0, j1 int) {
		for i := i0; i < i1; i++ {
			for j := max(j0, i+1); j < j1; j++ {
				at := b.Index(i, j)
				b.Upper[at] = min(b.Upper[at], e.Upper(i, j))
			}
		}
	})
}

// landmarks raises the lower bounds by distances from nodes far from each other.
func (b *bounds) landmarks(ctx context.Context, net *graphio.Network, compared *graphio.Samples, count int, opt Options) error {
	return eachLandmark(ctx, net, count, opt.Unmatched, func(potential []float64) {
		b.witness(heightsOn(potential, compared))
	})
}

// eachLandmark calls use with distances from nodes as far from each other as
// can be, one after the other: each is a potential.
func eachLandmark(ctx context.Context, net *graphio.Network, count int, unmatched float64, use func(potential []float64)) error {
	n := net.Order()
	nearest := make([]float64, n) // to a landmark so far
	for v := range nearest {
		nearest[v] = math.Inf(1)
	}
	potential := make([]float64, n)
	mark := 0
	for range min(count, n) {
		if err := ctx.Err(); err != nil {
			return err
		}
		for v := range potential {
			potential[v] = math.Inf(1)
		}
		potential[mark] = 0
		shortest.Sweep(net, potential, shortest.Either, nil)
		far := 0.0
		for v, d := range potential {
			nearest[v] = min(nearest[v], d)
			if nearest[v] > far {
				mark, far = v, nearest[v]
			}
			switch {
			case unmatched > 0: // no potential is worth more than removing mass
				potential[v] = min(max(d-unmatched, -unmatched), unmatched)
			case math.IsInf(d, 1): // another part: nothing leads there
				potential[v] = 0
			}
		}
		use(potential)
		if far == 0 {
			break
		}
	}
	return nil
}

// heightsOn is potential·sample of every sample, and how far two of them may
// lie wrongly apart: the potential's differences along edges are rounded, and
// a unit of mass crosses at most all nodes; the sums carry their rounding along
// (Neumaier 1974).
func heightsOn(potential []float64, compared *graphio.Samples) (height []float64, slack float64) {
	largest, mass := 0.0, 0.0
	for _, x := range potential {
		largest = max(largest, math.Abs(x))
	}
	height = make([]float64, compared.Len())
	for i := range height {
		s := compared.At(i)
		sum, carry := 0.0, 0.0
		for k, v := range s.Nodes {
			x := float64(potential[v] * s.Values[k])
			next := sum + x
			if math.Abs(sum) >= math.Abs(x) {
				carry += sum - next + x
			} else {
				carry += x - next + sum
			}
			sum = next
		}
		height[i] = sum + carry
		mass = max(mass, s.Total())
	}
	return height, 0x1p-50 * largest * mass * float64(len(potential)+64)
}

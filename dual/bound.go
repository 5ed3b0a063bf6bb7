package dual

import (
	"math"
	"slices"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

// Variation is the total variation distance ½‖p - q‖₁, in the unit of the
// masses; 0 to 1 for shares. Cost: O(entries of p and q).
func Variation(p, q graphio.Sample) float64 {
	var sum accumulator
	merge(p, q, func(_ int32, x, y float64) { sum.add(math.Abs(x - y)) })
	return sum.value() / 2
}

// LowerBound is φ·(p - q) for a potential φ with one value a node, added up
// with compensation. Where p and q have equal totals and φ changes along no
// edge by more than its length (on one-way edges u→v: φ_u - φ_v is at most the
// length), it is at most the transport distance from p to q (Kantorovich &
// Rubinstein 1958). Cost: O(entries of p and q).
func LowerBound(potential []float64, p, q graphio.Sample) float64 {
	var sum accumulator
	merge(p, q, func(v int32, x, y float64) { sum.product(potential[v], x-y) })
	return sum.value()
}

// Repair returns the largest function below the potential that is feasible for
// LowerBound: ψ_u = min_v potential_v + d(u, v), d being the shortest-path
// distance from u to v (McShane 1934). On one-way networks it honours
// direction. A feasible potential comes back unchanged.
// Cost: O((nodes + edges) log nodes).
func Repair(net *graphio.Network, potential []float64) []float64 {
	repaired := append([]float64(nil), potential...)
	shortest.Sweep(net, repaired, shortest.Backward, nil)
	return repaired
}

// Certify makes the best lower bound it can of a potential of any scale: it
// repairs multiples of the potential, from the one that is feasible as it is
// upwards by factors of 2 until the bound falls, and returns the best bound
// with its feasible potential. Bounds below 0 become 0, by the potential 0.
// p and q have equal totals. Cost: ten or so repairs.
func Certify(net *graphio.Network, potential []float64, p, q graphio.Sample) (lower float64, feasible []float64) {
	feasible = make([]float64, len(potential))
	steepest := 0.0
	for _, e := range net.EdgeList() {
		slope := (potential[e.From] - potential[e.To]) / e.Length
		if !e.OneWay {
			slope = math.Abs(slope)
		}
		steepest = max(steepest, slope)
	}
	if steepest == 0 {
		return 0, feasible
	}
	scaled := make([]float64, len(potential))
	least := slices.Min(potential) // taken off, so that large factors lose no digits
	for factor, falls := 1/steepest, 0; falls < 2; factor *= 2 {
		for v, x := range potential {
			scaled[v] = factor * (x - least)
		}
		repaired := Repair(net, scaled)
		if bound := LowerBound(repaired, p, q); bound > lower {
			lower, feasible, falls = bound, repaired, 0
		} else {
			falls++
		}
	}
	return lower, feasible
}

// merge calls do for every node where p or q has mass, in node order.
func merge(p, q graphio.Sample, do func(v int32, x, y float64)) {
	i, j := 0, 0
	for i < len(p.Nodes) || j < len(q.Nodes) {
		switch {
		case j == len(q.Nodes) || i < len(p.Nodes) && p.Nodes[i] < q.Nodes[j]:
			do(p.Nodes[i], p.Values[i], 0)
			i++
		case i == len(p.Nodes) || q.Nodes[j] < p.Nodes[i]:
			do(q.Nodes[j], 0, q.Values[j])
			j++
		default:
			do(p.Nodes[i], p.Values[i], q.Values[j])
			i, j = i+1, j+1
		}
	}
}

// accumulator adds with the rounding errors carried along (Neumaier 1974).
type accumulator struct{ sum, carry float64 }

func (a *accumulator) add(x float64) {
	t := a.sum + x
	if math.Abs(a.sum) >= math.Abs(x) {
		a.carry += (a.sum - t) + x
	} else {
		a.carry += (x - t) + a.sum
	}
	a.sum = t
}

// product adds x y with the rounding error of the product.
func (a *accumulator) product(x, y float64) {
	p := float64(x * y)
	a.add(p)
	a.carry += math.FMA(x, y, -p)
}

func (a *accumulator) value() float64 { return a.sum + a.carry }

package inference

import (
	"context"
	"fmt"
	"slices"

	"example.org/barrow/dual/pairwise"
)

// Holm adjusts P values of several tests so that calling those up to a level
// significant makes any false call at most that likely, whatever the
// dependence (Holm 1979).
func Holm(p []float64) []float64 {
	adjusted := make([]float64, len(p))
	largest := 0.0
	for rank, k := range ascending(p) {
		largest = max(largest, min(1, float64(len(p)-rank)*p[k]))
		adjusted[k] = largest
	}
	return adjusted
}

// BenjaminiHochberg adjusts P values of several tests so that among those
// called at a level at most that share is false on average, for independent or
// positively dependent tests (Benjamini & Hochberg 1995).
func BenjaminiHochberg(p []float64) []float64 {
	adjusted := make([]float64, len(p))
	least := 1.0
	order := ascending(p)
	for rank, k := range slices.Backward(order) {
		least = min(least, float64(len(p))*p[k]/float64(rank+1))
		adjusted[k] = least
	}
	return adjusted
}

// A Comparison is a test of two groups, with P adjusted over all pairs tested.
type Comparison struct {
	A, B string
	*GroupTest
	Holm, FalseDiscovery float64
}

// A Groupwise is a test of a factor on a matrix: PseudoF, Energy, ANOSIM.
type Groupwise func(ctx context.Context, d *pairwise.Matrix, factor Variable, scheme Scheme, opt Options) (*GroupTest, error)

// Pairs runs a test on every pair of groups, each on the samples of the two
// alone, and adjusts P for their number.
//
// Errors: those of the test, naming the pair.
func Pairs(ctx context.Context, test Groupwise, d *pairwise.Matrix, factor Variable, scheme Scheme, opt Options) ([]Comparison, error) {
	g, err := factor.grouping(len(d.Names))
	if err != nil {
		return nil, err
	}
	var list []Comparison
	var p []float64
	for a := range g.names {
		for b := a + 1; b < len(g.names); b++ {
			var keep []int
			for i, c := range g.code {
				if int(c) == a || int(c) == b {
					keep = append(keep, i)
				}
			}
			part := Variable{Name: factor.Name, Labels: pick(factor.Labels, keep)}
			r, err := test(ctx, Part(d, keep), part, scheme.part(keep), opt)
			if err != nil {
				return nil, fmt.Errorf("%q against %q: %w", g.names[a], g.names[b], err)
			}
			list = append(list, Comparison{A: g.names[a], B: g.names[b], GroupTest: r})
			p = append(p, r.P)
		}
	}
	holm, bh := Holm(p), BenjaminiHochberg(p)
	for k := range list {
		list[k].Holm, list[k].FalseDiscovery = holm[k], bh[k]
	}
	return list, nil
}

// Part is the matrix of some of the samples, in the order given.
func Part(d *pairwise.Matrix, keep []int) *pairwise.Matrix {
	part := &pairwise.Matrix{Names: pick(d.Names, keep)}
	for a, i := range keep {
		for _, j := range keep[a+1:] {
			part.Value = append(part.Value, d.At(i, j))
		}
	}
	return part
}

func (s Scheme) part(keep []int) Scheme {
	s.Blocks, s.Plots = pick(s.Blocks, keep), pick(s.Plots, keep)
	return s
}

// pick is the entries kept; nil of nil.
func pick[T any](v []T, keep []int) []T {
	if v == nil {
		return nil
	}
	out := make([]T, len(keep))
	for k, i := range keep {
		out[k] = v[i]
	}
	return out
}

package inference

import (
	"fmt"
	"slices"

	"example.org/barrow/dual/pairwise"
)

// An Outlier says how a sample stands to its neighbours.
type Outlier struct {
	Sample int
	// Score is the distance to the neighbour number k among the samples compared
	// with, and Excess the same divided by the median score of those.
	Score, Excess float64
	// P is the rank of the score among those of the samples compared with: a
	// sample like them has P at most a level with at most that probability.
	P float64
	// FalseDiscovery is P adjusted over all samples tested (Benjamini & Hochberg
	// 1995), which holds for these P (Bates et al. 2023).
	FalseDiscovery float64
}

// Outliers ranks samples by the distance to their k-th nearest neighbour
// (Ramaswamy, Rastogi & Shim 2000) and gives each a conformal P (Vovk,
// Gammerman & Shafer 2005; Laxhammar & Falkman 2011): the sample is put among
// the reference samples, all are scored alike, and P is the part that score as
// high. A sample exchangeable with the reference is so called at a level with
// at most that probability, whatever the distribution.
//
// reference are the samples known to be ordinary, and those not in it are
// tested. With nil every sample is tested against all others: then P is its
// rank, some sample always has P = 1/n, and Excess has to tell whether it is
// far.
//
// Errors: ErrMatrix, ErrDesign, ErrOption; ErrFew where no P can be as small as
// level. Cost: O(n²) without a reference, O(tested × reference) with one.
func Outliers(d *pairwise.Matrix, k int, level float64, reference []int) ([]Outlier, error) {
	if err := checkMatrix(d, 4); err != nil {
		return nil, err
	}
	n := len(d.Names)
	inside := make([]bool, n)
	for _, i := range reference {
		if i < 0 || i >= n || inside[i] {
			return nil, fmt.Errorf("%w: reference sample number %d is not there or stands twice", ErrOption, i)
		}
		inside[i] = true
	}
	compared := len(reference) + 1
	if reference == nil {
		compared = n
	}
	if k < 1 || k >= compared {
		return nil, fmt.Errorf("%w: neighbour number %d among %d samples", ErrOption, k, compared)
	}
	if !(level > 0 && level <= 1) {
		return nil, fmt.Errorf("%w: a level of %v; want a share above 0, such as 0.05", ErrOption, level)
	}
	if 1/float64(compared) > level*(1+1e-12) {
		return nil, fmt.Errorf("%w: among %d samples P is at least %.3g, above the level %v; want more reference samples", ErrFew, compared, 1/float64(compared), level)
	}
	var list []Outlier
	if reference == nil {
		list = ranked(d, k)
	} else {
		list = conformal(d, k, reference, inside)
	}
	p := make([]float64, len(list))
	for i, o := range list {
		p[i] = o.P
	}
	for i, q := range BenjaminiHochberg(p) {
		list[i].FalseDiscovery = q
	}
	return list, nil
}

// nearest is the k smallest distances from i to the samples given, ascending.
func nearest(d *pairwise.Matrix, i, k int, among []int) []float64 {
	all := make([]float64, 0, len(among))
	for _, j := range among {
		if j != i {
			all = append(all, d.At(i, j))
		}
	}
	slices.Sort(all)
	return all[:min(k, len(all))]
}

// judge fills in what the scores compared with say; score is among them.
func judge(i int, score float64, scores []float64) Outlier {
	o := Outlier{Sample: i, Score: score}
	for _, s := range scores {
		if s >= score*(1-1e-12) {
			o.P += 1 / float64(len(scores))
		}
	}
	o.P = min(o.P, 1)
	sorted := slices.Sorted(slices.Values(scores))
	o.Excess = score / ((sorted[(len(sorted)-1)/2] + sorted[len(sorted)/2]) / 2)
	return o
}

func ranked(d *pairwise.Matrix, k int) []Outlier {
	n := len(d.Names)
	all := make([]int, n)
	for i := range all {
		all[i] = i
	}
	scores := make([]float64, n)
	for i := range scores {
		scores[i] = nearest(d, i, k, all)[k-1]
	}
	list := make([]Outlier, n)
	for i, s := range scores {
		list[i] = judge(i, s, scores)
	}
	return list
}

// conformal scores the reference anew with each sample tested among it.
func conformal(d *pairwise.Matrix, k int, reference []int, inside []bool) []Outlier {
	near := make([][]float64, len(reference))
	for a, i := range reference {
		near[a] = nearest(d, i, k, reference)
	}
	var list []Outlier
	scores := make([]float64, len(reference)+1)
	for i, known := range inside {
		if known {
			continue
		}
		for a, j := range reference {
			scores[a] = with(near[a], k, d.At(i, j))
		}
		own := nearest(d, i, k, reference)[k-1]
		scores[len(reference)] = own
		list = append(list, judge(i, own, scores))
	}
	return list
}

// with is the k-th smallest of ascending distances and one more.
func with(near []float64, k int, more float64) float64 {
	if len(near) < k {
		if len(near) == 0 {
			return more
		}
		return max(near[len(near)-1], more)
	}
	if k == 1 {
		return min(near[0], more)
	}
	return min(near[k-1], max(near[k-2], more))
}

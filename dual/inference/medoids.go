package inference

import (
	"fmt"
	"math"

	"example.org/barrow/dual/pairwise"
)

// Clusters are groups around samples of the collection.
type Clusters struct {
	Medoids []int // the central samples, ascending
	Label   []int // the cluster of each sample: an index of Medoids
	Cost    float64
	// Silhouette is, by sample, how much nearer its own cluster is than the next,
	// −1 to 1 (Rousseeuw 1987; 0 in a cluster of one); Mean, over all samples.
	Silhouette []float64
	Mean       float64
}

// Medoids chooses count samples so that the distances of all to the nearest of
// them add up to little: the greedy start of Kaufman & Rousseeuw 1990, then
// swaps taken as soon as they improve, with the loss of giving up each medoid
// kept at hand (Schubert & Rousseeuw 2021). It ends at a local optimum of
// swaps, which nothing but the matrix decides.
//
// Errors: ErrMatrix, ErrDesign, ErrOption.
// Cost: O(n² count) to start, O(n²) for each round of swaps; few are needed.
func Medoids(d *pairwise.Matrix, count int) (*Clusters, error) {
	if err := checkMatrix(d, 3); err != nil {
		return nil, err
	}
	n := len(d.Names)
	if count < 2 || count >= n {
		return nil, fmt.Errorf("%w: %d clusters of %d samples; want 2 or more and fewer than samples", ErrOption, count, n)
	}
	m := &medoids{d: d, chosen: make([]int, 0, count), nearest: make([]int, n), first: make([]float64, n), second: make([]float64, n)}
	m.build(count)
	m.swap()
	return m.clusters(), nil
}

// medoids holds, for each sample, its nearest medoid (an index of chosen), how
// far that is, and how far the next is.
type medoids struct {
	d             *pairwise.Matrix
	chosen        []int
	nearest       []int
	first, second []float64
}

// build adds the sample that lowers the cost most, again and again.
func (m *medoids) build(count int) {
	n := len(m.nearest)
	near := make([]float64, n)
	for i := range near {
		near[i] = math.Inf(1)
	}
	taken := make([]bool, n)
	for range count {
		best, least := -1, math.Inf(1)
		for c := range n {
			if taken[c] {
				continue
			}
			cost := 0.0
			for i := range n {
				cost += min(near[i], m.d.At(i, c))
			}
			if cost < least {
				best, least = c, cost
			}
		}
		taken[best] = true
		m.chosen = append(m.chosen, best)
		for i := range n {
			near[i] = min(near[i], m.d.At(i, best))
		}
	}
	m.assign()
}

func (m *medoids) assign() {
	for i := range m.nearest {
		m.first[i], m.second[i] = math.Inf(1), math.Inf(1)
		for k, c := range m.chosen {
			switch v := m.d.At(i, c); {
			case v < m.first[i]:
				m.second[i] = m.first[i]
				m.first[i], m.nearest[i] = v, k
			case v < m.second[i]:
				m.second[i] = v
			}
		}
	}
	for k, c := range m.chosen {
		m.nearest[c] = k // also where another medoid stands at the same place
	}
}

// swap exchanges medoids for other samples while that lowers the cost.
func (m *medoids) swap() {
	n := len(m.nearest)
	isMedoid := make([]bool, n)
	for _, c := range m.chosen {
		isMedoid[c] = true
	}
	delta := make([]float64, len(m.chosen))
	for last, c := 0, 0; last < n; c = (c + 1) % n {
		last++ // candidates since the last swap
		if isMedoid[c] {
			continue
		}
		// delta[k] is the change of cost when c replaces medoid k: gain is what
		// samples nearer to c save whoever leaves; those of medoid k move to c or
		// to their second.
		clear(delta)
		gain := 0.0
		for i := range n {
			v := m.d.At(i, c)
			k := m.nearest[i]
			if v < m.first[i] {
				gain += v - m.first[i]
				continue
			}
			delta[k] += min(v, m.second[i]) - m.first[i]
		}
		best := 0
		for k := range delta {
			if delta[k] < delta[best] {
				best = k
			}
		}
		if delta[best]+gain < -1e-12*total(m.first) {
			isMedoid[m.chosen[best]], isMedoid[c] = false, true
			m.chosen[best] = c
			m.assign()
			last = 0
		}
	}
}

// clusters orders the medoids and measures silhouettes.
func (m *medoids) clusters() *Clusters {
	n, k := len(m.nearest), len(m.chosen)
	r := &Clusters{Label: make([]int, n), Silhouette: make([]float64, n), Cost: total(m.first)}
	rank := make([]int, k)
	for a, c := range m.chosen {
		for _, other := range m.chosen {
			if other < c {
				rank[a]++
			}
		}
	}
	r.Medoids = make([]int, k)
	size := make([]float64, k)
	for a, c := range m.chosen {
		r.Medoids[rank[a]] = c
	}
	for i := range n {
		r.Label[i] = rank[m.nearest[i]]
		size[r.Label[i]]++
	}
	sum := make([]float64, k)
	for i := range n {
		clear(sum)
		for j := range n {
			sum[r.Label[j]] += m.d.At(i, j)
		}
		own := r.Label[i]
		if size[own] < 2 {
			continue
		}
		a, b := sum[own]/(size[own]-1), math.Inf(1)
		for c := range k {
			if c != own {
				b = min(b, sum[c]/size[c])
			}
		}
		if most := max(a, b); most > 0 {
			r.Silhouette[i] = (b - a) / most
		}
		r.Mean += r.Silhouette[i] / float64(n)
	}
	return r
}

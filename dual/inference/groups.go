package inference

import (
	"context"

	"example.org/barrow/dual/pairwise"
)

// A GroupTest is one statistic of how groups differ.
type GroupTest struct {
	Test, Factor string
	Outcome
	// Share is the part of the total variation that lies between groups, for
	// PseudoF (R²) and Energy.
	Share  float64
	Groups []Group
}

// A Group is a label and what was seen of it.
type Group struct {
	Label string
	Size  int
	// Within is the mean distance between two samples of the group; for
	// Dispersion, the mean distance from its centre.
	Within float64
}

// A partition is a matrix cut into groups, with the sums within each.
type partition struct {
	*grouping
	t      *triangle
	total  float64 // over all pairs
	scale  float64 // the entries were divided by it
	factor string
}

// cut prepares the entries, brought to a mean of 1, for sums within groups.
func cut(d *pairwise.Matrix, factor Variable, entry func(float64) float64) (*partition, error) {
	if err := checkMatrix(d, 4); err != nil {
		return nil, err
	}
	g, err := factor.grouping(len(d.Names))
	if err != nil {
		return nil, err
	}
	p := &partition{grouping: g, factor: factor.Name, t: &triangle{n: len(d.Names), v: make([]float64, len(d.Value))}}
	for k, v := range d.Value {
		p.t.v[k] = entry(v)
	}
	p.scale = brought(p.t.v)
	p.total = float64(len(p.t.v))
	return p, nil
}

// brought divides values by their mean, which it returns, so that statistics
// are of order 1.
func brought(v []float64) float64 {
	mean := 0.0
	for _, x := range v {
		mean += x
	}
	mean /= float64(len(v))
	for k := range v {
		v[k] /= mean
	}
	return mean
}

// spread is Σ_g (1/n_g) Σ_{i<j in g} entry, from the sums of a labelling.
func (p *partition) spread(sums []float64) float64 {
	k := len(p.size)
	w := 0.0
	for c, size := range p.size {
		w += sums[c*k+c] / float64(size)
	}
	return w
}

// test runs a statistic of the sums within groups.
func (p *partition) test(ctx context.Context, name string, scheme Scheme, opt Options, statistic func(sums []float64) float64) (*GroupTest, error) {
	a, err := scheme.arrange(p.t.n, p.code)
	if err != nil {
		return nil, err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return nil, err
	}
	cells := len(p.size)
	r := &GroupTest{Test: name, Factor: p.factor}
	r.Outcome, err = j.single(ctx, 32, sumsEvaluation(p.t, p.code, cells, false, statistic))
	return r, err
}

// observed is the sums within groups as they are.
func (p *partition) observed() []float64 {
	cells := len(p.size)
	identity := make([]int32, p.t.n)
	for i := range identity {
		identity[i] = int32(i)
	}
	sums := make([]float64, cells*cells)
	newSummer(p.t, p.code, cells, false).sum([][]int32{identity}, sums)
	return sums
}

// describe adds the groups and their mean distances.
func (r *GroupTest) describe(d *pairwise.Matrix, g *grouping) {
	n := len(d.Names)
	sum := make([]float64, len(g.size))
	at := 0
	for i := range n {
		for j := i + 1; j < n; j++ {
			if g.code[i] == g.code[j] {
				sum[g.code[i]] += d.Value[at]
			}
			at++
		}
	}
	for c, size := range g.size {
		r.Groups = append(r.Groups, Group{g.names[c], size, sum[c] / float64(size*(size-1)/2)})
	}
}

// Energy tests whether groups have the same distribution by the distances
// within and between them. With two groups the statistic is the energy
// distance 2E|X−Y| − E|X−X'| − E|Y−Y'| (Székely & Rizzo 2013), in the unit of
// the distances; with more, the ratio of the dispersion between to that within
// groups, each by its degrees of freedom (Rizzo & Székely 2010). It sees
// differences of any kind, of place as of spread, where distances are of
// negative type, as L1 distances of embeddings are.
//
// Errors: ErrMatrix, ErrDesign, ErrFew, ErrOption; the context's.
// Cost: O(n²/groups) an arrangement.
func Energy(ctx context.Context, d *pairwise.Matrix, factor Variable, scheme Scheme, opt Options) (*GroupTest, error) {
	p, err := cut(d, factor, func(v float64) float64 { return v })
	if err != nil {
		return nil, err
	}
	n := float64(p.t.n)
	all := p.total / n
	between, within := float64(len(p.size)-1), n-float64(len(p.size))
	r, err := p.test(ctx, "energy", scheme, opt, func(sums []float64) float64 {
		w := p.spread(sums)
		if len(p.size) == 2 {
			return 2 * n * (all - w) / float64(p.size[0]*p.size[1])
		}
		return (all - w) / between / (w / within)
	})
	if err != nil {
		return nil, err
	}
	if len(p.size) == 2 {
		r.Statistic *= p.scale
	}
	r.Share = 1 - p.spread(p.observed())/all
	r.describe(d, p.grouping)
	return r, nil
}

// ANOSIM tests whether ranks of distances are larger between groups than
// within: R = (mean rank between − mean rank within) / (pairs/2), from −1 to
// 1, where equal distances share their mean rank (Clarke 1993). It also
// answers to differences of spread.
//
// Errors and cost as Energy.
func ANOSIM(ctx context.Context, d *pairwise.Matrix, factor Variable, scheme Scheme, opt Options) (*GroupTest, error) {
	p, err := cut(d, factor, func(v float64) float64 { return v })
	if err != nil {
		return nil, err
	}
	p.t.v = ranks(d.Value)
	pairs := float64(len(p.t.v))
	inside := 0.0
	for _, size := range p.size {
		inside += float64(size*(size-1)) / 2
	}
	sum := pairs * (pairs + 1) / 2
	r, err := p.test(ctx, "anosim", scheme, opt, func(sums []float64) float64 {
		w, k := 0.0, len(p.size)
		for c := range p.size {
			w += sums[c*k+c]
		}
		return ((sum-w)/(pairs-inside) - w/inside) / (pairs / 2)
	})
	if err != nil {
		return nil, err
	}
	r.describe(d, p.grouping)
	return r, nil
}

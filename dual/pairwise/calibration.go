package pairwise

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"example.org/barrow/dual"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// A Calibration says which pairs were solved exactly, what weights of the scales
// they gave, and how far the estimates were off on pairs the weights had not
// seen.
type Calibration struct {
	Weights []float64 // one a term of dual.Terms
	Pairs   []CalibrationPair
	HeldOut int // pairs the errors are measured on

	// Of the held-out pairs: the rank correlation of estimate and exact value,
	// and the median and 95th percentile of |estimate/exact − 1|, over pairs
	// whose exact value is above 0. NaN where there are fewer than three pairs
	// (Spearman) or none.
	Spearman, MedianError, P95 float64

	model *Model
}

// A CalibrationPair is one pair that was solved exactly.
type CalibrationPair struct {
	I, J            int // samples
	Exact, Estimate float64
	HeldOut         bool // not used to fit the weights
}

// DefaultPairs is how many pairs of samples are solved to calibrate: 200, or
// half of all where those are fewer, and on networks of more than 20,000
// nodes fewer in proportion, as solving takes longer; but not below 40, and on
// networks of more than 100,000 nodes not below 12.
func DefaultPairs(samples, nodes int, directed bool) int {
	all := pairCount(samples, directed)
	most := min(200, max(12, 4_000_000/max(nodes, 1)))
	return min(all, max(min(40, most), min(most, all/2)))
}

func pairCount(n int, directed bool) int {
	if directed {
		return n * (n - 1)
	}
	return n * (n - 1) / 2
}

func (opt Options) pairs(samples int, net *graphio.Network) int {
	if opt.Calibrate < 0 {
		return DefaultPairs(samples, net.Order(), net.Directed())
	}
	return min(opt.Calibrate, pairCount(samples, net.Directed()))
}

// calibrate solves random pairs and fits conductances and weights on every
// other one; the rest is for judge.
func calibrate(ctx context.Context, net *graphio.Network, compared *graphio.Samples, count int, opt Options) (*Calibration, *dual.Terms, error) {
	c, witness, err := solved(ctx, net, compared, count, opt)
	if err != nil {
		return nil, nil, err
	}
	terms, err := c.fit(ctx, net, compared, witness, opt)
	return c, terms, err
}

// solved solves random pairs. witness has the potentials of those that are not
// held out, none where there are to be vectors.
func solved(ctx context.Context, net *graphio.Network, compared *graphio.Samples, count int, opt Options) (c *Calibration, witness []potentials, err error) {
	pairs := randomPairs(compared.Len(), net.Directed(), count, opt.Seed)
	c = &Calibration{Pairs: make([]CalibrationPair, count)}
	out := heldOut(count, opt.Seed)
	witness = make([]potentials, count)
	report := opt.stage("calibrate")
	progress := func(done int) { report(done, len(pairs)) }
	err = solvePairs(ctx, net, compared, pairs, runLength(len(pairs)), opt, progress, func(k int, r *exact.Result) {
		c.Pairs[k] = CalibrationPair{I: pairs[k].i, J: pairs[k].j, Exact: r.Distance(), HeldOut: out[k]}
		if !out[k] && !opt.KeepVectors {
			witness[k] = shortened(r.Potential)
		}
	})
	return c, witness, err
}

// fitted are the pairs to be fitted, and their distances. Pairs at distance 0
// say nothing about relative errors.
func (c *Calibration) fitted(compared *graphio.Samples) (pairs []dual.Pair, distance []float64) {
	for _, p := range c.Pairs {
		if !p.HeldOut && p.Exact > 0 {
			pairs = append(pairs, dual.Pair{P: compared.At(p.I), Q: compared.At(p.J)})
			distance = append(distance, p.Exact)
		}
	}
	return pairs, distance
}

func shortened(x []float64) potentials {
	short := make(potentials, len(x))
	for i, y := range x {
		short[i] = float32(y)
	}
	return short
}

// fit finds the conductances and the non-negative weights with the least
// squares of relative errors on the pairs that are not held out. witness has the
// potential of each pair, nil for none.
func (c *Calibration) fit(ctx context.Context, net *graphio.Network, compared *graphio.Samples, witness []potentials, opt Options) (*dual.Terms, error) {
	fitted, distance := c.fitted(compared)
	var proofs []potentials
	for k, p := range c.Pairs {
		if !p.HeldOut && p.Exact > 0 && witness[k] != nil {
			proofs = append(proofs, witness[k])
		}
	}
	m, err := newModel(ctx, net, fitted, opt)
	if err != nil {
		return nil, err
	}
	terms, err := m.terms(net)
	if err != nil {
		return nil, err
	}
	rows, err := terms.Of(ctx, fitted, opt.Threads)
	if err != nil {
		return nil, err
	}
	count := len(terms.Names())
	if len(proofs) > 1 {
		if err := proved(ctx, rows, fitted, proofs, opt); err != nil {
			return nil, err
		}
		count++
	}
	weights := weigh(rows, distance, count)
	m.Terms, m.Weights = terms.Names(), weights[:len(terms.Names())]
	if count > len(m.Weights) && weights[len(m.Weights)] > 0 {
		m.Witnesses, m.WitnessWeight = proofs, weights[len(m.Weights)]
	}
	c.Weights, c.model = m.Weights, m
	return terms, nil
}

// proved appends the term of the witnesses to each row. A pair's own witness,
// which says what its distance is, is left out: pairs to come have none.
func proved(ctx context.Context, rows [][]float64, fitted []dual.Pair, proofs []potentials, opt Options) error {
	sample := func(i int) graphio.Sample {
		if i%2 == 0 {
			return fitted[i/2].P
		}
		return fitted[i/2].Q
	}
	count := len(proofs)
	all, err := heights(ctx, proofs, 2*len(fitted), sample, opt.threads())
	if err != nil {
		return err
	}
	for i := range rows {
		p, q := all[2*i*count:(2*i+1)*count], all[(2*i+1)*count:(2*i+2)*count]
		rows[i] = append(rows[i], farthest(p, q, i))
	}
	return nil
}

// randomPairs draws distinct pairs, in an order that lets solvers warm up.
func randomPairs(n int, directed bool, count int, seed uint64) []pair {
	r := rand.New(rand.NewPCG(seed, pairStream))
	chosen := sampleWithout(r, pairCount(n, directed), count)
	slices.Sort(chosen)
	list := make([]pair, count)
	for k, at := range chosen {
		if directed {
			i, j := at/(n-1), at%(n-1)
			if j >= i {
				j++
			}
			list[k] = pair{i, j}
			continue
		}
		i := 0
		for row := n - 1; at >= row; row-- {
			at -= row
			i++
		}
		list[k] = pair{i, i + 1 + at}
	}
	return list
}

// The streams keep the choices made from one seed apart.
const (
	pairStream = iota + 1
	halfStream
)

// sampleWithout draws count of 0..all-1 without replacement (Floyd, in Bentley
// & Floyd 1987), in no particular order.
func sampleWithout(r *rand.Rand, all, count int) []int {
	taken := make(map[int]bool, count)
	list := make([]int, 0, count)
	for top := all - count; top < all; top++ {
		x := r.IntN(top + 1)
		if taken[x] {
			x = top
		}
		taken[x] = true
		list = append(list, x)
	}
	return list
}

// heldOut marks a random half, the smaller one, of the pairs.
func heldOut(count int, seed uint64) []bool {
	r := rand.New(rand.NewPCG(seed, halfStream))
	out := make([]bool, count)
	for _, k := range sampleWithout(r, count, count/2) {
		out[k] = true
	}
	return out
}

// weigh finds non-negative weights of the terms for the least Σ (estimate /
// distance − 1)², plus a little of the squares of the weights, which decides
// between terms that say the same.
func weigh(rows [][]float64, distance []float64, terms int) []float64 {
	weights := make([]float64, terms)
	if len(rows) == 0 {
		return weights
	}
	n := len(rows)
	a, b := mat.NewDense(n+terms, terms, nil), make([]float64, n+terms)
	for k := range terms {
		size := 0.0
		for i, row := range rows {
			size += row[k] / distance[i] / float64(n)
		}
		if size == 0 {
			continue
		}
		weights[k] = 1 / size // columns of mean 1
		for i, row := range rows {
			a.Set(i, k, row[k]/distance[i]/size)
		}
		a.Set(n+k, k, ridge*math.Sqrt(float64(n)))
	}
	for i := range rows {
		b[i] = 1
	}
	for k, x := range nonNegative(a, b) {
		weights[k] *= x
	}
	return weights
}

const ridge = 1e-3

// judge takes the estimates of the pairs from the matrix, so that they have its
// bits, and measures the error on those held out.
func (c *Calibration) judge(m *Matrix) {
	if c == nil {
		return
	}
	for k := range c.Pairs {
		p := &c.Pairs[k]
		p.Estimate = m.At(p.I, p.J)
	}
	c.measure()
	if c.model != nil {
		c.model.Quality = c.Quality()
	}
}

// Quality is what is known of the calibration, for the record.
func (c *Calibration) Quality() *Quality {
	known := func(x float64) *float64 {
		if math.IsNaN(x) {
			return nil
		}
		return &x
	}
	return &Quality{Pairs: len(c.Pairs), HeldOut: c.HeldOut, Spearman: known(c.Spearman), MedianError: known(c.MedianError), P95: known(c.P95)}
}

// measure sets the errors on the held-out pairs.
func (c *Calibration) measure() {
	var exacts, estimates, errors []float64
	for _, p := range c.Pairs {
		if !p.HeldOut {
			continue
		}
		exacts, estimates = append(exacts, p.Exact), append(estimates, p.Estimate)
		if p.Exact > 0 {
			errors = append(errors, math.Abs(p.Estimate/p.Exact-1))
		}
	}
	c.HeldOut = len(exacts)
	c.Spearman, c.MedianError, c.P95 = spearman(exacts, estimates), math.NaN(), math.NaN()
	if len(errors) > 0 {
		slices.Sort(errors)
		c.MedianError = stat.Quantile(0.5, stat.LinInterp, errors, nil)
		c.P95 = stat.Quantile(0.95, stat.LinInterp, errors, nil)
	}
}

// spearman is the correlation of ranks, equal values sharing their mean rank;
// NaN for fewer than three pairs or where one side is all equal.
func spearman(x, y []float64) float64 {
	if len(x) < 3 {
		return math.NaN()
	}
	return stat.Correlation(ranks(x), ranks(y), nil)
}

func ranks(x []float64) []float64 {
	order := make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case x[i] < x[j]:
			return -1
		case x[i] > x[j]:
			return 1
		}
		return 0
	})
	rank := make([]float64, len(x))
	for begin := 0; begin < len(order); {
		end := begin + 1
		for end < len(order) && x[order[end]] == x[order[begin]] {
			end++
		}
		for _, i := range order[begin:end] {
			rank[i] = float64(begin+end+1) / 2
		}
		begin = end
	}
	return rank
}

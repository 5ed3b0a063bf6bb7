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
	Weights []float64 // one a scale, in the unit of the lengths
	Pairs   []CalibrationPair
	HeldOut int // pairs the errors are measured on

	// Of the held-out pairs: the rank correlation of estimate and exact value,
	// and the median and 95th percentile of |estimate/exact − 1|, over pairs
	// whose exact value is above 0. NaN where there are fewer than three pairs
	// (Spearman) or none.
	Spearman, MedianError, P95 float64
}

// A CalibrationPair is one pair that was solved exactly.
type CalibrationPair struct {
	I, J            int // samples
	Exact, Estimate float64
	HeldOut         bool // not used to fit the weights
}

// DefaultPairs is how many pairs of samples are solved to calibrate: 200, or a
// quarter of all where those are fewer, and on networks of more than 20,000
// nodes fewer in proportion, as solving takes longer; but not below 40.
func DefaultPairs(samples, nodes int, directed bool) int {
	all := pairCount(samples, directed)
	return min(all, max(40, min(200, all/4, 200*20000/max(nodes, 1))))
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

// calibrate solves random pairs, fits the weights on every other one and
// measures the error on the rest.
func calibrate(ctx context.Context, net *graphio.Network, compared *graphio.Samples, e *dual.Embedding, count int, opt Options) (*Calibration, error) {
	pairs := randomPairs(compared.Len(), net.Directed(), count, opt.Seed)
	c := &Calibration{Pairs: make([]CalibrationPair, count)}
	err := solvePairs(ctx, net, compared, pairs, opt, "calibrate", func(k int, r *exact.Result) {
		c.Pairs[k] = CalibrationPair{I: pairs[k].i, J: pairs[k].j, Exact: r.Distance()}
	})
	if err != nil {
		return nil, err
	}
	for k, out := range heldOut(count, opt.Seed) {
		c.Pairs[k].HeldOut = out
	}
	c.Weights = fit(e, c.Pairs)
	for k := range c.Pairs {
		p := &c.Pairs[k]
		p.Estimate = e.Distance(p.I, p.J, c.Weights)
	}
	c.measure()
	return c, nil
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

// fit finds the non-negative weights with the least squares of relative errors
// on the pairs that are not held out. Pairs at distance 0 say nothing about
// relative errors.
func fit(e *dual.Embedding, pairs []CalibrationPair) []float64 {
	var rows [][]float64
	for _, p := range pairs {
		if p.HeldOut || p.Exact <= 0 {
			continue
		}
		row := e.Terms(p.I, p.J, nil)
		for k := range row {
			row[k] /= p.Exact
		}
		rows = append(rows, row)
	}
	theory := e.Theory()
	if len(rows) == 0 {
		return make([]float64, len(theory))
	}
	return fitRows(rows, theory)
}

func fitRows(rows [][]float64, theory []float64) []float64 {
	scales := len(theory)
	a := mat.NewDense(len(rows), scales, nil)
	ones := make([]float64, len(rows))
	for i, row := range rows {
		for k := range row {
			a.Set(i, k, row[k]*theory[k]) // in multiples of the theory: columns of like size
		}
		ones[i] = 1
	}
	x := nonNegative(a, ones)
	for k := range x {
		x[k] *= theory[k]
	}
	return x
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

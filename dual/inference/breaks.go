package inference

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"example.org/barrow/dual/pairwise"
)

// A Break is where a series changes: between sample At−1 and sample At.
type Break struct {
	At int
	Outcome
}

// Breaks finds where a series of samples, in the order of the matrix, changes,
// by hierarchical division (Matteson & James 2014): the stretch and the place
// that divide best by the energy distance of the two sides, weighted
// nm/(n+m), are taken first, and the division is tested by shuffling samples
// within the stretches there are. It goes on until a division is not called at
// the level, and a stretch is never shorter than least, 2 or more. Breaks are
// returned in the order of the series, with the P they were found by.
//
// Shuffling supposes that samples within a stretch follow each other without
// memory; where they have one, P is too small.
//
// Errors: ErrMatrix, ErrDesign, ErrOption, ErrFew; the context's.
// Cost: O(n²) an arrangement and break.
func Breaks(ctx context.Context, d *pairwise.Matrix, least int, opt Options) ([]Break, error) {
	if err := checkMatrix(d, 4); err != nil {
		return nil, err
	}
	if err := opt.check(); err != nil {
		return nil, err
	}
	n := len(d.Names)
	if least < 2 || 2*least > n {
		return nil, fmt.Errorf("%w: stretches of %d samples or more in a series of %d; want 2 or more, and room for two", ErrOption, least, n)
	}
	m := opt.permutations()
	if 1/float64(m+1) > opt.level()*(1+1e-12) {
		return nil, fmt.Errorf("%w: with %d permutations P is at least %.3g, above the level %v", ErrFew, m, 1/float64(m+1), opt.level())
	}
	s := &divider{d: full(d), n: n, least: least}
	ends := []int{0, n}
	var found []Break
	for {
		at, value := s.best(ends, nil)
		if at < 0 {
			break
		}
		o := Outcome{Statistic: value, Permutations: m, Distinct: math.Inf(1)}
		order := make([]int32, n)
		for k := range m {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			r := rand.New(rand.NewPCG(opt.Seed^uint64(len(found)+1)<<40, uint64(k)))
			for i := range order {
				order[i] = int32(i)
			}
			for e := range len(ends) - 1 {
				part := order[ends[e]:ends[e+1]]
				r.Shuffle(len(part), func(i, j int) { part[i], part[j] = part[j], part[i] })
			}
			if _, v := s.best(ends, order); v >= value*(1-1e-12) {
				o.Reached++
			}
		}
		o.finish(false)
		if o.P > opt.level() {
			break
		}
		found = append(found, Break{at, o})
		ends = append(ends, at)
		slices.Sort(ends)
		if opt.Progress != nil {
			opt.Progress(len(found), len(found)+1)
		}
	}
	slices.SortFunc(found, func(a, b Break) int { return a.At - b.At })
	return found, nil
}

// full is the matrix with every entry twice, row by row.
func full(d *pairwise.Matrix) []float64 {
	n := len(d.Names)
	v := make([]float64, n*n)
	at := 0
	for i := range n {
		for j := i + 1; j < n; j++ {
			v[i*n+j], v[j*n+i] = d.Value[at], d.Value[at]
			at++
		}
	}
	return v
}

// A divider looks for the best division of stretches.
type divider struct {
	d        []float64
	n, least int
	first    []float64 // scratch: sums of distances within what comes before
}

// best is where the stretches between ends, with the samples in the given
// order (nil: as they stand), divide best; −1 where none is long enough.
func (s *divider) best(ends []int, order []int32) (at int, value float64) {
	at, value = -1, math.Inf(-1)
	for e := range len(ends) - 1 {
		if k, v := s.divide(ends[e], ends[e+1], order); k >= 0 && v > value {
			at, value = k, v
		}
	}
	return at, value
}

// divide goes through the divisions of one stretch. With S the sum of distances
// within the first i of its L samples, T within the rest and B between, the
// weighted energy distance is i(L−i)/L (2B/(i(L−i)) − 2S/(i(i−1)) − 2T/((L−i)(L−i−1))).
func (s *divider) divide(begin, end int, order []int32) (at int, value float64) {
	length := end - begin
	if length < 2*s.least {
		return -1, 0
	}
	row := func(i int) []float64 {
		k := begin + i
		if order != nil {
			k = int(order[k])
		}
		return s.d[k*s.n : (k+1)*s.n]
	}
	place := func(j int) int {
		if order != nil {
			return int(order[begin+j])
		}
		return begin + j
	}
	s.first = append(s.first[:0], 0)
	whole := 0.0
	sums := make([]float64, length) // of sample i with all of the stretch
	for i := range length {
		r := row(i)
		before, all := 0.0, 0.0
		for j := range length {
			x := r[place(j)]
			all += x
			if j < i {
				before += x
			}
		}
		sums[i] = all
		whole += before
		s.first = append(s.first, s.first[i]+before)
	}
	at, value = -1, math.Inf(-1)
	reach := 0.0 // Σ over the first i of their distances to all of the stretch
	for i := 1; i <= length-s.least; i++ {
		reach += sums[i-1]
		if i < s.least {
			continue
		}
		within := s.first[i]
		between := reach - 2*within
		rest := whole - within - between
		a, b := float64(i), float64(length-i)
		v := a * b / (a + b) * (2*between/(a*b) - 2*within/(a*(a-1)) - 2*rest/(b*(b-1)))
		if v > value {
			at, value = begin+i, v
		}
	}
	return at, value
}

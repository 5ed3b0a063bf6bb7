package inference

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"example.org/barrow/dual"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// ErrCounts: samples that are no counts were given where noise is counted.
var ErrCounts = errors.New("not counts")

// NoiseOptions say what counting noise is.
type NoiseOptions struct {
	// Shares takes the total of a sample as given and its counts as multinomial;
	// otherwise amounts are compared, and every node's count is Poisson.
	Shares bool
	// Dispersion is the variance over that of such counts, as Dispersed finds it;
	// 0 is 1.
	Dispersion float64
	// Draws is how often noise is drawn; 0 is 199.
	Draws   int
	Seed    uint64
	Threads int // 0 is the number of processors; the result does not depend on it
	// Progress, if set, is told how many draws are done.
	Progress func(done, total int)
}

// Noise is what distances would be by counting alone, beside what they are.
type Noise struct {
	// Distance is the estimate of every pair; Floor, the mean over draws of what
	// noise alone makes of it; Deviation, the standard deviation of that.
	Distance, Floor, Deviation *pairwise.Matrix
	// P, in the order of Matrix.Value, is how often noise makes as much:
	// (b+1)/(draws+1).
	P     []float64
	Draws int
	// Replicate and Upper are, by sample, the mean and the 95th percentile of the
	// distance between two samples like it, of the same total and source.
	Replicate, Upper []float64
	Counts           []float64 // the total of each sample
}

// Floor draws counting noise for every pair of samples.
//
// The counts of a sample are halved at random: half of them, drawn without
// replacement (multinomial), or each by a coin (Poisson). The difference of the
// halves has mean 0 and, whatever the true distribution, the covariance of the
// sample's own noise; for two samples of one source and total, the difference
// of their differences is distributed as that of the samples themselves, as it
// is one of the equally likely ways to share their pooled counts out (the
// argument of a permutation test: Fisher 1935; by thinning of counts: Neufeld et
// al. 2024). With totals that differ the covariance still agrees. Vectors are
// linear in the sample, so a draw costs one embedding a sample, not a solve a
// pair.
//
// A P is of its pair alone; see BenjaminiHochberg for many.
// Errors: ErrCounts; ErrOption; the context's. Cost: draws times that of
// embedding and comparing all samples; memory twice the vectors.
func Floor(ctx context.Context, e *dual.Estimator, samples *graphio.Samples, opt NoiseOptions) (*Noise, error) {
	draws, scale, err := opt.check(samples)
	if err != nil {
		return nil, err
	}
	n := samples.Len()
	compared := samples
	if opt.Shares {
		if compared, err = samples.Shares(); err != nil {
			return nil, err
		}
	}
	own, err := e.Embed(ctx, compared, opt.Threads, nil)
	if err != nil {
		return nil, err
	}
	many := pairwise.Options{Threads: opt.Threads}
	r := &Noise{Draws: draws, Counts: make([]float64, n), Replicate: make([]float64, n), Upper: make([]float64, n)}
	for i := range r.Counts {
		r.Counts[i] = samples.At(i).Total()
	}
	if r.Distance, err = pairwise.Compare(ctx, samples.Names(), own, many); err != nil {
		return nil, err
	}
	sum, square := make([]float64, len(r.Distance.Value)), make([]float64, len(r.Distance.Value))
	reached := make([]int, len(r.Distance.Value))
	replicates := make([][]float64, n)
	var before []float32
	for draw := range draws {
		half, rest := halves(samples, opt, uint64(draw))
		noise, err := e.Embed(ctx, half, opt.Threads, nil)
		if err != nil {
			return nil, err
		}
		for i := range n {
			row, whole := noise.Row(i), own.Row(i)
			for k, x := range row {
				row[k] = float32(scale) * (x - rest[i]*whole[k])
			}
		}
		d, err := pairwise.Compare(ctx, samples.Names(), noise, many)
		if err != nil {
			return nil, err
		}
		for k, x := range d.Value {
			sum[k] += x
			square[k] += float64(x * x)
			if x >= r.Distance.Value[k]*(1-1e-6) {
				reached[k]++
			}
		}
		if before != nil {
			for i := range n {
				replicates[i] = append(replicates[i], manhattan(noise.Row(i), before[i*noise.Width:(i+1)*noise.Width]))
			}
		}
		before = noise.Vectors
		if opt.Progress != nil {
			opt.Progress(draw+1, draws)
		}
	}
	r.settle(sum, square, reached)
	for i, list := range replicates {
		slices.Sort(list)
		for _, x := range list {
			r.Replicate[i] += x / float64(len(list))
		}
		r.Upper[i] = list[min(len(list)-1, int(math.Ceil(0.95*float64(len(list)+1)))-1)]
	}
	return r, nil
}

// check refuses what cannot be counted, and returns the number of draws and by
// how much noise is scaled.
func (opt NoiseOptions) check(samples *graphio.Samples) (draws int, scale float64, err error) {
	draws, scale = opt.Draws, math.Sqrt(opt.Dispersion)
	if draws == 0 {
		draws = 199
	}
	if opt.Dispersion == 0 {
		scale = 1
	}
	if draws < 19 {
		return 0, 0, fmt.Errorf("%w: %d draws of noise; want 19 or more, as P is at least 1/(draws+1)", ErrOption, draws)
	}
	if !(scale > 0) || math.IsInf(scale, 1) {
		return 0, 0, fmt.Errorf("%w: a dispersion of %v; want a finite number above 0, 1 for plain counts", ErrOption, opt.Dispersion)
	}
	if samples.Len() < 2 {
		return 0, 0, fmt.Errorf("%w: %d samples; want two or more to compare", ErrOption, samples.Len())
	}
	for i := range samples.Len() {
		if s := samples.At(i); !s.Counts() || s.Total() > 1<<53 {
			return 0, 0, fmt.Errorf("%w: sample %q has masses that are no whole numbers, or too many; counting noise is that of counts: want samples of counts, not of shares or rates", ErrCounts, s.Name)
		}
	}
	for i := range samples.Len() {
		if s := samples.At(i); opt.Shares && s.Total() < 2 {
			return 0, 0, fmt.Errorf("%w: sample %q has %v counts in all, which says nothing of its noise; want two or more", ErrCounts, s.Name, s.Total())
		}
	}
	return draws, scale, nil
}

// halves is a random half A of each sample X, so weighted that less rest times
// the sample, in the unit compared, it is noise. Amounts: 2A − X. Shares, with a
// counts in A and b left: √(ab)/n (A/a − (X − A)/b), which has no net mass, also
// where n is odd, and the covariance of X/n. A sample has a random stream of its
// own for each draw.
func halves(samples *graphio.Samples, opt NoiseOptions, draw uint64) (weighted *graphio.Samples, rest []float32) {
	list := make([]graphio.Sample, samples.Len())
	rest = make([]float32, len(list))
	for i := range list {
		s := samples.At(i)
		r := rand.New(rand.NewPCG(opt.Seed^0x6e6f697365, draw<<24^uint64(i)))
		list[i] = half(s, opt.Shares, r)
		unit := 2.0
		rest[i] = 1
		if opt.Shares {
			a := list[i].Total()
			b := s.Total() - a
			unit, rest[i] = 1/math.Sqrt(a*b), float32(math.Sqrt(a/b))
		}
		for k := range list[i].Values {
			list[i].Values[k] *= unit
		}
	}
	weighted, err := graphio.NewSamples(samples.Order(), list)
	if err != nil {
		panic(err) // cannot be: parts of samples that are
	}
	return weighted, rest
}

// half draws half of a sample's counts: exactly so many where balanced, an odd
// one by a coin; else each by a coin.
func half(s graphio.Sample, balanced bool, r *rand.Rand) graphio.Sample {
	h := graphio.Sample{Name: s.Name}
	left := s.Total()
	want := math.Floor(left / 2)
	if left-2*want > 0 && r.Uint64()&1 == 0 {
		want++
	}
	for k, v := range s.Nodes {
		count := s.Values[k]
		var taken float64
		if balanced {
			taken = hypergeometric(r, count, left, want)
			left -= count
			want -= taken
		} else {
			taken = binomialHalf(r, count)
		}
		if taken > 0 {
			h.Nodes, h.Values = append(h.Nodes, v), append(h.Values, taken)
		}
	}
	return h
}

// hypergeometric is how many of count marked among left things are among want
// drawn without replacement. One by one up to some dozens, else by the normal
// approximation, rounded and kept in range: only noise of many counts is drawn
// so, which is normal to within its skewness of 1/√count.
func hypergeometric(r *rand.Rand, count, left, want float64) float64 {
	least, most := max(0, want-(left-count)), min(count, want)
	if least == most {
		return least
	}
	const few = 64
	if count <= few {
		taken := 0.0
		for ; count > 0; count-- {
			if r.Float64()*left < want {
				taken++
				want--
			}
			left--
		}
		return taken
	}
	p := want / left
	mean, variance := count*p, count*p*(1-p)*(left-count)/(left-1)
	return min(max(math.Round(mean+math.Sqrt(variance)*r.NormFloat64()), least), most)
}

// binomialHalf is how many of count coins come up.
func binomialHalf(r *rand.Rand, count float64) float64 {
	const few = 64
	if count <= few {
		mask := r.Uint64() >> (64 - uint(count))
		taken := 0.0
		for ; mask != 0; mask &= mask - 1 {
			taken++
		}
		return taken
	}
	return min(max(math.Round(count/2+math.Sqrt(count)/2*r.NormFloat64()), 0), count)
}

// settle turns sums over draws into what is known of each pair.
func (r *Noise) settle(sum, square []float64, reached []int) {
	draws := float64(r.Draws)
	r.Floor, r.Deviation = like(r.Distance), like(r.Distance)
	r.P = make([]float64, len(sum))
	for k := range sum {
		mean := sum[k] / draws
		r.Floor.Value[k] = mean
		r.Deviation.Value[k] = math.Sqrt(max(0, square[k]-draws*mean*mean) / (draws - 1))
		r.P[k] = float64(reached[k]+1) / (draws + 1)
	}
}

func like(m *pairwise.Matrix) *pairwise.Matrix {
	return &pairwise.Matrix{Names: m.Names, Directed: m.Directed, Value: make([]float64, len(m.Value))}
}

func manhattan(a, b []float32) float64 {
	sum := 0.0
	for k, x := range a {
		sum += math.Abs(float64(x) - float64(b[k]))
	}
	return sum
}

// Needed is how many counts a sample like number i needs for a shift of the
// given distance to be as large as noise between two such samples is in one
// case of twenty: Upper falls with the square root of the counts.
func (r *Noise) Needed(i int, distance float64) float64 {
	u := r.Upper[i] / distance
	return math.Ceil(r.Counts[i] * u * u)
}

// Dispersed is the variance of counts over that of a multinomial, by Pearson's
// χ² over its degrees of freedom, pooled over groups of replicates: samples of
// the same source (McCullagh & Nelder 1989, §4.5). About 1 for plain counts.
// Nodes with less than one count a sample on average say little and are pooled
// within their group. Errors: ErrCounts; ErrDesign without replicates.
func Dispersed(samples *graphio.Samples, replicates Variable) (float64, error) {
	code, names, err := replicates.levels(samples.Len())
	if err != nil {
		return 0, err
	}
	chi, free := 0.0, 0.0
	for g := range names {
		var members []graphio.Sample
		for i, c := range code {
			if int(c) != g {
				continue
			}
			s := samples.At(i)
			if !s.Counts() {
				return 0, fmt.Errorf("%w: sample %q has masses that are no whole numbers", ErrCounts, s.Name)
			}
			members = append(members, s)
		}
		if len(members) < 2 {
			continue
		}
		x, f := pearson(samples.Order(), members)
		chi += x
		free += f
	}
	if free == 0 {
		return 0, fmt.Errorf("%w: no two samples share a label in %q, or they have all counts at one node; want replicates: samples of the same source", ErrDesign, replicates.Name)
	}
	return chi / free, nil
}

// pearson is the χ² of a table of samples by nodes, rare nodes pooled, and its
// degrees of freedom.
func pearson(order int, members []graphio.Sample) (chi, free float64) {
	all := make([]float64, order)
	whole := 0.0
	total := make([]float64, len(members))
	for i, s := range members {
		s.Dense(all, 1)
		total[i] = s.Total()
		whole += total[i]
	}
	kept, rare := 0, 0.0
	column := make([]int, order) // 0 where rare
	for v, x := range all {
		if x >= float64(len(members)) {
			kept++
			column[v] = kept
		} else {
			rare += x
		}
	}
	share := make([]float64, kept+1)
	share[0] = rare / whole
	for v, c := range column {
		if c > 0 {
			share[c] = all[v] / whole
		}
	}
	seen := make([]float64, kept+1)
	for i, s := range members {
		clear(seen)
		for k, v := range s.Nodes {
			seen[column[v]] += s.Values[k]
		}
		for c, p := range share {
			if p > 0 && total[i] > 0 {
				off := seen[c] - total[i]*p
				chi += off * off / (total[i] * p)
			}
		}
	}
	columns := float64(kept)
	if rare == 0 {
		columns--
	}
	return chi, float64(len(members)-1) * columns
}

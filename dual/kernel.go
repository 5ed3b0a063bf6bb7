package dual

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// MMD2 is the squared maximum mean discrepancy of two sets of points from the
// matrix k of a positive-definite kernel over all of them, the first m rows
// being the first set: biased (never negative, in the mean above 0 for equal
// distributions) and unbiased (may be negative). Source: Gretton, Borgwardt,
// Rasch, Schölkopf & Smola 2012, equations 5 and 3. The unbiased value is NaN
// where a set has fewer than two points. Cost: O(rows²).
func MMD2(k mat.Symmetric, m int) (biased, unbiased float64) {
	rows := k.SymmetricDim()
	n := rows - m
	if m <= 0 || n <= 0 {
		panic(fmt.Sprintf("dual: MMD2 of %d points split after %d; want points on both sides", rows, m))
	}
	var xx, yy, xy, xd, yd accumulator
	for i := range rows {
		for j := range rows {
			v := k.At(i, j)
			switch {
			case i == j && i < m:
				xd.add(v)
			case i == j:
				yd.add(v)
			case i < m && j < m:
				xx.add(v)
			case i >= m && j >= m:
				yy.add(v)
			case i < m:
				xy.add(v)
			}
		}
	}
	fm, fn := float64(m), float64(n)
	cross := 2 * xy.value() / (fm * fn)
	biased = (xx.value()+xd.value())/(fm*fm) + (yy.value()+yd.value())/(fn*fn) - cross
	unbiased = math.NaN()
	if m > 1 && n > 1 {
		unbiased = xx.value()/(fm*(fm-1)) + yy.value()/(fn*(fn-1)) - cross
	}
	return biased, unbiased
}

// All stands for the sum over all scales of Features, itself a
// positive-definite kernel.
const All = -1

// Features holds one vector a sample whose squared distances are kernel
// discrepancies of the samples' shares. At scale k the kernel is the heat
// kernel at twice the scale's time t,
//
//	K_t = c̄ H_tᵀ C⁻¹ H_t = c̄ C⁻¹ H_2t
//
// with C the capacities (degrees) of the nodes and c̄ their mean: symmetric,
// because the walk is reversible, and positive definite, because it is a
// square. It has no unit; on a network of equal degrees K_0 = I. Where a scale
// lives on a coarser level, the first form is used there.
type Features struct {
	Scales  []Scale
	Width   int
	Rows    int
	Vectors []float32 // row-major

	counts []float64 // total of each sample, NaN where it holds no counts
	own    []float64 // rows × scales: Σ_v p_v K(v,v); nil unless asked for
}

// Features embeds the samples for kernel discrepancy, at the times t_0, …, t_K
// of the estimator. unbiased also prepares for Features.Unbiased, which needs
// the kernel's diagonal at every node that holds mass: the cost of embedding
// as many further samples as there are such nodes. Otherwise as Embed.
func (m *Multiscale) Features(ctx context.Context, samples *graphio.Samples, unbiased bool, threads int, progress func(done, total int)) (*Features, error) {
	if samples.Order() != m.net.Order() {
		return nil, fmt.Errorf("dual: samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), m.net.Order())
	}
	shares, err := samples.Shares()
	if err != nil {
		return nil, err
	}
	f := &Features{Rows: samples.Len()}
	for _, s := range m.scales[1:] {
		s.Begin, s.End = f.Width, f.Width+s.End-s.Begin
		s.Name, s.Weight, f.Width = fmt.Sprintf("heat at %.3g", 2*s.Time), 1, s.End
		f.Scales = append(f.Scales, s)
	}
	f.Vectors = make([]float32, f.Rows*f.Width)
	for i := range f.Rows {
		s := samples.At(i)
		f.counts = append(f.counts, math.NaN())
		if s.Counts() {
			f.counts[i] = s.Total()
		}
	}
	roots := m.roots()
	panels(ctx, f.Rows, threads, progress, func(p *diffusion.Panel[float32], first, count int) {
		x := p.Input(m.cascade)
		for l := range count {
			m.fill(x, l, shares.At(first+l))
		}
		m.cascade.Scales(p, func(k int, before, _ []float32) {
			if k == 0 {
				return
			}
			root := roots[m.cascade.Schedule.Level[k]]
			for l := range count {
				at := (first+l)*f.Width + f.Scales[k-1].Begin
				for i, r := range root {
					f.Vectors[at+i] = r * before[i*diffusion.Lanes+l]
				}
			}
		})
	})
	if unbiased && ctx.Err() == nil {
		f.own = m.own(ctx, shares, roots, threads)
	}
	return f, ctx.Err()
}

// roots is √(c̄/capacity) for the nodes of each level.
func (m *Multiscale) roots() [][]float32 {
	capacity := m.cascade.Capacity(0)
	mean := 0.0
	for _, c := range capacity {
		mean += c
	}
	mean /= float64(len(capacity))
	roots := make([][]float32, len(m.cascade.Schedule.Levels))
	for level := range roots {
		for _, c := range m.cascade.Capacity(level) {
			roots[level] = append(roots[level], float32(math.Sqrt(mean/c)))
		}
	}
	return roots
}

// own is Σ_v p_v K(v,v) for every sample and scale.
func (m *Multiscale) own(ctx context.Context, shares *graphio.Samples, roots [][]float32, threads int) []float64 {
	used := make([]bool, m.net.Order())
	for i := range shares.Len() {
		for _, v := range shares.At(i).Nodes {
			used[v] = true
		}
	}
	var nodes []int32
	for v, u := range used {
		if u {
			nodes = append(nodes, int32(v))
		}
	}
	scales := len(m.scales) - 1
	diagonal := make([]float64, m.net.Order()*scales)
	panels(ctx, len(nodes), threads, nil, func(p *diffusion.Panel[float32], first, count int) {
		x := p.Input(m.cascade)
		for l := range count {
			x[int(nodes[first+l])*diffusion.Lanes+l] = 1
		}
		m.cascade.Scales(p, func(k int, before, _ []float32) {
			if k == 0 {
				return
			}
			for l := range count {
				sum := 0.0
				for i, r := range roots[m.cascade.Schedule.Level[k]] {
					y := float64(r * before[i*diffusion.Lanes+l])
					sum += float64(y * y)
				}
				diagonal[int(nodes[first+l])*scales+k-1] = sum
			}
		})
	})
	own := make([]float64, shares.Len()*scales)
	for i := range shares.Len() {
		s := shares.At(i)
		for j, v := range s.Nodes {
			for k := range scales {
				own[i*scales+k] += float64(s.Values[j] * diagonal[int(v)*scales+k])
			}
		}
	}
	return own
}

// Biased is MMD² of the shares of samples i and j at one scale (an index of
// Scales) or All: (p-q)ᵀ K (p-q), never negative, 0 for equal shares.
// Cost: O(columns).
func (f *Features) Biased(i, j, scale int) float64 {
	begin, end := f.columns(scale)
	a, b := f.row(i)[begin:end], f.row(j)[begin:end]
	sum := 0.0
	for k := range a {
		d := float64(a[k] - b[k])
		sum += float64(d * d)
	}
	return sum
}

// Unbiased is MMD² of two samples of counts, each unit of mass being one
// observed point, with the mean over pairs of different points (Gretton et al.
// 2012, equation 3); it may be negative. NaN where a sample does not hold
// whole numbers or has fewer than two points, or where Features was not asked
// to prepare for it. Cost: O(columns).
func (f *Features) Unbiased(i, j, scale int) float64 {
	if f.own == nil {
		return math.NaN()
	}
	begin, end := f.columns(scale)
	a, b := f.row(i)[begin:end], f.row(j)[begin:end]
	var aa, bb, ab float64
	for k := range a {
		x, y := float64(a[k]), float64(b[k])
		aa += float64(x * x)
		bb += float64(y * y)
		ab += float64(x * y)
	}
	return f.apart(i, scale, aa) + f.apart(j, scale, bb) - 2*ab
}

// apart is the mean kernel over pairs of different points of a sample, whose
// mean over all pairs is square.
func (f *Features) apart(i, scale int, square float64) float64 {
	n, scales := f.counts[i], len(f.Scales)
	if !(n >= 2) {
		return math.NaN()
	}
	own := 0.0
	for k := range scales {
		if scale == All || scale == k {
			own += f.own[i*scales+k]
		}
	}
	return (n*square - own) / (n - 1)
}

func (f *Features) row(i int) []float32 { return f.Vectors[i*f.Width : (i+1)*f.Width] }

func (f *Features) columns(scale int) (begin, end int) {
	if scale == All {
		return 0, f.Width
	}
	return f.Scales[scale].Begin, f.Scales[scale].End
}

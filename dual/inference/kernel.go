package inference

import (
	"context"
	"fmt"
	"math"
	"slices"

	"example.org/barrow/dual"
	"example.org/barrow/dual/pairwise"
)

// A Kernel compares samples by the squared distance of their images in its
// feature space, k(x,x) + k(y,y) − 2k(x,y): all that discrepancy needs of it.
// The matrix holds these squares.
type Kernel struct {
	Name    string
	Squared *pairwise.Matrix
}

// Gaussian is the kernel exp(−d²/(2 width²)), positive definite where distances
// are Euclidean.
func Gaussian(d *pairwise.Matrix, width float64) Kernel {
	return fromDistances(d, fmt.Sprintf("gaussian %.3g", width), func(v float64) float64 { return math.Exp(-float64(v*v) / (2 * width * width)) })
}

// Laplace is the kernel exp(−d/width), positive definite where distances are of
// negative type (Schoenberg 1938), as L1 distances of embeddings are.
func Laplace(d *pairwise.Matrix, width float64) Kernel {
	return fromDistances(d, fmt.Sprintf("laplace %.3g", width), func(v float64) float64 { return math.Exp(-v / width) })
}

func fromDistances(d *pairwise.Matrix, name string, k func(float64) float64) Kernel {
	squared := &pairwise.Matrix{Names: d.Names, Directed: d.Directed, Value: make([]float64, len(d.Value))}
	for at, v := range d.Value {
		squared.Value[at] = 2 - 2*k(v)
	}
	return Kernel{name, squared}
}

// Widths are the median distance between two samples times ¼, ½, 1, 2 and 4:
// a range of widths to combine where none is known to be right.
func Widths(d *pairwise.Matrix) []float64 {
	all := slices.Sorted(slices.Values(d.Value))
	if len(all) == 0 {
		return nil
	}
	median := (all[(len(all)-1)/2] + all[len(all)/2]) / 2
	return []float64{median / 4, median / 2, median, 2 * median, 4 * median}
}

// HeatKernels are the heat kernels of the network at every scale, which
// compare the mean shares of groups scale by scale.
func HeatKernels(names []string, f *dual.Features) []Kernel {
	var kernels []Kernel
	for k, scale := range f.Scales {
		squared := &pairwise.Matrix{Names: names}
		for i := range names {
			for j := i + 1; j < len(names); j++ {
				squared.Value = append(squared.Value, f.Biased(i, j, k))
			}
		}
		kernels = append(kernels, Kernel{scale.Name, squared})
	}
	return kernels
}

// A KernelTest is a test by several kernels at once: its Statistic is the
// largest, over kernels, of the discrepancy less its mean and divided by its
// deviation over all arrangements.
type KernelTest struct {
	GroupTest
	Kernels []KernelScale
}

// A KernelScale is what one kernel saw.
type KernelScale struct {
	Name string
	// Biased and Unbiased are MMD² of two groups (Gretton et al. 2012, equations
	// 5 and 3); with more groups both are not numbers.
	Biased, Unbiased float64
	// Squares is the sum of squares between groups in feature space, which with
	// two groups is Biased × n₁n₂/(n₁+n₂).
	Squares float64
	// P is of this kernel alone; look at it only after the test's own.
	P float64
}

// MMD tests whether groups have the same distribution by maximum mean
// discrepancy (Gretton, Borgwardt, Rasch, Schölkopf & Smola 2012) under several
// kernels, with one P for all: each kernel's statistic is standardised by its
// mean and deviation over all arrangements, the observed one among them, and
// the largest is compared with the largest of each arrangement. As every
// arrangement is treated alike P keeps its level exactly. It is the single-step
// max-T of Westfall & Young 1993 over kernels; Schrab et al. 2023 study such
// aggregation and its power.
//
// Errors: ErrMatrix, ErrDesign, ErrFew, ErrOption; the context's.
// Cost: O(n²/groups) an arrangement and kernel.
func MMD(ctx context.Context, kernels []Kernel, factor Variable, scheme Scheme, opt Options) (*KernelTest, error) {
	if len(kernels) == 0 {
		return nil, fmt.Errorf("%w: no kernel", ErrOption)
	}
	var parts []*partition
	for _, k := range kernels {
		p, err := cut(k.Squared, factor, func(v float64) float64 { return v })
		if err != nil {
			return nil, fmt.Errorf("kernel %q: %w", k.Name, err)
		}
		parts = append(parts, p)
	}
	first := parts[0]
	for k, p := range parts {
		if !slices.Equal(kernels[k].Squared.Names, kernels[0].Squared.Names) || !slices.Equal(p.code, first.code) {
			return nil, fmt.Errorf("%w: kernels %q and %q are of different samples", ErrMatrix, kernels[0].Name, kernels[k].Name)
		}
	}
	a, err := scheme.arrange(first.t.n, first.code)
	if err != nil {
		return nil, err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return nil, err
	}
	var observed []float64
	var all [][]float64 // by arrangement, the sums of squares within by kernel
	err = j.run(ctx, len(parts), 32, func() evaluation { return spreads(parts) }, func(k int, values []float64) bool {
		if k < 0 {
			observed = slices.Clone(values)
		} else {
			all = append(all, slices.Clone(values))
		}
		return true
	})
	if err != nil {
		return nil, err
	}
	r := &KernelTest{GroupTest: GroupTest{Test: "mmd", Factor: factor.Name}}
	if r.Outcome, err = j.largest(observed, all); err != nil {
		return nil, err
	}
	for k, p := range parts {
		r.Kernels = append(r.Kernels, p.scaleOf(kernels[k].Name, j, k, observed, all))
	}
	r.describe(kernels[0].Squared, first.grouping)
	return r, nil
}

// spreads evaluates, for each kernel, minus the sum of squares within groups:
// the sum between them less a constant.
func spreads(parts []*partition) evaluation {
	var summers []*summer
	cells := len(parts[0].size)
	for _, p := range parts {
		summers = append(summers, newSummer(p.t, p.code, cells, false))
	}
	var sums []float64
	return func(batch [][]int32, out []float64) {
		sums = slices.Grow(sums[:0], len(batch)*cells*cells)[:len(batch)*cells*cells]
		for k, s := range summers {
			s.sum(batch, sums)
			for b := range batch {
				out[b*len(parts)+k] = -parts[k].spread(sums[b*cells*cells:][:cells*cells])
			}
		}
	}
}

// largest standardises each statistic over all arrangements and compares the
// largest of each.
func (j *job) largest(observed []float64, all [][]float64) (Outcome, error) {
	if !j.exact {
		all = append(all, observed) // exact arrangements have it among them
	}
	width := len(observed)
	mean, deviation := make([]float64, width), make([]float64, width)
	for _, values := range all {
		for k, v := range values {
			mean[k] += v / float64(len(all))
		}
	}
	for _, values := range all {
		for k, v := range values {
			deviation[k] += float64((v-mean[k])*(v-mean[k])) / float64(len(all))
		}
	}
	biggest := func(values []float64) float64 {
		most := math.Inf(-1)
		for k, v := range values {
			if deviation[k] > 1e-20*mean[k]*mean[k] {
				most = max(most, (v-mean[k])/math.Sqrt(deviation[k]))
			}
		}
		return most
	}
	if !j.exact {
		all = all[:len(all)-1]
	}
	o := Outcome{Statistic: biggest(observed), Exact: j.exact, Distinct: j.arranger.total, Permutations: len(all)}
	if math.IsInf(o.Statistic, -1) {
		return o, fmt.Errorf("%w: no rearrangement changes any statistic", ErrDesign)
	}
	// Deviations are of order 1, their rounding some 1e-9 where the mean is large.
	threshold := o.Statistic - 1e-8*max(1, math.Abs(o.Statistic))
	for _, values := range all {
		if biggest(values) >= threshold {
			o.Reached++
		}
	}
	o.finish(false)
	return o, nil
}

// scaleOf sums up kernel k.
func (p *partition) scaleOf(name string, j *job, k int, observed []float64, all [][]float64) KernelScale {
	o := Outcome{Exact: j.exact, Permutations: len(all)}
	threshold := observed[k] - tie(observed[k])
	for _, values := range all {
		if values[k] >= threshold {
			o.Reached++
		}
	}
	o.finish(false)
	n := float64(p.t.n)
	s := KernelScale{Name: name, P: o.P, Biased: math.NaN(), Unbiased: math.NaN(), Squares: (p.total/n + observed[k]) * p.scale}
	if len(p.size) == 2 {
		x, y := float64(p.size[0]), float64(p.size[1])
		sums := p.observed()
		xx, yy := sums[0], sums[3]
		cross := (p.total - xx - yy) / (x * y)
		s.Biased = p.scale * (cross - xx/(x*x) - yy/(y*y))
		s.Unbiased = p.scale * (cross - xx/(x*(x-1)) - yy/(y*(y-1)))
	}
	return s
}

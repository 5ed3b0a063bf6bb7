package inference

import (
	"context"
	"fmt"
	"math"
	"slices"

	"example.org/barrow/dual/pairwise"
)

// A Correlation is how two matrices are compared, entry by entry.
type Correlation int

const (
	Pearson  Correlation = iota
	Spearman             // Pearson of ranks, equal values sharing theirs
	Kendall              // tau-b (Kendall 1945), which allows for equal values
)

// A MatrixTest is a test of two matrices.
type MatrixTest struct {
	Test string
	Outcome
	// Caution is what a reader of P must know.
	Caution string
}

const mantelCaution = "tests whether distances go together, not whether their causes do; where samples close in space or time are alike in both matrices, P is too small (Guillot & Rousset 2013)"

// Mantel tests whether two matrices of the same samples go together: the
// correlation of their distances, compared with that after rearranging the
// samples of one (Mantel 1967). Large statistics count: the test is one-sided.
//
// Errors: ErrMatrix, ErrDesign, ErrFew, ErrOption; the context's.
// Cost: n²/2 multiplications an arrangement and 8n² bytes; Kendall n² log n.
func Mantel(ctx context.Context, x, y *pairwise.Matrix, how Correlation, scheme Scheme, opt Options) (*MatrixTest, error) {
	if err := same(x, y); err != nil {
		return nil, err
	}
	r := &MatrixTest{Test: "mantel", Caution: mantelCaution}
	var evaluate func() evaluation
	switch how {
	case Pearson, Spearman:
		a, b := standard(how, x).square(), standard(how, y)
		evaluate = func() evaluation {
			return func(batch [][]int32, out []float64) { crossed(a, b, batch, out) }
		}
	case Kendall:
		evaluate = func() evaluation { return kendallEvaluation(x, y) }
	default:
		return nil, fmt.Errorf("%w: no correlation number %d", ErrOption, how)
	}
	return r, r.run(ctx, len(x.Names), scheme, opt, evaluate)
}

func (r *MatrixTest) run(ctx context.Context, n int, scheme Scheme, opt Options, evaluate func() evaluation) error {
	a, err := scheme.arrange(n, nil)
	if err != nil {
		return err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return err
	}
	r.Outcome, err = j.single(ctx, 16, evaluate)
	return err
}

// PartialMantel is Mantel of x and y with what both share with z taken out: the
// partial correlation of distances, rearranging the samples of x (Smouse, Long
// & Sokal 1986; Legendre 2000, method 1). Kendall is refused.
//
// Errors and cost as Mantel.
func PartialMantel(ctx context.Context, x, y, z *pairwise.Matrix, how Correlation, scheme Scheme, opt Options) (*MatrixTest, error) {
	if err := same(x, y, z); err != nil {
		return nil, err
	}
	if how != Pearson && how != Spearman {
		return nil, fmt.Errorf("%w: a partial correlation by correlation number %d; want Pearson or Spearman", ErrOption, how)
	}
	a, b, c := standard(how, x).square(), standard(how, y), standard(how, z)
	bc := 0.0
	for k := range b.v {
		bc += float64(b.v[k] * c.v[k])
	}
	if 1-bc*bc < 1e-12 {
		return nil, fmt.Errorf("%w: the second and the third matrix are the same up to scale; nothing is left to correlate", ErrDesign)
	}
	r := &MatrixTest{Test: "partial mantel", Caution: mantelCaution + "; taking a third matrix out does not mend it"}
	return r, r.run(ctx, len(x.Names), scheme, opt, func() evaluation {
		var ab, ac []float64
		return func(batch [][]int32, out []float64) {
			ab, ac = slices.Grow(ab[:0], len(batch))[:len(batch)], slices.Grow(ac[:0], len(batch))[:len(batch)]
			crossed(a, b, batch, ab)
			crossed(a, c, batch, ac)
			for k := range batch {
				out[k] = (ab[k] - ac[k]*bc) / math.Sqrt(max(1-ac[k]*ac[k], 1e-300)*(1-bc*bc))
			}
		}
	})
}

// same refuses matrices of different samples, or with nothing to correlate.
func same(list ...*pairwise.Matrix) error {
	for _, d := range list {
		if err := checkMatrix(d, 4); err != nil {
			return err
		}
		if !slices.Equal(d.Names, list[0].Names) {
			return fmt.Errorf("%w: the matrices are not of the same samples in the same order; bring them into one order", ErrMatrix)
		}
		if slices.Min(d.Value) == slices.Max(d.Value) {
			return fmt.Errorf("%w: all distances of a matrix are equal, so nothing can go together with them", ErrDesign)
		}
	}
	return nil
}

// standard is the values, or their ranks, with mean 0 and squares adding up
// to 1: their products add up to the correlation.
func standard(how Correlation, d *pairwise.Matrix) *triangle {
	v := slices.Clone(d.Value)
	if how == Spearman {
		v = ranks(v)
	}
	brought(v)
	square := 0.0
	for k := range v {
		v[k]--
		square += float64(v[k] * v[k])
	}
	for k := range v {
		v[k] /= math.Sqrt(square)
	}
	return &triangle{n: len(d.Names), v: v}
}

// A square is a triangle written out, so that any row can be read at random
// without asking which side of the diagonal an entry is on.
type square struct {
	n int
	v []float64
}

func (t *triangle) square() square {
	s := square{t.n, make([]float64, t.n*t.n)}
	for i := range t.n {
		for k, x := range t.row(i) {
			j := i + 1 + k
			s.v[i*t.n+j], s.v[j*t.n+i] = x, x
		}
	}
	return s
}

// crossed sets out to Σ_{i<j} a(π(i),π(j)) b(i,j), with π the arrangement.
func crossed(a square, b *triangle, batch [][]int32, out []float64) {
	for k, arrangement := range batch {
		out[k] = 0
		for i := range b.n {
			own := a.v[int(arrangement[i])*a.n:][:a.n]
			out[k] += picked(b.row(i), own, arrangement[i+1:])
		}
	}
}

// picked is Σ_k v[k] w[at[k]], in four sums so that none waits for the last.
func picked(v, w []float64, at []int32) float64 {
	at = at[:len(v)]
	var s0, s1, s2, s3 float64
	k := 0
	for ; k+4 <= len(v); k += 4 {
		s0 += float64(v[k] * w[at[k]])
		s1 += float64(v[k+1] * w[at[k+1]])
		s2 += float64(v[k+2] * w[at[k+2]])
		s3 += float64(v[k+3] * w[at[k+3]])
	}
	for ; k < len(v); k++ {
		s0 += float64(v[k] * w[at[k]])
	}
	return (s0 + s1) + (s2 + s3)
}

// kendallEvaluation computes tau-b by sorting and counting inversions (Knight
// 1966): the pairs stand in the order of y, and x is rearranged.
func kendallEvaluation(x, y *pairwise.Matrix) evaluation {
	n := len(x.Names)
	order := ascending(y.Value)
	var first, second []int32 // the samples of each pair, in the order of y
	for i := range n {
		for j := i + 1; j < n; j++ {
			first, second = append(first, int32(i)), append(second, int32(j))
		}
	}
	first, second = reorder(first, order), reorder(second, order)
	ends := runs(reorder(y.Value, order))
	pairs := float64(len(order))
	all := pairs * (pairs - 1) / 2
	tied := func(ends []int) float64 {
		sum, begin := 0.0, 0
		for _, end := range ends {
			sum += float64(end-begin) * float64(end-begin-1) / 2
			begin = end
		}
		return sum
	}
	tiedY, tiedX := tied(ends), tied(runs(slices.Sorted(slices.Values(x.Value))))
	v, spare := make([]float64, len(order)), make([]float64, len(order))
	return func(batch [][]int32, out []float64) {
		for k, arrangement := range batch {
			for at := range v {
				v[at] = x.At(int(arrangement[first[at]]), int(arrangement[second[at]]))
			}
			both, begin := 0.0, 0
			for _, end := range ends { // within equal y, x ascending makes no inversion
				slices.Sort(v[begin:end])
				both += tied(runs(v[begin:end]))
				begin = end
			}
			swaps := inversions(v, spare)
			out[k] = (all - tiedX - tiedY + both - 2*swaps) / math.Sqrt((all-tiedX)*(all-tiedY))
		}
	}
}

func reorder[T any](v []T, order []int32) []T {
	out := make([]T, len(v))
	for k, at := range order {
		out[k] = v[at]
	}
	return out
}

// runs are the ends of the stretches of equal values.
func runs(v []float64) []int {
	var ends []int
	for k := range v {
		if k+1 == len(v) || v[k+1] != v[k] {
			ends = append(ends, k+1)
		}
	}
	return ends
}

// inversions sorts v by merging and counts the pairs that stand the wrong way.
func inversions(v, spare []float64) float64 {
	if len(v) < 2 {
		return 0
	}
	half := len(v) / 2
	count := inversions(v[:half], spare[:half]) + inversions(v[half:], spare[half:])
	a, b := v[:half], v[half:]
	for k := range spare {
		if len(b) == 0 || len(a) > 0 && a[0] <= b[0] {
			spare[k], a = a[0], a[1:]
		} else {
			spare[k], b = b[0], b[1:]
			count += float64(len(a))
		}
	}
	copy(v, spare)
	return count
}

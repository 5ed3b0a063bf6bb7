package inference

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/dual/pairwise"
)

// A Table is an analysis of variance of distances.
type Table struct {
	Terms                   []TermTest // those given first, with P not a number
	Residual                float64
	Total                   float64 // sums of squares
	ResidualFree, TotalFree int     // degrees of freedom
}

// A TermTest is one line of a Table: the pseudo-F of a term is Statistic.
type TermTest struct {
	Term string
	Outcome
	Squares float64
	Free    int     // degrees of freedom
	Share   float64 // of the total sum of squares, R²
}

// PseudoF tests whether a factor tells samples apart: the pseudo-F of Anderson
// 2001, with P from rearrangements. It compares places (centroids) but also
// answers to unequal spread, the more so with unequal groups: see Dispersion.
// It is Model with one term.
func PseudoF(ctx context.Context, d *pairwise.Matrix, factor Variable, scheme Scheme, opt Options) (*GroupTest, error) {
	if err := checkMatrix(d, 4); err != nil {
		return nil, err
	}
	g, err := factor.grouping(len(d.Names))
	if err != nil {
		return nil, err
	}
	table, err := Model(ctx, d, Design{Variables: []Variable{factor}, Terms: []string{factor.Name}}, scheme, opt)
	if err != nil {
		return nil, err
	}
	t := table.Terms[0]
	r := &GroupTest{Test: "pseudo-F", Factor: factor.Name, Outcome: t.Outcome, Share: t.Share}
	r.describe(d, g)
	return r, nil
}

// Model partitions the squared distances among terms (Anderson 2001; McArdle &
// Anderson 2001): with G the matrix −d²/2 centred by rows and columns and H_t
// the projection onto what term t adds to those before it, its sum of squares
// is tr(H_t G), and its pseudo-F compares that, by degrees of freedom, with the
// residual of the whole model. Each term is tested by rearranging the residuals
// of the terms before it (Freedman & Lane 1983; Anderson & ter Braak 2003):
// exact for a term that is first or follows only the blocks within which
// samples are exchanged, close to it otherwise.
//
// Errors: ErrMatrix, ErrDesign, ErrFew, ErrOption; the context's.
// Cost: for labels alone n²/2 additions a term and arrangement, and less for one
// factor; with covariates 2n² rank multiplications.
func Model(ctx context.Context, d *pairwise.Matrix, design Design, scheme Scheme, opt Options) (*Table, error) {
	n := len(d.Names)
	if err := checkMatrix(d, 4); err != nil {
		return nil, err
	}
	c, err := design.columns(n)
	if err != nil {
		return nil, err
	}
	g, scale := gower(d)
	table := &Table{ResidualFree: n - c.rank(), TotalFree: n - 1}
	for i := range n {
		table.Total += g.At(i, i)
	}
	squares := c.squares(g)
	table.Residual = table.Total - total(squares)
	begin := 1
	for k, name := range c.names {
		t := TermTest{Term: name, Free: c.end[k] - begin, Outcome: Outcome{P: math.NaN(), Statistic: math.NaN()}}
		for _, s := range squares[begin:c.end[k]] {
			t.Squares += s
		}
		t.Share = t.Squares / table.Total
		if k >= c.given {
			if t.Outcome, err = c.test(ctx, d, g, k, design, scheme, opt); err != nil {
				return nil, err
			}
		}
		t.Squares *= scale
		table.Terms = append(table.Terms, t)
		begin = c.end[k]
	}
	table.Residual *= scale
	table.Total *= scale
	return table, nil
}

func (c *columns) rank() int {
	_, r := c.q.Dims()
	return r
}

func total(v []float64) float64 {
	sum := 0.0
	for _, x := range v {
		sum += x
	}
	return sum
}

// gower is G = −½ C d² C with C the centring matrix (Gower 1966), of squared
// distances brought to mean 1, and what they were divided by.
func gower(d *pairwise.Matrix) (*mat.SymDense, float64) {
	n := len(d.Names)
	squared := make([]float64, len(d.Value))
	for k, v := range d.Value {
		squared[k] = float64(v * v)
	}
	scale := brought(squared)
	mean := make([]float64, n)
	at := 0
	for i := range n {
		for j := i + 1; j < n; j++ {
			mean[i] += squared[at] / float64(n)
			mean[j] += squared[at] / float64(n)
			at++
		}
	}
	grand := total(mean) / float64(n)
	g := mat.NewSymDense(n, nil)
	at = 0
	for i := range n {
		g.SetSym(i, i, mean[i]-grand/2)
		for j := i + 1; j < n; j++ {
			g.SetSym(i, j, -(squared[at]-mean[i]-mean[j]+grand)/2)
			at++
		}
	}
	return g, scale
}

// squares is q_kᵀ G q_k for each column of the basis.
func (c *columns) squares(g *mat.SymDense) []float64 {
	var gq mat.Dense
	gq.Mul(g, c.q)
	out := make([]float64, c.rank())
	n, _ := c.q.Dims()
	for k := range out {
		for i := range n {
			out[k] += float64(c.q.At(i, k) * gq.At(i, k))
		}
	}
	return out
}

// residual is (I−H) G (I−H) with H the projection onto the first columns.
func (c *columns) residual(g *mat.SymDense, first int) *mat.SymDense {
	n, _ := c.q.Dims()
	q := c.q.Slice(0, n, 0, first)
	var gq, core, half, back mat.Dense
	gq.Mul(g, q)
	core.Mul(q.T(), &gq)
	half.Mul(q, &core)
	half.Scale(0.5, &half)
	gq.Sub(&gq, &half) // G q − ½ q (qᵀGq): the rest is symmetric
	back.Mul(&gq, q.T())
	r := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			r.SetSym(i, j, g.At(i, j)-(back.At(i, j)+back.At(j, i)))
		}
	}
	return r
}

// test rearranges the residuals of the columns before a term's.
func (c *columns) test(ctx context.Context, d *pairwise.Matrix, g *mat.SymDense, term int, design Design, scheme Scheme, opt Options) (Outcome, error) {
	n := len(d.Names)
	begin, end := 1, c.end[term]
	if term > 0 {
		begin = c.end[term-1]
	}
	if err := scheme.moves(design, c.names[term], n); err != nil {
		return Outcome{}, err
	}
	classes := c.code
	if c.cells == n {
		classes = nil
	}
	a, err := scheme.arrange(n, classes)
	if err != nil {
		return Outcome{}, err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return Outcome{}, err
	}
	free, left := float64(end-begin), float64(n-c.rank())
	ratio := func(term, all, trace float64) float64 { return term / free / ((trace - all) / left) }
	switch {
	case len(c.names) == 1 && design.oneFactor():
		return c.oneFactor(ctx, j, d, ratio)
	case c.cells <= max(8, min(64, n/4)):
		return c.byCells(ctx, j, c.residual(g, begin), begin, end, ratio)
	}
	return c.byProducts(ctx, j, c.residual(g, begin), begin, end, ratio)
}

func (d Design) oneFactor() bool {
	v, err := d.variable(d.Terms[0])
	return err == nil && v.Labels != nil
}

// oneFactor needs only the sums of squared distances within groups.
func (c *columns) oneFactor(ctx context.Context, j *job, d *pairwise.Matrix, ratio func(term, all, trace float64) float64) (Outcome, error) {
	t := &triangle{n: len(d.Names), v: make([]float64, len(d.Value))}
	for k, v := range d.Value {
		t.v[k] = float64(v * v)
	}
	brought(t.v)
	size := make([]float64, c.cells)
	for _, code := range c.code {
		size[code]++
	}
	all := float64(len(t.v)) / float64(t.n)
	return j.single(ctx, 32, sumsEvaluation(t, c.code, c.cells, false, func(sums []float64) float64 {
		w := 0.0
		for g, s := range size {
			w += sums[g*c.cells+g] / s
		}
		return ratio(all-w, all-w, all)
	}))
}

// byCells uses that every column of the basis is constant on a cell of the
// design: with u its values, qᵀRq = Σ_ce u_c u_e S_ce.
func (c *columns) byCells(ctx context.Context, j *job, r *mat.SymDense, begin, end int, ratio func(term, all, trace float64) float64) (Outcome, error) {
	n, cells := r.SymmetricDim(), c.cells
	t := &triangle{n: n, diag: make([]float64, n)}
	for i := range n {
		t.diag[i] = r.At(i, i)
		for k := i + 1; k < n; k++ {
			t.v = append(t.v, r.At(i, k))
		}
	}
	u := mat.NewDense(cells, c.rank(), nil)
	for i, code := range c.code {
		u.SetRow(int(code), c.q.RawRowView(i))
	}
	trace := total(t.diag)
	return j.single(ctx, 32, sumsEvaluation(t, c.code, cells, true, func(sums []float64) float64 {
		var term, all float64
		for k := 1; k < c.rank(); k++ {
			square := 0.0
			for x := range cells {
				for y := range cells {
					square += 2 * float64(float64(u.At(x, k)*u.At(y, k))*sums[x*cells+y])
				}
			}
			all += square
			if k >= begin && k < end {
				term += square
			}
		}
		return ratio(term, all, trace)
	}))
}

// byProducts multiplies R with the rearranged bases of a batch side by side.
func (c *columns) byProducts(ctx context.Context, j *job, r *mat.SymDense, begin, end int, ratio func(term, all, trace float64) float64) (Outcome, error) {
	n, rank := r.SymmetricDim(), c.rank()-1 // the constant adds nothing
	full := mat.DenseCopyOf(r)
	trace := mat.Trace(r)
	batch := max(1, 64/rank)
	return j.single(ctx, batch, func() evaluation {
		z, rz := mat.NewDense(n, rank*batch, nil), mat.NewDense(n, rank*batch, nil)
		return func(batch [][]int32, out []float64) {
			z, rz := z.Slice(0, n, 0, rank*len(batch)).(*mat.Dense), rz.Slice(0, n, 0, rank*len(batch)).(*mat.Dense)
			for i := range n {
				to := z.RawRowView(i)
				for b, arrangement := range batch {
					copy(to[b*rank:(b+1)*rank], c.q.RawRowView(int(arrangement[i]))[1:])
				}
			}
			rz.Mul(full, z)
			for b := range batch {
				var term, all float64
				for k := range rank {
					square := 0.0
					for i := range n {
						square += float64(z.At(i, b*rank+k) * rz.At(i, b*rank+k))
					}
					all += square
					if k+1 >= begin && k+1 < end {
						term += square
					}
				}
				out[b] = ratio(term, all, trace)
			}
		}
	})
}

// moves refuses a term that the scheme's rearrangements leave as it is.
func (s Scheme) moves(design Design, term string, n int) error {
	columns, err := design.term(term, n)
	if err != nil {
		return err
	}
	code, _ := cellsOf(columns, n)
	if _, err := s.arrange(n, code); err != nil {
		return fmt.Errorf("term %q: %w", term, err)
	}
	return nil
}

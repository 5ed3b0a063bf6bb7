// Package nulls makes data without any effect, on which tests must be silent:
// for every test and design that package inference offers, a P on simulated
// samples. Tests and benchmarks count how often it is small.
package nulls

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"sync"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/dual"
	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// A Design is a test on one kind of data.
type Design struct {
	Name string
	// Conservative designs have ties, or centres fitted to few samples, so that P
	// may be small less often than the level; others hold it from both sides.
	Conservative bool
	// Note says why a design holds its level only about.
	Note string
	// P simulates data from a seed and tests them.
	P func(seed uint64) (float64, error)
}

// permutations is such that (permutations+1)·level is whole at 5 % and 1 %:
// then a test that is exact is called exactly so often.
const permutations = 199

var ctx = context.Background()

// points are n samples of five numbers from a distribution with heavy tails.
func points(r *rand.Rand, n int) [][]float64 {
	x := make([][]float64, n)
	for i := range x {
		x[i] = make([]float64, 5)
		for k := range x[i] {
			x[i][k] = r.NormFloat64() / math.Sqrt(0.5+r.Float64())
		}
	}
	return x
}

// distances is the L1 matrix of points, rounded to whole numbers where asked.
func distances(x [][]float64, whole bool) *pairwise.Matrix {
	m := &pairwise.Matrix{}
	for i := range x {
		m.Names = append(m.Names, fmt.Sprint(i))
		for j := i + 1; j < len(x); j++ {
			d := 0.0
			for k, a := range x[i] {
				d += math.Abs(a - x[j][k])
			}
			if whole {
				d = math.Ceil(d / 2)
			}
			m.Value = append(m.Value, d)
		}
	}
	return m
}

// factor gives labels in runs of the given sizes.
func factor(name string, sizes ...int) inference.Variable {
	v := inference.Variable{Name: name}
	for g, size := range sizes {
		for range size {
			v.Labels = append(v.Labels, fmt.Sprint(name, g))
		}
	}
	return v
}

// cycle gives n labels in turn.
func cycle(name string, n, levels int) inference.Variable {
	v := inference.Variable{Name: name}
	for i := range n {
		v.Labels = append(v.Labels, fmt.Sprint(name, i%levels))
	}
	return v
}

// addBlocks moves all samples of a block by an amount of its own, which is no
// effect of the factor.
func addBlocks(r *rand.Rand, x [][]float64, blocks []string, size float64) {
	shift := map[string]float64{}
	for i := range x {
		b := blocks[i]
		if _, known := shift[b]; !known {
			shift[b] = size * r.NormFloat64()
		}
		for k := range x[i] {
			x[i][k] += shift[b]
		}
	}
}

// series are points in time order with a memory of some steps: each is 0.7 of
// the one before and some news. A closed one goes round, its first point
// following its last.
func series(r *rand.Rand, n int, closed bool) [][]float64 {
	x := points(r, n)
	rounds := 1
	if closed {
		rounds = 2
	}
	news := points(r, n)
	for k := range rounds * n {
		i := k % n
		before := x[(i+n-1)%n]
		for c := range x[i] {
			x[i][c] = 0.7*before[c] + 0.7*news[i][c]
		}
	}
	return x
}

func options(seed uint64) inference.Options {
	return inference.Options{Permutations: permutations, Seed: seed, Threads: 1, Level: 1}
}

func source(seed, stream uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, stream)) }

// p is the P of a group test, or its error.
func p(t *inference.GroupTest, err error) (float64, error) {
	if err != nil {
		return 0, err
	}
	return t.P, nil
}

// Designs lists every test and design.
func Designs() []Design {
	type groupwise = func(context.Context, *pairwise.Matrix, inference.Variable, inference.Scheme, inference.Options) (*inference.GroupTest, error)
	kernels := func(ctx context.Context, d *pairwise.Matrix, v inference.Variable, s inference.Scheme, o inference.Options) (*inference.GroupTest, error) {
		var list []inference.Kernel
		for _, w := range inference.Widths(d) {
			list = append(list, inference.Laplace(d, w))
		}
		t, err := inference.MMD(ctx, list, v, s, o)
		if err != nil {
			return nil, err
		}
		return &t.GroupTest, nil
	}
	var list []Design
	add := func(name string, conservative bool, f func(r *rand.Rand, o inference.Options) (float64, error)) {
		stream := uint64(len(list) + 1)
		list = append(list, Design{name, conservative, "", func(seed uint64) (float64, error) { return f(source(seed, stream), options(seed)) }})
	}
	for _, t := range []struct {
		name string
		test groupwise
	}{
		{"pseudo-F", inference.PseudoF}, {"energy", inference.Energy}, {"ANOSIM", inference.ANOSIM}, {"MMD over widths", kernels},
		{"dispersion", inference.Dispersion},
	} {
		add(t.name+", 10 and 10", false, func(r *rand.Rand, o inference.Options) (float64, error) {
			return p(t.test(ctx, distances(points(r, 20), false), factor("g", 10, 10), inference.Scheme{}, o))
		})
		add(t.name+", 5, 8 and 17", false, func(r *rand.Rand, o inference.Options) (float64, error) {
			return p(t.test(ctx, distances(points(r, 30), false), factor("g", 5, 8, 17), inference.Scheme{}, o))
		})
		add(t.name+", ties", true, func(r *rand.Rand, o inference.Options) (float64, error) {
			return p(t.test(ctx, distances(points(r, 20), true), factor("g", 8, 12), inference.Scheme{}, o))
		})
		fitted := t.name == "dispersion"
		add(t.name+", blocks of 5", fitted, func(r *rand.Rand, o inference.Options) (float64, error) {
			x, blocks := points(r, 25), factor("b", 5, 5, 5, 5, 5).Labels
			if !fitted { // a shift of blocks is spread to a test of that
				addBlocks(r, x, blocks, 3)
			}
			return p(t.test(ctx, distances(x, false), cycle("g", 25, 5), inference.Scheme{Blocks: blocks}, o))
		})
		add(t.name+", pairs", fitted, func(r *rand.Rand, o inference.Options) (float64, error) {
			x, blocks := points(r, 28), cycle("pair", 28, 14).Labels
			if !fitted {
				addBlocks(r, x, blocks, 3)
			}
			return p(t.test(ctx, distances(x, false), factor("g", 14, 14), inference.Scheme{Blocks: blocks}, o))
		})
		add(t.name+", plots of 3 as a whole", fitted, func(r *rand.Rand, o inference.Options) (float64, error) {
			var plots []string
			for i := range 36 {
				plots = append(plots, fmt.Sprint("plot", i/3))
			}
			x := points(r, 36)
			addBlocks(r, x, plots, 1)
			return p(t.test(ctx, distances(x, false), factor("g", 18, 18), inference.Scheme{Plots: plots}, o))
		})
		add(t.name+", a closed series shifted", true, func(r *rand.Rand, o inference.Options) (float64, error) {
			return p(t.test(ctx, distances(series(r, 240, true), false), factor("g", 120, 120), inference.Scheme{Shift: true}, o))
		})
		add(t.name+", a stretch of a series shifted", true, func(r *rand.Rand, o inference.Options) (float64, error) {
			return p(t.test(ctx, distances(series(r, 240, false), false), factor("g", 120, 120), inference.Scheme{Shift: true}, o))
		})
		list[len(list)-1].Note = "its ends do not join"
	}
	add("model: second factor", false, modelP("b", nil, []string{"a", "b"}))
	add("model: interaction", false, modelP("a:b", nil, []string{"a", "b", "a:b"}))
	add("model: factor after a covariate", false, modelP("a", []string{"age"}, []string{"a"}))
	add("model: covariate", false, modelP("age", nil, []string{"age"}))
	for _, how := range []inference.Correlation{inference.Pearson, inference.Spearman, inference.Kendall} {
		add(fmt.Sprintf("Mantel, %v", [...]string{"Pearson", "Spearman", "Kendall"}[how]), false, func(r *rand.Rand, o inference.Options) (float64, error) {
			t, err := inference.Mantel(ctx, distances(points(r, 14), false), distances(points(r, 14), false), how, inference.Scheme{}, o)
			if err != nil {
				return 0, err
			}
			return t.P, nil
		})
	}
	add("partial Mantel", false, func(r *rand.Rand, o inference.Options) (float64, error) {
		t, err := inference.PartialMantel(ctx, distances(points(r, 20), false), distances(points(r, 20), false), distances(points(r, 20), false), inference.Pearson, inference.Scheme{}, o)
		if err != nil {
			return 0, err
		}
		return t.P, nil
	})
	add("Procrustes", false, func(r *rand.Rand, o inference.Options) (float64, error) {
		t, err := inference.Procrustes(ctx, matrix(points(r, 15)), matrix(points(r, 15)), inference.Scheme{}, o)
		if err != nil {
			return 0, err
		}
		return t.P, nil
	})
	add("where: the smallest of 12 adjusted P", false, func(r *rand.Rand, o inference.Options) (float64, error) {
		f := &inference.Features{}
		for k := range 12 {
			f.Names = append(f.Names, fmt.Sprint("feature", k))
		}
		for range 24 {
			common := r.NormFloat64() // features go together
			for range 12 {
				f.Values = append(f.Values, common+r.NormFloat64())
			}
		}
		w, err := inference.Where(ctx, f, factor("g", 12, 12), inference.Scheme{}, o)
		if err != nil {
			return 0, err
		}
		least := 1.0
		for _, place := range w.Places {
			least = min(least, place.Adjusted)
		}
		return least, nil
	})
	add("group by group, the smallest of 6 by Holm", true, func(r *rand.Rand, o inference.Options) (float64, error) {
		c, err := inference.Pairs(ctx, inference.PseudoF, distances(points(r, 32), false), factor("g", 8, 8, 8, 8), inference.Scheme{}, o)
		if err != nil {
			return 0, err
		}
		least := 1.0
		for _, pair := range c {
			least = min(least, pair.Holm)
		}
		return least, nil
	})
	add("early stopping after 10", true, func(r *rand.Rand, o inference.Options) (float64, error) {
		o.Stop = 10
		return p(inference.Energy(ctx, distances(points(r, 20), false), factor("g", 10, 10), inference.Scheme{}, o))
	})
	add("all rearrangements of 4 and 4", true, func(r *rand.Rand, o inference.Options) (float64, error) {
		return p(inference.PseudoF(ctx, distances(points(r, 8), false), factor("g", 4, 4), inference.Scheme{}, o))
	})
	for _, totals := range [][2]int{{25, 25}, {600, 600}, {60, 240}} {
		add(fmt.Sprintf("noise, %d and %d counts", totals[0], totals[1]), false, func(r *rand.Rand, o inference.Options) (float64, error) {
			return noiseP(r, o, totals)
		})
	}
	return list
}

// street is a small network and what embeds samples on it, made once.
var street = sync.OnceValues(func() (*graphio.Network, *dual.Estimator) {
	net := graphiotest.Road(30, 1)
	terms, err := dual.NewTerms(net, dual.TermOptions{})
	if err != nil {
		panic(err) // cannot be: the network is a good one
	}
	weights := make([]float64, len(terms.Names()))
	for k := range weights {
		weights[k] = 1
	}
	e, err := terms.Weigh(weights)
	if err != nil {
		panic(err)
	}
	return net, e
})

// noiseP is the P of two samples of counts from one source.
func noiseP(r *rand.Rand, o inference.Options, totals [2]int) (float64, error) {
	net, e := street()
	source := graphiotest.Smooth(net, r.Uint64())
	var list []graphio.Sample
	for k, total := range totals {
		s := graphiotest.Counts(source, total, r.Uint64())
		s.Name = fmt.Sprint(k)
		list = append(list, s)
	}
	samples, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		return 0, err
	}
	n, err := inference.Floor(ctx, e, samples, inference.NoiseOptions{Shares: true, Draws: permutations, Seed: o.Seed, Threads: 1})
	if err != nil {
		return 0, err
	}
	return n.P[0], nil
}

// modelP is the P of one term of a model without effects.
func modelP(term string, given, terms []string) func(r *rand.Rand, o inference.Options) (float64, error) {
	return func(r *rand.Rand, o inference.Options) (float64, error) {
		const n = 24
		age := inference.Variable{Name: "age"}
		for range n {
			age.Numbers = append(age.Numbers, r.Float64())
		}
		d := inference.Design{Variables: []inference.Variable{factor("a", 12, 12), cycle("b", n, 3), age}, Given: given, Terms: terms}
		t, err := inference.Model(ctx, distances(points(r, n), false), d, inference.Scheme{}, o)
		if err != nil {
			return 0, err
		}
		for _, line := range t.Terms {
			if line.Term == term {
				return line.P, nil
			}
		}
		return 0, fmt.Errorf("no term %q", term)
	}
}

func matrix(x [][]float64) mat.Matrix {
	m := mat.NewDense(len(x), 2, nil)
	for i, row := range x {
		m.SetRow(i, row[:2])
	}
	return m
}

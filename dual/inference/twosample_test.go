package inference_test

import (
	"math"
	"testing"

	"example.org/barrow/dual/inference"
)

// Three points against four; expected values computed with numpy from the
// formulas of Gretton et al. 2012 and Székely & Rizzo 2013.
func TestTwoSamples(t *testing.T) {
	d := euclidean([][]float64{{0, 0}, {1, 0}, {0, 1}, {2, 2}, {3, 2}, {2, 3}, {3, 3}})
	factor := labels(3, 4)
	e, err := inference.Energy(ctx, d, factor, inference.Scheme{}, inference.Options{})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "energy", e.Statistic, 4.712202224193285, 1e-12)
	if !e.Exact || e.Permutations != 35 || e.Reached != 1 || e.P != 1./35 || e.Error != 0 {
		t.Errorf("energy of 35 splits: %+v", e.Outcome)
	}
	for _, c := range []struct {
		kernel           inference.Kernel
		biased, unbiased float64
	}{
		{inference.Gaussian(d, 1), 1.2901003634226402, 1.0141721779831117},
		{inference.Laplace(d, 1), .9457816571948915, .552785249345994},
	} {
		m, err := inference.MMD(ctx, []inference.Kernel{c.kernel}, factor, inference.Scheme{}, inference.Options{})
		if err != nil {
			t.Fatal(err)
		}
		k := m.Kernels[0]
		near(t, k.Name+" biased", k.Biased, c.biased, 1e-12)
		near(t, k.Name+" unbiased", k.Unbiased, c.unbiased, 1e-12)
		near(t, k.Name+" squares", k.Squares, c.biased*12/7, 1e-12) // n₁n₂/n times it
		if m.P != 1./35 || k.P != 1./35 {
			t.Errorf("%s: P %v, alone %v, want 1/35", k.Name, m.P, k.P)
		}
	}
	near(t, "median distance", inference.Widths(d)[2], math.Sqrt(5), 1e-15)
}

// Efron & Tibshirani 1993, chapter 15: survival of mice (values from memory);
// counts over all 11440 splits by enumeration.
func TestMice(t *testing.T) {
	days := []float64{94, 197, 16, 38, 99, 141, 23, 52, 104, 146, 10, 51, 30, 40, 27, 46}
	factor := labels(7, 9)
	classes := make([]int32, len(days))
	for i := 7; i < 16; i++ {
		classes[i] = 1
	}
	difference := func(arrangement []int32) float64 {
		var a, b float64
		for i, from := range arrangement {
			if classes[from] == 0 {
				a += days[i] / 7
			} else {
				b += days[i] / 9
			}
		}
		return a - b
	}
	opt := inference.Options{Permutations: 20000}
	one, err := inference.Permute(ctx, 16, classes, inference.Scheme{}, opt, difference)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "difference", one.Statistic, 30.63492063, 1e-9)
	if one.Permutations != 11440 || one.Reached != 1613 {
		t.Errorf("one-sided: %+v, want 1613 of 11440", one)
	}
	two, err := inference.Permute(ctx, 16, classes, inference.Scheme{}, opt, func(a []int32) float64 { return math.Abs(difference(a)) })
	if err != nil {
		t.Fatal(err)
	}
	if two.Reached != 3184 {
		t.Errorf("two-sided: %+v, want 3184", two)
	}
	var points [][]float64
	for _, x := range days {
		points = append(points, []float64{x})
	}
	e, err := inference.Energy(ctx, euclidean(points), factor, inference.Scheme{}, opt)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "energy", e.Statistic, 15.83774250440917, 1e-12)
	if e.Reached != 4144 || e.P != 4144./11440 {
		t.Errorf("energy: %+v, want 4144 of 11440", e.Outcome)
	}
}

// Darwin's maize by sign flips (Fisher 1935, §21, from memory): pairs are
// blocks of two that may be swapped; counts by enumeration.
func TestMaize(t *testing.T) {
	eighths := []float64{49, -67, 8, 16, 6, 23, 28, 41, 14, 29, 56, 24, 75, 60, -48}
	var pairs []string
	var classes []int32
	for k := range eighths {
		pairs = append(pairs, string(rune('a'+k)), string(rune('a'+k)))
		classes = append(classes, 0, 1)
	}
	sum := func(arrangement []int32) float64 {
		s := 0.0
		for k, x := range eighths {
			if classes[arrangement[2*k]] == 1 {
				x = -x
			}
			s += x
		}
		return s
	}
	o, err := inference.Permute(ctx, 30, classes, inference.Scheme{Blocks: pairs}, inference.Options{Permutations: 40000}, sum)
	if err != nil {
		t.Fatal(err)
	}
	if o.Statistic != 314 || o.Permutations != 32768 || o.Reached != 863 {
		t.Errorf("%+v, want a sum of 314 that 863 of 32768 reach", o)
	}
	more, err := inference.Permute(ctx, 30, classes, inference.Scheme{Blocks: pairs}, inference.Options{Permutations: 40000}, func(a []int32) float64 {
		if s := sum(a); s > 314 || a[0] == 0 && a[2] == 2 && s == 314 && identical(a) {
			return 1
		}
		return 0
	})
	if err != nil {
		t.Fatal(err)
	}
	if more.Reached != 835+1 { // the observed one, and those above it
		t.Errorf("above: %d, want 835", more.Reached-1)
	}
}

func identical(arrangement []int32) bool {
	for i, from := range arrangement {
		if int(from) != i {
			return false
		}
	}
	return true
}

// By hand: {0,1} against {3} under exp(−d²/2): 3/2 + e^−½/2 − e^−4.5 − e^−2; here
// with each point twice, which leaves the biased value as it is.
func TestBiasedByHand(t *testing.T) {
	d := euclidean([][]float64{{0}, {1}, {0}, {1}, {3}, {3}})
	m, err := inference.MMD(ctx, []inference.Kernel{inference.Gaussian(d, 1)}, labels(4, 2), inference.Scheme{}, lenient(99))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "biased", m.Kernels[0].Biased, 1.6568210500814615, 1e-13)
}

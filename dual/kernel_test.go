package dual

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func relative(t *testing.T, name string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s is %.16g, want %.16g", name, got, want)
	}
}

func gram(points [][2]float64, kernel func(d float64) float64) mat.Symmetric {
	k := mat.NewSymDense(len(points), nil)
	for i, a := range points {
		for j, b := range points[:i+1] {
			k.SetSym(i, j, kernel(math.Hypot(a[0]-b[0], a[1]-b[1])))
		}
	}
	return k
}

// Values computed with numpy from the formulas of Gretton et al. 2012; the
// last by hand: 3/2 + e^{-1/2}/2 - e^{-4.5} - e^{-2}. The energy distance is
// twice MMD² with the kernel ½(d(x,o) + d(y,o) - d(x,y)) (Sejdinovic et al.
// 2013).
func TestMMD2(t *testing.T) {
	points := [][2]float64{{0, 0}, {1, 0}, {0, 1}, {2, 2}, {3, 2}, {2, 3}, {3, 3}}
	gauss := func(d float64) float64 { return math.Exp(-d * d / 2) }
	biased, unbiased := MMD2(gram(points, gauss), 3)
	relative(t, "Gaussian, biased", biased, 1.2901003634226402, 1e-10)
	relative(t, "Gaussian, unbiased", unbiased, 1.0141721779831117, 1e-10)
	biased, unbiased = MMD2(gram(points, func(d float64) float64 { return math.Exp(-d) }), 3)
	relative(t, "Laplace, biased", biased, .9457816571948915, 1e-10)
	relative(t, "Laplace, unbiased", unbiased, .552785249345994, 1e-10)
	biased, unbiased = MMD2(gram([][2]float64{{0, 0}, {1, 0}, {3, 0}}, gauss), 2)
	relative(t, "three points, biased", biased, 1.6568210500814615, 1e-10)
	if !math.IsNaN(unbiased) {
		t.Errorf("unbiased with one point is %v, want NaN", unbiased)
	}
	k := mat.NewSymDense(len(points), nil)
	for i, a := range points {
		for j, b := range points[:i+1] {
			k.SetSym(i, j, (math.Hypot(a[0], a[1])+math.Hypot(b[0], b[1])-math.Hypot(a[0]-b[0], a[1]-b[1]))/2)
		}
	}
	biased, _ = MMD2(k, 3)
	relative(t, "energy distance", 2*biased, 4.712202224193285, 1e-10)
}

// Features against the matrix form: the kernel c̄ C⁻¹ H_2t among all observed
// points, one row a unit of count.
func TestFeaturesAgainstMatrix(t *testing.T) {
	for _, c := range graphiotest.Cases() {
		if c.Net.Order() > 40 {
			continue
		}
		var counts []graphio.Sample
		for i := range uint64(3) {
			counts = append(counts, graphiotest.Counts(graphiotest.Smooth(c.Net, i), 12+int(i), i))
		}
		m := estimator(t, c.Net, Options{Full: true, Tolerance: 1e-9})
		f, err := m.Features(context.Background(), graphiotest.Samples(c.Net, counts...), true, 0, nil)
		if err != nil {
			t.Fatal(err)
		}
		var sumBiased, sumUnbiased float64
		for k, s := range f.Scales {
			biased, unbiased := MMD2(points(t, c.Net, 2*s.Time, m.cascade.Schedule.Times[k], counts[0], counts[1]))
			sumBiased, sumUnbiased = sumBiased+biased, sumUnbiased+unbiased
			if got := f.Biased(0, 1, k); math.Abs(got-biased) > 1e-5 {
				t.Errorf("%s, %s: biased %g, matrix form %g", c.Name, s.Name, got, biased)
			}
			if got := f.Unbiased(0, 1, k); math.Abs(got-unbiased) > 1e-5 {
				t.Errorf("%s, %s: unbiased %g, matrix form %g", c.Name, s.Name, got, unbiased)
			}
		}
		if got := f.Biased(0, 1, All); math.Abs(got-sumBiased) > 1e-4 {
			t.Errorf("%s: biased over all %g, matrix form %g", c.Name, got, sumBiased)
		}
		if got := f.Unbiased(0, 1, All); math.Abs(got-sumUnbiased) > 1e-4 {
			t.Errorf("%s: unbiased over all %g, matrix form %g", c.Name, got, sumUnbiased)
		}
		if f.Biased(2, 2, All) != 0 || f.Biased(1, 2, All) != f.Biased(2, 1, All) {
			t.Errorf("%s: discrepancy is no distance", c.Name)
		}
	}
}

// points is the kernel matrix of all points of two samples of counts, and the
// number of points of the first.
func points(t *testing.T, net *graphio.Network, twice, time float64, p, q graphio.Sample) (mat.Symmetric, int) {
	t.Helper()
	if twice != 2*time {
		t.Fatalf("kernel time %g for a scale at %g", twice, time)
	}
	n := net.Order()
	one := mat.NewDense(n, n, nil)
	for v := range n {
		one.Set(v, v, 1)
	}
	walk := diffusion.NewWalk(net)
	h, err := walk.Heat(one, []float64{twice}, diffusion.HeatOptions{})
	if err != nil {
		t.Fatal(err)
	}
	mean := 0.0
	for _, c := range walk.Capacity() {
		mean += c / float64(n)
	}
	var at []int
	for _, s := range []graphio.Sample{p, q} {
		for i, v := range s.Nodes {
			for range int(s.Values[i]) {
				at = append(at, int(v))
			}
		}
	}
	k := mat.NewSymDense(len(at), nil)
	for i, u := range at {
		for j, v := range at[:i+1] {
			k.SetSym(i, j, mean*h[0].At(u, v)/walk.Capacity()[u])
		}
	}
	return k, int(p.Total())
}

func TestFeaturesRefuse(t *testing.T) {
	net := graphiotest.Road(100, 1)
	m := estimator(t, net, Options{})
	f, err := m.Features(context.Background(), graphiotest.Samples(net, graphiotest.Smooth(net, 1), graphiotest.Sparse(net, 5, 1)), false, 0, nil)
	if err != nil {
		t.Fatal(err)
	}
	if x := f.Unbiased(0, 1, All); !math.IsNaN(x) {
		t.Errorf("unbiased without its preparation is %v, want NaN", x)
	}
	empty := graphiotest.Samples(net, graphiotest.Point(1), graphio.Sample{})
	if _, err := m.Features(context.Background(), empty, false, 0, nil); err == nil {
		t.Error("a sample without mass has features")
	}
}

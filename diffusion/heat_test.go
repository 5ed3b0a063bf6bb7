package diffusion

import (
	"encoding/csv"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/graphio/graphiotest"
)

// Closed forms are textbook (Chung 1997, Spectral Graph Theory, from memory),
// their digits computed with mpmath 1.2.1 at 40 digits. Chebyshev heat is held
// to 1e-12, tighter than the 1e-10 usual for it.
const digits = 1e-12

// plain is the walk whose L is D - A: every node has capacity 1.
func plain(n int, edges [][2]int) *Walk {
	ones := make([]float64, n)
	for i := range ones {
		ones[i] = 1
	}
	return newWalk(unit(n, edges), ones)
}

func unit(n int, edges [][2]int) *CSR {
	var list []link
	for _, e := range edges {
		list = append(list, link{int32(min(e[0], e[1])), int32(max(e[0], e[1])), 1})
	}
	return symmetric(n, list)
}

func randomWalk(n int, edges [][2]int) *Walk { return newWalk(unit(n, edges), nil) }

func path(n int) (edges [][2]int) {
	for v := 1; v < n; v++ {
		edges = append(edges, [2]int{v - 1, v})
	}
	return edges
}

func cycle(n int) [][2]int { return append(path(n), [2]int{n - 1, 0}) }

func complete(n int) (edges [][2]int) {
	for u := range n {
		for v := range u {
			edges = append(edges, [2]int{u, v})
		}
	}
	return edges
}

func cube() (edges [][2]int) {
	for u := range 8 {
		for bit := 1; bit < 8; bit *= 2 {
			if u&bit == 0 {
				edges = append(edges, [2]int{u, u | bit})
			}
		}
	}
	return edges
}

func star(leaves int) (edges [][2]int) {
	for v := 1; v <= leaves; v++ {
		edges = append(edges, [2]int{0, v})
	}
	return edges
}

func petersen() (edges [][2]int) {
	for v := range 5 {
		edges = append(edges, [2]int{v, (v + 1) % 5}, [2]int{v, v + 5}, [2]int{v + 5, (v+2)%5 + 5})
	}
	return edges
}

func table(t *testing.T, name string) [][]string {
	t.Helper()
	f, err := os.Open("../testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil || len(rows) < 2 {
		t.Fatalf("%s: %d rows, %v", name, len(rows), err)
	}
	return rows[1:]
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

func karate(t *testing.T) (edges [][2]int) {
	for _, row := range table(t, "karate_edges.csv") {
		edges = append(edges, [2]int{int(number(t, row[0])), int(number(t, row[1]))})
	}
	return edges
}

func identity(n int) *mat.Dense {
	x := mat.NewDense(n, n, nil)
	for i := range n {
		x.Set(i, i, 1)
	}
	return x
}

// kernel is exp(-tL) as a matrix: column i is the mass started at i.
func kernel(t *testing.T, w *Walk, time float64) *mat.Dense {
	t.Helper()
	h, err := w.Heat(identity(w.Order()), []float64{time}, HeatOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return h[0]
}

func want(t *testing.T, name string, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= digits) {
		t.Errorf("%s is %.17g, want %.17g", name, got, want)
	}
}

func TestClosedForms(t *testing.T) {
	for _, c := range []struct {
		name  string
		walk  *Walk
		time  float64
		start int
		want  map[int]float64 // by node
	}{
		{"path 5", plain(5, path(5)), 0.7, 0, map[int]float64{0: .6015701407227451, 1: .2894168055505838, 2: .08682445402633481, 3: .018677341503988, 4: .00351125819634831}},
		{"cycle 6", plain(6, cycle(6)), 0.7, 0, map[int]float64{0: .3831489211190001, 1: .2188864688188683, 2: .07362805509680442, 3: .03182203104965447, 5: .2188864688188683}},
		{"cycle 101", plain(101, cycle(101)), 1, 7, map[int]float64{7: .308508322553671, 8: .2152692892489377, 5: .09323903330473338, 10: .0287912226394709}},
		{"K5", plain(5, complete(5)), 0.3, 2, map[int]float64{2: .3785041281187439, 0: .155373967970314}},
		{"cube", plain(8, cube()), 0.5, 0, map[int]float64{0: .3199289051990036, 4: .1478446361958707, 6: .06832154299497612, 7: .0315725572284559}},
		{"star from hub", plain(5, star(4)), 0.4, 0, map[int]float64{0: .3082682265892902, 3: .1729329433526775}},
		{"star from leaf", plain(5, star(4)), 0.4, 2, map[int]float64{0: .1729329433526775, 2: .7095067986885601, 4: .03918675265292081}},
		{"Petersen", plain(10, petersen()), 0.25, 0, map[int]float64{0: .5178672486003928, 1: .1246871641227215, 5: .1246871641227215, 2: .01801187650524044, 7: .01801187650524044}},
		{"walk, path 5 from the end", randomWalk(5, path(5)), 0.7, 0, map[int]float64{0: .5593055321298977, 1: .369340094484046, 2: .06335658908969686, 3: .00736142354515079, 4: .0006363607512086991}},
		{"walk, path 5 from the middle", randomWalk(5, path(5)), 0.7, 2, map[int]float64{0: .03167829454484843, 1: .1883507590145984, 2: .5599418928811064, 3: .1883507590145984, 4: .03167829454484843}},
		{"walk, star from hub", randomWalk(5, star(4)), 0.4, 0, map[int]float64{0: .7246644820586108, 1: .0688338794853473}},
		{"walk, star from leaf", randomWalk(5, star(4)), 0.4, 3, map[int]float64{0: .2753355179413892, 3: .6839061550413822, 1: .01358610900574287}},
	} {
		h := kernel(t, c.walk, c.time)
		for v, x := range c.want {
			want(t, fmt.Sprintf("%s: %d to %d", c.name, c.start, v), h.At(v, c.start), x)
		}
	}
}

// On a network of equal degrees d the walk at time d t is D - A at time t.
func TestEqualDegrees(t *testing.T) {
	for _, c := range []struct {
		name   string
		n      int
		edges  [][2]int
		degree float64
	}{
		{"cycle", 9, cycle(9), 2}, {"K6", 6, complete(6), 5}, {"cube", 8, cube(), 3}, {"Petersen", 10, petersen(), 3},
	} {
		a, b := kernel(t, randomWalk(c.n, c.edges), c.degree*0.6), kernel(t, plain(c.n, c.edges), 0.6)
		if !mat.EqualApprox(a, b, digits) {
			t.Errorf("%s: the walk at %g differs from D - A at 0.6", c.name, c.degree*0.6)
		}
	}
}

// Values of karate_heat.csv: mpmath, see testdata/README.md. Trace and single
// entries: the same source.
func TestKarate(t *testing.T) {
	edges := karate(t)
	walks := map[string]*Walk{"comb": plain(34, edges), "rw": randomWalk(34, edges)}
	kernels := map[string]*mat.Dense{}
	rows := table(t, "karate_heat.csv")
	for _, row := range rows {
		key := row[0] + " at " + row[1]
		if kernels[key] == nil {
			kernels[key] = kernel(t, walks[row[0]], number(t, row[1]))
		}
		from, to := int(number(t, row[2])), int(number(t, row[3]))
		want(t, fmt.Sprintf("%s: %d to %d", key, from, to), kernels[key].At(to, from), number(t, row[4]))
	}
	h := kernels["comb at 1"]
	want(t, "H00", h.At(0, 0), .04144233020899968)
	want(t, "H0,33", h.At(0, 33), .01946149075699203)
	want(t, "trace", mat.Trace(h), 4.372763715151423)
}

// e^{-a} I_k(a): bessel_scaled.csv, mpmath, see testdata/README.md. The same
// at a = 1 and 10: Abramowitz & Stegun 1964, table 9.8 (from memory).
func TestScaledBessel(t *testing.T) {
	rows := table(t, "bessel_scaled.csv")
	for _, row := range rows {
		a, k, x := number(t, row[0]), int(number(t, row[1])), number(t, row[2])
		got := scaledBessel(a, start(a, 1e-300))[k]
		if math.Abs(got-x) > 1e-13*x+1e-290 {
			t.Errorf("a = %g, k = %d: %g, want %g", a, k, got, x)
		}
	}
	for _, c := range []struct{ a, c0, c1 float64 }{{1, .46575960759, .20791041535}, {10, .12783333716, .12126268138}} {
		got := scaledBessel(c.a, start(c.a, 1e-30))
		if math.Abs(got[0]-c.c0) > 1e-11 || math.Abs(got[1]-c.c1) > 1e-11 {
			t.Errorf("a = %g: %v, want %g and %g", c.a, got[:2], c.c0, c.c1)
		}
	}
}

// Coefficients, sums and degrees: DLMF §10.35 (from memory), digits mpmath.
func TestChebyshevSeries(t *testing.T) {
	got := chebyshev(1, 1e-16)
	for k, x := range []float64{.4657596075936404, .4158208306994169, .09987755378844708, .01631061554562859, .002013860514675552} {
		want(t, fmt.Sprintf("c_%d at a = 1", k), got[k], x)
	}
	for a, degree := range map[float64]int{0.5: 9, 1: 11, 5: 19, 20: 34, 100: 73} {
		if got := len(chebyshev(a, 1e-12)) - 1; got != degree {
			t.Errorf("a = %g: degree %d for a tail of 1e-12, want %d", a, got, degree)
		}
	}
	for _, a := range []float64{0, 1e-300, 1e-12, 1e-9, 1e-3, 0.5, 3, 700, 1e5, 1e7} {
		sum, alternating, sign := 0.0, 0.0, 1.0
		for _, c := range chebyshev(a, 1e-15) {
			sum, alternating, sign = sum+c, alternating+sign*c, -sign
		}
		if math.Abs(sum-1) > 1e-13 || math.Abs(alternating-math.Exp(-2*a)) > 1e-13 {
			t.Errorf("a = %g: the series is %.17g at 1 and %g at -1, want 1 and e^-2a", a, sum, alternating)
		}
	}
}

// The truncation error stays below the tolerance asked for, in the 2-norm
// weighted by 1/capacity.
func TestToleranceBoundsError(t *testing.T) {
	for _, c := range graphiotest.Cases() {
		w := NewWalk(c.Net)
		x := randomBlock(w.Order(), 3)
		exact, err := w.Heat(x, []float64{0.5, 40}, HeatOptions{})
		if err != nil {
			t.Fatal(err)
		}
		for _, tol := range []float64{1e-2, 1e-5, 1e-9} {
			rough, err := w.Heat(x, []float64{0.5, 40}, HeatOptions{Tolerance: tol})
			if err != nil {
				t.Fatal(err)
			}
			for i := range exact {
				for j := range 3 {
					var off, norm float64
					for v, capacity := range w.capacity {
						off += math.Pow(rough[i].At(v, j)-exact[i].At(v, j), 2) / capacity
						norm += math.Pow(x.At(v, j), 2) / capacity
					}
					if math.Sqrt(off) > tol*math.Sqrt(norm)+1e-12*math.Sqrt(norm) {
						t.Errorf("%s: off by %g of the norm at tolerance %g", c.Name, math.Sqrt(off/norm), tol)
					}
				}
			}
		}
	}
}

func randomBlock(rows, cols int) *mat.Dense {
	rng := rand.New(rand.NewPCG(7, uint64(rows)))
	x := mat.NewDense(rows, cols, nil)
	for i := range rows {
		for j := range cols {
			x.Set(i, j, rng.ExpFloat64())
		}
	}
	return x
}

// Mass is kept, nothing turns negative, H(.3) H(.4) = H(.7), the limit is the
// equilibrium, and H C is symmetric.
func TestKernelLaws(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		w := NewWalk(c.Net)
		n := w.Order()
		h := kernel(t, w, 0.7)
		for i := range n {
			sum := 0.0
			for v := range n {
				if h.At(v, i) < -digits {
					t.Errorf("%s: mass %g at %d", c.Name, h.At(v, i), v)
				}
				sum += h.At(v, i)
				if math.Abs(h.At(v, i)*w.capacity[i]-h.At(i, v)*w.capacity[v]) > digits*max(w.capacity[i], w.capacity[v]) {
					t.Errorf("%s: H C is not symmetric at %d, %d", c.Name, v, i)
				}
			}
			want(t, c.Name+": mass", sum, 1)
		}
		var product mat.Dense
		product.Mul(kernel(t, w, 0.3), kernel(t, w, 0.4))
		if !mat.EqualApprox(&product, h, digits) {
			t.Errorf("%s: H(.3) H(.4) is not H(.7)", c.Name)
		}
	}
}

// Limit: 1/n for D - A, degree/Σdegree for the walk (Chung 1997, from memory).
func TestLimit(t *testing.T) {
	edges := karate(t)
	for v := range 34 {
		want(t, "D - A", kernel(t, plain(34, edges), 200).At(v, 0), 1/34.)
		want(t, "walk", kernel(t, randomWalk(34, edges), 400).At(v, 0), randomWalk(34, edges).capacity[v]/156)
	}
}

// A node without edges keeps its mass, and components do not mix.
func TestComponents(t *testing.T) {
	w := randomWalk(6, [][2]int{{0, 1}, {3, 4}, {4, 5}})
	h := kernel(t, w, 50)
	want(t, "alone", h.At(2, 2), 1)
	want(t, "pair", h.At(0, 1), 0.5)
	want(t, "path of three", h.At(4, 3), 0.5)
	want(t, "across", h.At(0, 3), 0)
	nothing := kernel(t, randomWalk(3, nil), 9)
	if !mat.Equal(nothing, identity(3)) {
		t.Error("a network without edges moved mass")
	}
}

// The dense exponential of gonum is the slow twin.
func TestAgainstDenseExponential(t *testing.T) {
	for _, c := range graphiotest.Cases() {
		w := NewWalk(c.Net)
		l := w.Laplacian()
		for _, time := range []float64{0, 0.01, 1, 33} {
			var scaled, slow mat.Dense
			scaled.Scale(-time, l)
			slow.Exp(&scaled)
			if h := kernel(t, w, time); !mat.EqualApprox(h, &slow, 1e-11) {
				t.Errorf("%s at %g: heat differs from the dense exponential", c.Name, time)
			}
		}
	}
}

func TestHeatDoesNotDependOnThreadsOrCompany(t *testing.T) {
	w := NewWalk(graphiotest.Cases()[len(graphiotest.Cases())-1].Net)
	x := randomBlock(w.Order(), 2*lanes+5)
	keep := mat.DenseCopyOf(x)
	times := []float64{9, 0, 0.5}
	one, err := w.Heat(x, times, HeatOptions{Threads: 1})
	if err != nil {
		t.Fatal(err)
	}
	many, err := w.Heat(x, times, HeatOptions{Threads: 7})
	if err != nil {
		t.Fatal(err)
	}
	alone, err := w.Heat(x, times[:1], HeatOptions{})
	if err != nil {
		t.Fatal(err)
	}
	for i := range times {
		if !mat.Equal(one[i], many[i]) {
			t.Errorf("time %g depends on the number of threads", times[i])
		}
	}
	if !mat.Equal(alone[0], one[0]) {
		t.Error("a time depends on what other times are asked for")
	}
	if !mat.Equal(x, keep) || !mat.Equal(one[1], x) {
		t.Error("heat changed its input, or time 0 does")
	}
}

func TestHeatRefuses(t *testing.T) {
	w := randomWalk(3, path(3))
	for name, call := range map[string]func() error{
		"shape":     func() error { _, err := w.Heat(identity(4), []float64{1}, HeatOptions{}); return err },
		"negative":  func() error { _, err := w.Heat(identity(3), []float64{-1}, HeatOptions{}); return err },
		"NaN":       func() error { _, err := w.Heat(identity(3), []float64{math.NaN()}, HeatOptions{}); return err },
		"infinite":  func() error { _, err := w.Heat(identity(3), []float64{math.Inf(1)}, HeatOptions{}); return err },
		"tolerance": func() error { _, err := w.Heat(identity(3), []float64{1}, HeatOptions{Tolerance: 2}); return err },
	} {
		if call() == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

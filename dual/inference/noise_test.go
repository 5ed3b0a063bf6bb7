package inference_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"example.org/barrow/dual"
	"example.org/barrow/dual/inference"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func estimator(t testing.TB, net *graphio.Network) *dual.Estimator {
	t.Helper()
	terms, err := dual.NewTerms(net, dual.TermOptions{})
	if err != nil {
		t.Fatal(err)
	}
	weights := make([]float64, len(terms.Names()))
	for k := range weights {
		weights[k] = 1
	}
	e, err := terms.Weigh(weights)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// twins draws pairs of samples, each two from one source of their own: pair k
// is samples 2k and 2k+1. totals are those of the two.
func twins(t testing.TB, net *graphio.Network, pairs int, totals [2]int, seed uint64) *graphio.Samples {
	t.Helper()
	var list []graphio.Sample
	for k := range pairs {
		source := graphiotest.Smooth(net, seed+uint64(k))
		for half, total := range totals {
			s := graphiotest.Counts(source, total, seed+uint64(7919*k+half))
			s.Name = fmt.Sprintf("%d-%d", k, half)
			list = append(list, s)
		}
	}
	samples, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		t.Fatal(err)
	}
	return samples
}

// limits are the 99 % interval of a binomial count, by gonum's distribution.
func limits(n int, p float64) (low, high int) { return limitsAt(n, p, 0.01) }

func limitsAt(n int, p, outside float64) (low, high int) {
	b := distuv.Binomial{N: float64(n), P: p}
	for b.CDF(float64(low)) < outside/2 {
		low++
	}
	for high = low; b.CDF(float64(high)) < 1-outside/2; high++ {
	}
	return low, high
}

// Two samples of one source differ by noise alone: P is uniform, so that at a
// level of 5 % one pair in twenty is called different, within the 99 % binomial
// interval; few counts and many, equal totals and not.
func TestNoiseKeepsItsLevel(t *testing.T) {
	net := graphiotest.Road(60, 2)
	e := estimator(t, net)
	const pairs = 150
	for seed, totals := range [][2]int{{20, 20}, {300, 300}, {40000, 40000}, {60, 240}} {
		samples := twins(t, net, pairs, totals, uint64(100+seed))
		r, err := inference.Floor(ctx, e, samples, inference.NoiseOptions{Shares: true, Draws: 99, Seed: 5})
		if err != nil {
			t.Fatal(err)
		}
		called, excess := 0, 0.0
		for k := range pairs {
			at := r.Distance.Index(2*k, 2*k+1)
			if r.P[at] <= 0.05 {
				called++
			}
			excess += (r.Distance.Value[at]/r.Floor.Value[at] - 1) / pairs
		}
		if low, high := limits(pairs, 0.05); called < low || called > high {
			t.Errorf("totals %v: %d of %d null pairs called different at 5 %%, want %d to %d", totals, called, pairs, low, high)
		}
		// The floor is the mean distance of such pairs.
		if math.Abs(excess) > 0.06 {
			t.Errorf("totals %v: null pairs lie %+.1f %% off their floor on average", totals, 100*excess)
		}
	}
}

// A shift that counting cannot explain is seen, and its size is right: distance
// and floor add up about as squares of independent parts do.
func TestNoiseSeesAShift(t *testing.T) {
	net := graphiotest.Road(200, 3)
	e := estimator(t, net)
	a, b := graphiotest.Smooth(net, 1), graphiotest.Smooth(net, 2)
	p, q := graphiotest.Counts(a, 5000, 1), graphiotest.Counts(b, 5000, 2)
	p.Name, q.Name = "p", "q"
	samples, err := graphio.NewSamples(net.Order(), []graphio.Sample{p, q})
	if err != nil {
		t.Fatal(err)
	}
	r, err := inference.Floor(ctx, e, samples, inference.NoiseOptions{Shares: true, Draws: 99})
	if err != nil {
		t.Fatal(err)
	}
	if r.P[0] != 0.01 || r.Distance.Value[0] < 3*r.Floor.Value[0] {
		t.Errorf("distance %v over a floor of %v, P %v", r.Distance.Value[0], r.Floor.Value[0], r.P[0])
	}
	// With a quarter of the counts noise is twice as large.
	few, err := graphio.NewSamples(net.Order(), []graphio.Sample{graphiotest.Counts(a, 1250, 3), renamed(graphiotest.Counts(b, 1250, 4), "q")})
	if err != nil {
		t.Fatal(err)
	}
	f, err := inference.Floor(ctx, e, few, inference.NoiseOptions{Shares: true, Draws: 99})
	if err != nil {
		t.Fatal(err)
	}
	if ratio := f.Floor.Value[0] / r.Floor.Value[0]; math.Abs(ratio-2) > 0.2 {
		t.Errorf("a quarter of the counts makes noise %v times as large, want 2", ratio)
	}
	if ratio := r.Needed(0, r.Upper[0]/3) / 5000; math.Abs(ratio-9) > 1e-3 {
		t.Errorf("a third of the noise needs %v times the counts, want 9", ratio)
	}
	// Over-dispersed counts have larger noise by the root of it.
	wide, err := inference.Floor(ctx, e, samples, inference.NoiseOptions{Shares: true, Draws: 99, Dispersion: 4})
	if err != nil {
		t.Fatal(err)
	}
	if ratio := wide.Floor.Value[0] / r.Floor.Value[0]; math.Abs(ratio-2) > 1e-4 {
		t.Errorf("a dispersion of 4 makes noise %v times as large, want 2", ratio)
	}
}

func renamed(s graphio.Sample, name string) graphio.Sample {
	s.Name = name
	return s
}

func TestNoiseDoesNotDependOnThreads(t *testing.T) {
	net := graphiotest.Road(100, 4)
	e := estimator(t, net)
	samples := twins(t, net, 5, [2]int{50, 70}, 9)
	var first *inference.Noise
	for _, threads := range []int{1, 3} {
		r, err := inference.Floor(ctx, e, samples, inference.NoiseOptions{Shares: true, Draws: 19, Seed: 3, Threads: threads})
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = r
		} else if fmt.Sprint(*r.Floor, r.P, r.Upper) != fmt.Sprint(*first.Floor, first.P, first.Upper) {
			t.Error("threads change the noise")
		}
	}
}

// Multinomial replicates have a dispersion of 1, whatever their totals; counts
// that come in lumps of three have one of three.
func TestDispersed(t *testing.T) {
	net := graphiotest.Road(80, 5)
	source := graphiotest.Smooth(net, 1)
	v := inference.Variable{Name: "batch"}
	var plain, lumps []graphio.Sample
	for k := range 40 {
		s := renamed(graphiotest.Counts(source, 400+10*k, uint64(k)), fmt.Sprint(k))
		plain = append(plain, s)
		three := s
		three.Values = make([]float64, len(s.Values))
		for i, x := range s.Values {
			three.Values[i] = 3 * x
		}
		lumps = append(lumps, three)
		v.Labels = append(v.Labels, fmt.Sprint("b", k%4))
	}
	for want, list := range map[float64][]graphio.Sample{1: plain, 3: lumps} {
		samples, err := graphio.NewSamples(net.Order(), list)
		if err != nil {
			t.Fatal(err)
		}
		got, err := inference.Dispersed(samples, v)
		if err != nil {
			t.Fatal(err)
		}
		// χ²/f has a standard deviation of √(2/f), f = 36·79 here: 0.026.
		if math.Abs(got/want-1) > 0.1 {
			t.Errorf("dispersion %v, want %v", got, want)
		}
	}
}

func TestNoiseRefuses(t *testing.T) {
	net := graphiotest.Road(20, 6)
	e := estimator(t, net)
	whole := twins(t, net, 1, [2]int{9, 9}, 1)
	broken, err := graphio.NewSamples(net.Order(), []graphio.Sample{{Name: "a", Nodes: []int32{0}, Values: []float64{0.5}}, {Name: "b", Nodes: []int32{0}, Values: []float64{1}}})
	if err != nil {
		t.Fatal(err)
	}
	one, err := graphio.NewSamples(net.Order(), []graphio.Sample{whole.At(0)})
	if err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct {
		samples *graphio.Samples
		opt     inference.NoiseOptions
		want    error
		word    string
	}{
		"no counts":     {broken, inference.NoiseOptions{Shares: true}, inference.ErrCounts, `"a"`},
		"one sample":    {one, inference.NoiseOptions{Shares: true}, inference.ErrOption, "two or more"},
		"few draws":     {whole, inference.NoiseOptions{Shares: true, Draws: 5}, inference.ErrOption, "19 or more"},
		"no dispersion": {whole, inference.NoiseOptions{Shares: true, Dispersion: -1}, inference.ErrOption, "above 0"},
	} {
		if _, err := inference.Floor(ctx, e, c.samples, c.opt); !errors.Is(err, c.want) || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s: error %v", name, err)
		}
	}
	if _, err := inference.Dispersed(whole, inference.Variable{Name: "x", Labels: []string{"p", "q"}}); !errors.Is(err, inference.ErrDesign) {
		t.Errorf("no replicates: error %v", err)
	}
}

// Draws without replacement add up, stay in range, and have the moments of the
// hypergeometric and binomial laws.
func TestHalves(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	s := graphio.Sample{Name: "s", Nodes: []int32{0, 1, 2}, Values: []float64{7, 500, 94}}
	const draws = 4000
	var sum, square [3]float64
	for range draws {
		h := inference.Half(s, true, r)
		total := 0.0
		for k, v := range h.Nodes {
			x := h.Values[k]
			if x < 0 || x > s.Values[v] || x != math.Trunc(x) {
				t.Fatalf("%v of %v", x, s.Values[v])
			}
			total += x
			sum[v] += x / draws
			square[v] += x * x / draws
		}
		if total != 300 && total != 301 {
			t.Fatalf("half of 601 is %v", total)
		}
	}
	for v, count := range s.Values {
		variance := count / 4 * (601 - count) / 600 // hypergeometric, half of 601
		if math.Abs(sum[v]-count/2) > 5*math.Sqrt(variance/draws) {
			t.Errorf("mean %v of %v", sum[v], count)
		}
		if got := square[v] - sum[v]*sum[v]; math.Abs(got/variance-1) > 0.15 { // its own deviation is √(2/4000) = 2 %
			t.Errorf("variance %v of %v, want %v", got, count, variance)
		}
	}
}

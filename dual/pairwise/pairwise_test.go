package pairwise

import (
	"context"
	"errors"
	"math"
	"runtime"
	"runtime/debug"
	"slices"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/gonum/floats/scalar"
	"pgregory.net/rapid"

	"example.org/barrow/dual"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

type method struct {
	name string
	run  func(context.Context, *graphio.Network, *graphio.Samples, Options) (*Result, error)
}

var methods = []method{{"exact", Exact}, {"multiscale", Multiscale}, {"kernel", Kernel}, {"variation", Variation}, {"flow", Flow}, {"hierarchy", Hierarchy}}

func must(t testing.TB, m method, net *graphio.Network, samples *graphio.Samples, opt Options) *Result {
	t.Helper()
	r, err := m.run(context.Background(), net, samples, opt)
	if err != nil {
		t.Fatalf("%s: %v", m.name, err)
	}
	return r
}

func TestAnyNumberOfThreadsGivesTheSameBits(t *testing.T) {
	net, samples := town(t, 70) // more than two tiles and several runs
	for _, m := range methods {
		opt := Options{Shares: true, Calibrate: 30, Seed: 9, Threads: 1}
		want := must(t, m, net, samples, opt)
		for _, opt.Threads = range []int{2, 3, 7} {
			got := must(t, m, net, samples, opt)
			if !slices.Equal(got.Matrix.Value, want.Matrix.Value) {
				t.Errorf("%s: %d threads give other distances than one", m.name, opt.Threads)
			}
			if want.Calibration != nil && !slices.Equal(got.Calibration.Weights, want.Calibration.Weights) {
				t.Errorf("%s: %d threads give other weights than one", m.name, opt.Threads)
			}
		}
	}
}

// Every method is a metric, but for different samples at distance 0: symmetric
// by storage, 0 for equal samples, and obeys the triangle inequality.
func TestMetricAxioms(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		seed := rapid.Uint64().Draw(t, "seed")
		net := graphiotest.Road(rapid.IntRange(2, 60).Draw(t, "nodes"), seed)
		p := graphiotest.Sparse(net, rapid.IntRange(1, 20).Draw(t, "entries"), seed)
		samples := graphiotest.Samples(net, p, graphiotest.Sparse(net, 3, seed+1), p, graphiotest.Smooth(net, seed+2), graphiotest.Point(0))
		for _, m := range methods {
			r, err := m.run(context.Background(), net, samples, Options{Shares: true})
			if err != nil {
				t.Fatalf("%s: %v", m.name, err)
			}
			d := r.Matrix
			if d.At(0, 2) > 1e-12*largest(d.Value) {
				t.Fatalf("%s: equal samples at distance %v", m.name, d.At(0, 2))
			}
			for i := range samples.Len() {
				for j := range samples.Len() {
					for k := range samples.Len() {
						if d.At(i, k) > d.At(i, j)+d.At(j, k)+1e-6*largest(d.Value) {
							t.Fatalf("%s: %v from %d to %d, %v by way of %d", m.name, d.At(i, k), i, k, d.At(i, j)+d.At(j, k), j)
						}
					}
				}
			}
		}
	})
}

func largest(x []float64) float64 { return max(slices.Max(x), math.SmallestNonzeroFloat64) }

func TestExactIsThatOfSinglePairs(t *testing.T) {
	for _, cases := range [][]graphiotest.Case{graphiotest.Cases(), graphiotest.Directed()} {
		for _, c := range cases {
			samples := graphiotest.Samples(c.Net, c.P, c.Q, graphiotest.Smooth(c.Net, 1))
			r := must(t, method{c.Name, Exact}, c.Net, samples, Options{Shares: true})
			for i := range 3 {
				for j := range 3 {
					if i == j {
						continue
					}
					want, err := exact.Solve(c.Net, samples.At(i), samples.At(j), exact.Options{Shares: true})
					if err != nil {
						t.Fatalf("%s: %v", c.Name, err)
					}
					if got := r.Matrix.At(i, j); !scalar.EqualWithinAbsOrRel(got, want.Distance(), 1e-12, 1e-9) {
						t.Errorf("%s: %v from %d to %d, alone %v", c.Name, got, i, j, want.Distance())
					}
					lower, upper, ok := r.Matrix.Bounds(i, j)
					if !ok || lower > upper || upper-lower > 1e-9*upper {
						t.Errorf("%s: bounds %v to %v, %v", c.Name, lower, upper, ok)
					}
				}
			}
			if r.Matrix.Directed != c.Net.Directed() {
				t.Errorf("%s: directed %v for a network directed %v", c.Name, r.Matrix.Directed, c.Net.Directed())
			}
		}
	}
}

func TestSimpleMethodsAreThoseOfSinglePairs(t *testing.T) {
	net, samples := town(t, 40)
	v := must(t, methods[3], net, samples, Options{})
	k := must(t, methods[2], net, samples, Options{Shares: true})
	m, err := dual.NewMultiscale(net, dual.Options{})
	if err != nil {
		t.Fatal(err)
	}
	features, err := m.Features(context.Background(), samples, false, 1, nil)
	if err != nil {
		t.Fatal(err)
	}
	for i := range samples.Len() {
		for j := range i {
			if got, want := v.Matrix.At(i, j), dual.Variation(samples.At(i), samples.At(j)); got != want {
				t.Fatalf("variation %d,%d is %v, want %v", i, j, got, want)
			}
			if got, want := k.Matrix.At(i, j), math.Sqrt(features.Biased(i, j, dual.All)); got != want {
				t.Fatalf("kernel %d,%d is %v, want %v", i, j, got, want)
			}
		}
	}
}

// Two unit masses at distance d are min(d, 2λ) apart in the flat norm (Hanin
// 1992); by hand on the unit path 0..4, between its ends.
func TestUnmatchedMass(t *testing.T) {
	net := line(t, 5)
	for _, c := range []struct{ cost, want float64 }{{0.5, 1}, {1, 2}, {2, 4}, {3, 4}} {
		r := must(t, methods[0], net, graphiotest.Samples(net, graphiotest.Point(0), graphiotest.Point(4)), Options{Unmatched: c.cost})
		if got := r.Matrix.At(0, 1); !scalar.EqualWithinAbs(got, c.want, 1e-12) {
			t.Errorf("at a cost of %v: %v, want %v", c.cost, got, c.want)
		}
	}
}

func line(t *testing.T, n int) *graphio.Network {
	t.Helper()
	names := strings.Split("0123456789"[:n], "")
	var edges []graphio.Edge
	for v := range n - 1 {
		edges = append(edges, graphio.Edge{From: int32(v), To: int32(v + 1), Length: 1, Weight: 1})
	}
	net, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	return net
}

func TestRefusals(t *testing.T) {
	net := line(t, 5)
	one, two := graphiotest.Point(0), graphiotest.Point(1)
	double := two
	double.Values = []float64{2}
	empty := graphio.Sample{}
	apart, err := graphio.NewNetwork([]string{"a", "b", "c", "d"}, []graphio.Edge{{From: 0, To: 1, Length: 1, Weight: 1}, {From: 2, To: 3, Length: 1, Weight: 1}})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name    string
		net     *graphio.Network
		samples []graphio.Sample
		opt     Options
		methods []method
		want    string
	}{
		{"amounts of different totals", net, []graphio.Sample{one, double}, Options{}, methods[:2], `"s1" with a total of 2`},
		{"a sample without mass", net, []graphio.Sample{one, empty}, Options{Shares: true}, methods, `"s1" has no mass`},
		{"mass in different parts", apart, []graphio.Sample{one, graphiotest.Point(3)}, Options{Shares: true}, methods[:2], "--bridge"},
		{"a negative cost", net, []graphio.Sample{one, two}, Options{Unmatched: -1}, methods[:2], "cost of unmatched mass"},
		{"too little memory", net, []graphio.Sample{one, two}, Options{Shares: true, Memory: 10}, methods, "--memory"},
		{"amounts for the kernel", net, []graphio.Sample{one, two}, Options{}, methods[2:3], "not for this method"},
		{"samples of another network", apart, nil, Options{Shares: true}, methods, "want samples read with this network"},
	} {
		samples := graphiotest.Samples(net, one, two)
		if c.samples != nil {
			samples = graphiotest.Samples(c.net, c.samples...)
		}
		for _, m := range c.methods {
			r, err := m.run(context.Background(), c.net, samples, c.opt)
			if err == nil || r != nil || !strings.Contains(err.Error(), c.want) {
				t.Errorf("%s, %s: %v, want %q", c.name, m.name, err, c.want)
			}
		}
	}
}

func TestCancelledWorkReturnsNothing(t *testing.T) {
	net, samples := town(t, 40)
	for _, m := range methods {
		ctx, cancel := context.WithCancel(context.Background())
		opt := Options{Shares: true, Calibrate: 20, Threads: 2, Progress: func(string, int, int) { cancel() }}
		if r, err := m.run(ctx, net, samples, opt); !errors.Is(err, context.Canceled) || r != nil {
			t.Errorf("%s: %v, %v; want no result and context.Canceled", m.name, r, err)
		}
		cancel()
	}
}

func TestProgressAndPhases(t *testing.T) {
	net, samples := town(t, 40)
	for m, want := range map[int][]string{0: {"exact"}, 1: {"calibrate", "embed", "estimate"}, 2: {"embed", "estimate"}, 3: {"estimate"}} {
		var stages []string
		last := map[string][2]int{}
		var phases Phases
		must(t, methods[m], net, samples, Options{Shares: true, Calibrate: 20, Phases: &phases, Progress: func(stage string, done, total int) {
			if len(stages) == 0 || stages[len(stages)-1] != stage {
				stages = append(stages, stage)
			}
			if done < last[stage][0] || done > total {
				t.Errorf("%s: %d of %d after %d", stage, done, total, last[stage][0])
			}
			last[stage] = [2]int{done, total}
		}})
		if !slices.Equal(stages, want) {
			t.Errorf("%s: stages %v, want %v", methods[m].name, stages, want)
		}
		for stage, l := range last {
			if l[0] != l[1] {
				t.Errorf("%s: ended at %d of %d", stage, l[0], l[1])
			}
		}
		for k, p := range phases {
			if p.Name != want[k] || p.Seconds < 0 || p.PeakBytes < 1<<16 {
				t.Errorf("%s: phase %+v, want %s with time and memory", methods[m].name, p, want[k])
			}
		}
	}
}

// A phase records memory that was there only while it ran.
func TestPhasesSeeThePeak(t *testing.T) {
	var phases Phases
	phases.Time("exact", func() error {
		time.Sleep(100 * time.Millisecond) // so that the first look comes before
		block := make([]byte, 200<<20)
		for i := 0; i < len(block); i += 4096 {
			block[i] = 1
		}
		time.Sleep(200 * time.Millisecond) // ten looks
		runtime.KeepAlive(block)
		block = nil
		debug.FreeOSMemory()
		return nil
	})
	if phases[0].PeakBytes < 200<<20 {
		t.Errorf("a phase that held 200 MiB records %d bytes", phases[0].PeakBytes)
	}
	if held() > 150<<20 {
		t.Errorf("%d bytes held after the phase: this test shows nothing", held())
	}
}

// Work of the lowest task that fails is what is reported, however many run.
func TestFirstFailureIsReported(t *testing.T) {
	for _, threads := range []int{1, 2, 8} {
		err := work(context.Background(), threads, 100, func(int, int) {}, func() func(int) error {
			return func(task int) error {
				if task >= 17 {
					return errors.New(strings.Repeat("x", task))
				}
				runtime.Gosched()
				return nil
			}
		})
		if err == nil || len(err.Error()) != 17 {
			t.Errorf("%d threads: %v, want the failure of task 17", threads, err)
		}
	}
}

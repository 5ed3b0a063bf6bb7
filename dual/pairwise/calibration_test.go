package pairwise

import (
	"context"
	"fmt"
	"math"
	"reflect"
	"slices"
	"testing"

	"gonum.org/v1/gonum/floats/scalar"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func TestSpearman(t *testing.T) {
	for _, c := range []struct {
		name string
		x, y []float64
		want float64
	}{
		// IQ and hours of television, the worked example of Wikipedia's article on
		// the coefficient: −29/165 (value from memory; by hand 1 − 6·194/990).
		{"no ties", []float64{106, 100, 86, 101, 99, 103, 97, 113, 112, 110}, []float64{7, 27, 2, 50, 28, 29, 20, 12, 6, 17}, -29.0 / 165},
		// By hand: ranks 1, 2.5, 2.5, 4 and 1, 2, 3, 4 have covariance 4.5 and squares 4.5 and 5.
		{"ties", []float64{1, 2, 2, 3}, []float64{1, 2, 3, 4}, 4.5 / math.Sqrt(4.5*5)},
		{"monotone", []float64{1, 2, 30}, []float64{-5, 0, 1}, 1},
	} {
		if got := spearman(c.x, c.y); !scalar.EqualWithinAbs(got, c.want, 1e-12) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
	if got := spearman([]float64{1, 2}, []float64{1, 2}); !math.IsNaN(got) {
		t.Errorf("two pairs give %v, want NaN", got)
	}
}

// By hand: errors 0, 0.1, 0.2 and 0.5, of which linear interpolation puts the
// middle at the second and 95 % at 0.8 of the way from the third to the fourth.
func TestErrorsAreThoseOfHeldOutPairs(t *testing.T) {
	c := &Calibration{Pairs: []CalibrationPair{
		{Exact: 1, Estimate: 7}, // fitted: not to be counted
		{Exact: 2, Estimate: 2, HeldOut: true},
		{Exact: 1, Estimate: 1.1, HeldOut: true},
		{Exact: 5, Estimate: 4, HeldOut: true},
		{Exact: 4, Estimate: 6, HeldOut: true},
		{Exact: 0, Estimate: 0, HeldOut: true}, // counts for ranks alone
	}}
	c.measure()
	if c.HeldOut != 5 || !scalar.EqualWithinAbs(c.MedianError, 0.1, 1e-12) || !scalar.EqualWithinAbs(c.P95, 0.44, 1e-12) {
		t.Errorf("%d held out, median %v, 95 %% %v; want 5, 0.1, 0.44", c.HeldOut, c.MedianError, c.P95)
	}
}

func TestRandomPairsAreDistinctAndInRange(t *testing.T) {
	for _, directed := range []bool{false, true} {
		for n := 2; n < 12; n++ {
			all := pairCount(n, directed)
			for _, count := range []int{1, all / 2, all} {
				seen := map[pair]bool{}
				for _, p := range randomPairs(n, directed, count, 5) {
					if p.i == p.j || p.i < 0 || p.j < 0 || p.i >= n || p.j >= n || p.i > p.j && !directed || seen[p] {
						t.Fatalf("n %d, directed %v: pair %v, seen %v", n, directed, p, seen[p])
					}
					seen[p] = true
				}
				if len(seen) != count {
					t.Errorf("n %d: %d pairs, want %d", n, len(seen), count)
				}
			}
		}
	}
}

func TestDefaultPairs(t *testing.T) {
	for _, c := range []struct {
		samples, nodes int
		directed       bool
		want           int
	}{ // by hand from the rule stated at DefaultPairs
		{2, 10, false, 1}, {3, 10, true, 6}, {10, 100, false, 40}, {30, 100, false, 200},
		{336, 2000, false, 200}, {1000, 100000, false, 40}, {1000, 40000, false, 100}, {200, 1000000, false, 12},
	} {
		if got := DefaultPairs(c.samples, c.nodes, c.directed); got != c.want {
			t.Errorf("%d samples on %d nodes: %d pairs, want %d", c.samples, c.nodes, got, c.want)
		}
	}
}

// A calibrated estimate comes out in the unit of the lengths, and the record of
// its pairs is true: exact values are those of the solver, half are held out.
func TestCalibrationRecordsTheTruth(t *testing.T) {
	net, samples := town(t, 24)
	r, err := Multiscale(context.Background(), net, samples, Options{Shares: true, Calibrate: 60, Seed: 3})
	if err != nil {
		t.Fatal(err)
	}
	c := r.Calibration
	if len(c.Pairs) != 60 || c.HeldOut != 30 {
		t.Fatalf("%d pairs, %d held out; want 60, 30", len(c.Pairs), c.HeldOut)
	}
	for _, p := range c.Pairs {
		want, err := exact.Solve(net, samples.At(p.I), samples.At(p.J), exact.Options{Shares: true})
		if err != nil {
			t.Fatal(err)
		}
		if !scalar.EqualWithinRel(p.Exact, want.Distance(), 1e-9) {
			t.Errorf("pair %d,%d recorded as %v, solved as %v", p.I, p.J, p.Exact, want.Distance())
		}
		if p.Estimate != r.Matrix.At(p.I, p.J) {
			t.Errorf("pair %d,%d estimated as %v, in the matrix %v", p.I, p.J, p.Estimate, r.Matrix.At(p.I, p.J))
		}
	}
	// Loose limits: this is a small network; what matters is the unit.
	if !(c.Spearman > 0.8 && c.MedianError < 0.15) || slices.Min(c.Weights) < 0 {
		t.Errorf("Spearman %v, median error %v, weights %v", c.Spearman, c.MedianError, c.Weights)
	}
}

// The model depends on the pairs to fit alone: held-out values may be anything.
func TestFitDoesNotSeeHeldOutPairs(t *testing.T) {
	net, samples := town(t, 12)
	fitted := func(pairs []CalibrationPair) *Model {
		c := &Calibration{Pairs: pairs}
		if _, err := c.fit(context.Background(), net, samples, make([]potentials, len(pairs)), Options{}); err != nil {
			t.Fatal(err)
		}
		return c.model
	}
	pairs := []CalibrationPair{{I: 0, J: 5, Exact: 9}, {I: 1, J: 7, Exact: 8}, {I: 2, J: 9, Exact: 10}, {I: 3, J: 11, Exact: 1, HeldOut: true}}
	want := fitted(pairs)
	pairs[3] = CalibrationPair{I: 4, J: 10, Exact: 1e6, HeldOut: true}
	if got := fitted(pairs); !reflect.DeepEqual(got, want) {
		t.Errorf("weights %v, and %v with another held-out pair", want.Weights, got.Weights)
	}
	pairs[0].Exact = 90
	if slices.Equal(fitted(pairs).Weights, want.Weights) {
		t.Error("the weights do not depend on the pairs to fit")
	}
}

// Lengths in feet give distances in feet: weights 1/length leave the walk as it
// is, and the fit takes up the unit.
func TestEstimatesScaleWithLengths(t *testing.T) {
	net, samples := town(t, 12)
	edges := slices.Clone(net.EdgeList())
	names := make([]string, net.Order())
	for v := range names {
		names[v] = net.Name(v)
	}
	for i := range edges {
		edges[i].Length *= 4
	}
	longer, err := graphio.NewNetwork(names, edges)
	if err != nil {
		t.Fatal(err)
	}
	opt := Options{Shares: true, Calibrate: -1, Seed: 1}
	a, errA := Multiscale(context.Background(), net, samples, opt)
	b, errB := Multiscale(context.Background(), longer, samples, opt)
	if errA != nil || errB != nil {
		t.Fatal(errA, errB)
	}
	for i, x := range a.Matrix.Value {
		if !scalar.EqualWithinRel(4*x, b.Matrix.Value[i], 1e-6) {
			t.Fatalf("entry %d: %v, and %v on lengths four times as long", i, x, b.Matrix.Value[i])
		}
	}
}

// town is a small road network with counts on it.
func town(t testing.TB, samples int) (*graphio.Network, *graphio.Samples) {
	t.Helper()
	net := graphiotest.Road(220, 4)
	list := make([]graphio.Sample, samples)
	for i := range list {
		smooth := graphiotest.Smooth(net, uint64(i/3))
		list[i] = graphiotest.Counts(smooth, 3000, uint64(i))
		list[i].Name = fmt.Sprintf("s%02d", i)
	}
	s, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		t.Fatal(err)
	}
	return net, s
}

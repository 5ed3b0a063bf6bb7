package pairwise

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// collection is samples of every kind on one network.
func collection(t testing.TB, net *graphio.Network, count int) *graphio.Samples {
	t.Helper()
	var list []graphio.Sample
	for k := range count {
		var s graphio.Sample
		switch seed := uint64(k + 1); k % 5 {
		case 0:
			s = graphiotest.Smooth(net, seed)
		case 1:
			s = graphiotest.Counts(graphiotest.Smooth(net, seed%3+1), 3*net.Order(), seed)
		case 2:
			s = graphiotest.Sparse(net, max(2, net.Order()/20), seed)
		case 3:
			s = graphiotest.Point(int(seed) * 7 % net.Order())
		case 4:
			s = graphiotest.Counts(graphiotest.Smooth(net, seed%2+1), 40*net.Order(), seed)
		}
		s.Name = fmt.Sprint("s", k)
		list = append(list, s)
	}
	samples, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		t.Fatal(err)
	}
	return samples
}

func families() map[string]*graphio.Network {
	return map[string]*graphio.Network{
		"road": graphiotest.Road(150, 1), "grid": graphiotest.Grid(11, 13, 2), "kNN": graphiotest.KNN(130, 2, 6, 3), "scale-free": graphiotest.ScaleFree(140, 3, 4),
	}
}

// checkBounds compares every interval with the distance solved on its own.
func checkBounds(t *testing.T, name string, net *graphio.Network, samples *graphio.Samples, m *Matrix, opt exact.Options) {
	t.Helper()
	for i := range samples.Len() {
		for j := i + 1; j < samples.Len(); j++ {
			r, err := exact.Solve(net, samples.At(i), samples.At(j), opt)
			if err != nil {
				t.Fatal(err)
			}
			lower, upper, _ := m.Bounds(i, j)
			slack := 1e-9 * r.Upper
			if lower > r.Upper+slack || upper < r.Lower-slack || m.At(i, j) < lower || m.At(i, j) > upper {
				t.Fatalf("%s: %v in [%v, %v] for a distance of %v", name, m.At(i, j), lower, upper, r.Distance())
			}
		}
	}
}

// On every family each interval holds the distance, and the gap asked for is
// kept, with fewer solves than pairs.
func TestCertifiedGap(t *testing.T) {
	for name, net := range families() {
		samples := collection(t, net, 20)
		for _, goal := range []Goal{{Gap: 0.3}, {Gap: 0.05, Extremes: true}, {Gap: 0.1, Mean: true}, {}} {
			r, err := Certified(context.Background(), net, samples, goal, Options{Shares: true, Calibrate: 12, Seed: 1})
			if err != nil {
				t.Fatal(err)
			}
			checkBounds(t, name, net, samples, r.Matrix, exact.Options{Shares: true})
			c := r.Certificate
			reached := c.MaxGap
			if goal.Mean {
				reached = c.MeanGap
			}
			if !c.Settled || reached > goal.Gap+2e-9 {
				t.Errorf("%s, %+v: %+v", name, goal, c)
			}
			if goal.Gap == 0.3 && c.Solved >= c.Pairs {
				t.Errorf("%s: all %d pairs solved for a gap of 30 %%", name, c.Pairs)
			}
		}
	}
}

// Amounts with a cost of unmatched mass, and none for two parts of a network.
func TestCertifiedUnmatched(t *testing.T) {
	for name, net := range families() {
		samples := collection(t, net, 10)
		for _, cost := range []float64{0.5, 30, 1e6} {
			r, err := Certified(context.Background(), net, samples, Goal{Gap: 0.2}, Options{Unmatched: cost, Calibrate: 6, Seed: 1})
			if err != nil {
				t.Fatal(err)
			}
			checkBounds(t, fmt.Sprint(name, " at ", cost), net, samples, r.Matrix, exact.Options{Unmatched: cost})
		}
	}
}

// The nearest of every sample are those that all pairs solved say, and so are
// those nearer than a threshold, the extremes and the medoids.
func TestCertifiedQuestions(t *testing.T) {
	for name, net := range families() {
		samples := collection(t, net, 24)
		all, err := Exact(context.Background(), net, samples, Options{Shares: true})
		if err != nil {
			t.Fatal(err)
		}
		opt := Options{Shares: true, Calibrate: 20, Seed: 2}
		const k = 3
		r, err := Certified(context.Background(), net, samples, Goal{Top: k, Extremes: true, Groups: [][]int{{0, 5, 10, 15, 20}, {1, 4, 6, 9, 11}}}, opt)
		if err != nil {
			t.Fatal(err)
		}
		if r.Certificate.Solved >= r.Certificate.Pairs {
			t.Errorf("%s: every pair solved for the %d nearest", name, k)
		}
		for i := range samples.Len() {
			if got, want := nearest(r.Matrix.At, samples.Len(), i, k), nearest(all.Matrix.At, samples.Len(), i, k); !slices.Equal(sorted(got), sorted(want)) {
				t.Errorf("%s: nearest of %d are %v, want %v", name, i, got, want)
			}
		}
		for g, group := range [][]int{{0, 5, 10, 15, 20}, {1, 4, 6, 9, 11}} {
			best, least := -1, math.Inf(1)
			for _, i := range group {
				sum := 0.0
				for _, j := range group {
					sum += all.Matrix.At(i, j)
				}
				if sum < least {
					best, least = i, sum
				}
			}
			if r.Certificate.Medoids[g] != best {
				t.Errorf("%s: medoid %d, want %d", name, r.Certificate.Medoids[g], best)
			}
		}
		middle := slices.Sorted(slices.Values(all.Matrix.Value))[len(all.Matrix.Value)/2]
		threshold := middle * (1 + 1e-6)
		r, err = Certified(context.Background(), net, samples, Goal{Threshold: threshold}, opt)
		if err != nil {
			t.Fatal(err)
		}
		for at, d := range all.Matrix.Value {
			if (d < threshold) != (r.Matrix.Upper[at] < threshold) {
				t.Errorf("%s: distance %v lies in [%v, %v], threshold %v", name, d, r.Matrix.Lower[at], r.Matrix.Upper[at], threshold)
			}
		}
		ranked, c, err := Rank(context.Background(), net, samples, 7, 4, opt)
		if err != nil {
			t.Fatal(err)
		}
		var got []int
		for _, x := range ranked {
			got = append(got, x.Sample)
			if d := all.Matrix.At(7, x.Sample); math.Abs(x.Distance-d) > 1e-9*d || x.Lower > d*(1+1e-12) || x.Upper < d*(1-1e-12) {
				t.Errorf("%s: %+v, the distance is %v", name, x, d)
			}
		}
		if want := nearest(all.Matrix.At, samples.Len(), 7, 4); !slices.Equal(got, want) || c.Solved >= c.Pairs {
			t.Errorf("%s: ranking %v, want %v; %+v", name, got, want, c)
		}
	}
}

func nearest(at func(i, j int) float64, n, i, k int) []int {
	var list []int
	for j := range n {
		if j != i {
			list = append(list, j)
		}
	}
	slices.SortStableFunc(list, func(a, b int) int { return cmp.Compare(at(i, a), at(i, b)) })
	return list[:k]
}

func sorted(list []int) []int { return slices.Sorted(slices.Values(list)) }

// A run that is cut off anywhere goes on to the same result as a whole one,
// whatever the number of threads; journals of other runs are refused.
func TestJournalResumes(t *testing.T) {
	net := graphiotest.Road(200, 3)
	samples := collection(t, net, 24)
	goal := Goal{Gap: 0.02, Extremes: true}
	run := func(path string, threads int) (*Result, int) {
		t.Helper()
		var journal *Journal
		if path != "" {
			var err error
			if journal, err = OpenJournal(path, "key"); err != nil {
				t.Fatal(err)
			}
			defer journal.Close()
		}
		r, err := Certified(context.Background(), net, samples, goal, Options{Shares: true, Calibrate: 10, Seed: 1, Threads: threads, Journal: journal})
		if err != nil {
			t.Fatal(err)
		}
		return r, journal.Found()
	}
	whole, _ := run("", 1)
	path := filepath.Join(t.TempDir(), "journal")
	kept, found := run(path, 3)
	if found != 0 {
		t.Errorf("a new journal holds %d batches", found)
	}
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	same := func(name string, r *Result) {
		t.Helper()
		if !slices.Equal(r.Matrix.Value, whole.Matrix.Value) || !slices.Equal(r.Matrix.Lower, whole.Matrix.Lower) || !slices.Equal(r.Matrix.Upper, whole.Matrix.Upper) || *certificateOf(r) != *certificateOf(whole) {
			t.Errorf("%s: another result", name)
		}
	}
	same("with a journal", kept)
	for cut := 0; cut < len(text); cut += 1 + len(text)/9 {
		if err := os.WriteFile(path, text[:cut], 0o666); err != nil {
			t.Fatal(err)
		}
		r, _ := run(path, 1+cut%2)
		same(fmt.Sprint("cut at ", cut), r)
		if again, _ := os.ReadFile(path); !slices.Equal(again, text) {
			t.Errorf("cut at %d: another journal in the end", cut)
		}
	}
	// Damage in the middle: what follows is solved again.
	damaged := slices.Clone(text)
	damaged[len(damaged)/2] ^= 1
	os.WriteFile(path, damaged, 0o666)
	r, found := run(path, 2)
	same("damaged", r)
	if found == 0 {
		t.Error("nothing before the damage was used")
	}
	if _, err := OpenJournal(path, "other"); !errors.Is(err, ErrJournal) {
		t.Errorf("a journal of another run: %v", err)
	}
}

func certificateOf(r *Result) *struct {
	pairs, solved int
	settled       bool
	mean, most    float64
} {
	c := r.Certificate
	return &struct {
		pairs, solved int
		settled       bool
		mean, most    float64
	}{c.Pairs, c.Solved, c.Settled, c.MeanGap, c.MaxGap}
}

package main

import (
	"context"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"slices"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// A set is a network with samples.
type set struct {
	name    string
	net     *graphio.Network
	samples *graphio.Samples
}

// accuracy measures estimates against exact distances of pairs held out: on the
// real sets of a folder, the demo and generated networks. Of several choices of
// pairs the median counts.
func accuracy(data string, seeds int) error {
	fmt.Println("| network and samples | nodes | edges | samples | pairs fitted, held out | Spearman | median error | 95th percentile | as vectors: Spearman | median | 95th | flow : exact | hierarchy: Spearman | median |")
	fmt.Println("|---|--:|--:|--:|--:|--:|--:|--:|--:|--:|--:|--:|--:|--:|")
	sets, err := realSets(data)
	if err != nil {
		return err
	}
	for _, s := range append(sets, generated()...) {
		if err := judge(s, seeds); err != nil {
			return fmt.Errorf("%s: %w", s.name, err)
		}
	}
	return nil
}

func realSets(data string) ([]set, error) {
	demo, err := os.MkdirTemp("", "demo")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(demo)
	if text, err := exec.Command("go", "run", "./cmd/barrow", "demo", filepath.Join(demo, "demo")).CombinedOutput(); err != nil {
		return nil, fmt.Errorf("the demo: %w: %s", err, text)
	}
	folders := []string{filepath.Join(demo, "demo")}
	if data != "" {
		entries, err := os.ReadDir(data)
		if err != nil {
			return nil, err
		}
		for _, e := range entries {
			folders = append(folders, filepath.Join(data, e.Name()))
		}
	}
	var sets []set
	for _, f := range folders {
		_, err := os.Stat(filepath.Join(f, "DIRECTED"))
		net, _, err := graphio.ReadNetwork(filepath.Join(f, "edges.csv"), filepath.Join(f, "nodes.csv"), graphio.NetworkOptions{Directed: err == nil})
		if err != nil {
			return nil, err
		}
		samples, _, err := graphio.ReadSamples(filepath.Join(f, "samples.csv"), net, graphio.SampleOptions{})
		if err != nil {
			return nil, err
		}
		sets = append(sets, set{filepath.Base(f), net, samples})
	}
	return sets, nil
}

// generated are networks of each family with 40 smooth samples, and with counts
// of 1,000 to 8,000 drawn from them.
func generated() []set {
	var sets []set
	for _, f := range []struct {
		name string
		net  *graphio.Network
	}{
		{"road", graphiotest.Road(3000, 1)}, {"grid", graphiotest.Grid(55, 55, 1)},
		{"neighbours, 5 dimensions", graphiotest.KNN(3000, 5, 10, 1)}, {"scale-free", graphiotest.ScaleFree(3000, 2, 1)},
	} {
		smooth := mixtures(f.net, 40, 0)
		list := make([]graphio.Sample, smooth.Len())
		for i := range list {
			list[i] = graphiotest.Counts(smooth.At(i), 1000<<(i%4), uint64(i))
		}
		sets = append(sets, set{f.name + ", smooth", f.net, smooth}, set{f.name + ", counts", f.net, graphiotest.Samples(f.net, list...)})
	}
	return sets
}

func judge(s set, seeds int) error {
	var columns [9][]float64
	var fitted, heldOut int
	add := func(k int, x float64) { columns[k] = append(columns[k], x) }
	for seed := range uint64(seeds) {
		opt := pairwise.Options{Shares: true, Calibrate: -1, Seed: seed + 1}
		r, err := pairwise.Multiscale(context.Background(), s.net, s.samples, opt)
		if err != nil {
			return err
		}
		c := r.Calibration
		fitted, heldOut = len(c.Pairs)-c.HeldOut, c.HeldOut
		add(0, c.Spearman)
		add(1, c.MedianError)
		add(2, c.P95)
		opt.KeepVectors = true
		v, err := pairwise.Multiscale(context.Background(), s.net, s.samples, opt)
		if err != nil {
			return err
		}
		v.Vectors.Close()
		opt.KeepVectors = false
		add(3, v.Calibration.Spearman)
		add(4, v.Calibration.MedianError)
		add(5, v.Calibration.P95)
		f, err := pairwise.Flow(context.Background(), s.net, s.samples, opt)
		if err != nil {
			return err
		}
		var ratio []float64
		for _, p := range c.Pairs {
			if p.HeldOut && p.Exact > 0 {
				ratio = append(ratio, f.Matrix.At(p.I, p.J)/p.Exact)
			}
		}
		add(6, middle(ratio))
		h, err := pairwise.Hierarchy(context.Background(), s.net, s.samples, opt)
		if err != nil {
			return err
		}
		if h.Calibration != nil { // none on trees, where it is exact
			add(7, h.Calibration.Spearman)
			add(8, h.Calibration.MedianError)
		}
	}
	var m [9]float64
	for k, c := range columns {
		m[k] = middle(c)
	}
	fmt.Printf("| %s | %d | %d | %d | %d, %d | %.4f | %s | %s | %.4f | %s | %s | %.2f | %.3f | %s |\n",
		s.name, s.net.Order(), s.net.Size(), s.samples.Len(), fitted, heldOut,
		m[0], percent(m[1]), percent(m[2]), m[3], percent(m[4]), percent(m[5]), m[6], m[7], percent(m[8]))
	return nil
}

// middle is the median, NaN of nothing.
func middle(x []float64) float64 {
	if len(x) == 0 {
		return math.NaN()
	}
	slices.Sort(x)
	return x[len(x)/2]
}

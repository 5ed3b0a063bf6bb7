package main

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"
	"time"

	"example.org/barrow/benchmarks/internal/peak"
	"example.org/barrow/dual"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// job holds what the stages hand on.
type job struct {
	folder    string
	net       *graphio.Network
	samples   *graphio.Samples
	layout    *dual.Multiscale
	embedding *dual.Embedding
}

var stages = []struct {
	name string
	do   func(*job) error
}{
	{"load", (*job).load},
	{"lay out", (*job).layOut},
	{"embed", (*job).embed},
	{"matrix", (*job).matrix},
	{"calibrate", (*job).calibrate},
	{"exact", (*job).exact},
}

// header is the first two lines of the table.
func header() string {
	var names []string
	for _, s := range stages {
		names = append(names, s.name+", s", "MiB")
	}
	columns := 4 + 2*len(stages)
	return "| nodes | edges | samples | pairs | " + strings.Join(names, " | ") + " |\n|" + strings.Repeat("--:|", columns)
}

// measure runs the stages on the files of a folder and prints a row.
func measure(folder string) error {
	j := &job{folder: folder}
	var row []string
	for _, s := range stages {
		mark := peak.Start()
		start := time.Now()
		if err := s.do(j); err != nil {
			return fmt.Errorf("%s: %w", s.name, err)
		}
		took := time.Since(start)
		highest, _ := mark.Bytes()
		row = append(row, fmt.Sprintf("%.3g", took.Seconds()), fmt.Sprint(highest>>20))
	}
	n := j.samples.Len()
	fmt.Printf("| %d | %d | %d | %d | %s |\n", j.net.Order(), j.net.Size(), n, n*(n-1)/2, strings.Join(row, " | "))
	return nil
}

func (j *job) load() (err error) {
	if j.net, _, err = graphio.ReadNetwork(filepath.Join(j.folder, "edges.csv"), "", graphio.NetworkOptions{}); err != nil {
		return err
	}
	amounts, _, err := graphio.ReadSamples(filepath.Join(j.folder, "samples.csv"), j.net, graphio.SampleOptions{})
	if err != nil {
		return err
	}
	if err := graphio.CheckConnected(j.net, amounts); err != nil {
		return err
	}
	j.samples, err = amounts.Shares()
	return err
}

func (j *job) layOut() (err error) {
	j.layout, err = dual.NewMultiscale(j.net, dual.Options{})
	return err
}

func (j *job) embed() (err error) {
	j.embedding, err = j.layout.Embed(context.Background(), j.samples, 0, nil)
	return err
}

// matrix takes blocks of 16 samples against 16, by one goroutine.
func (j *job) matrix() error {
	const block = 16
	weights := j.embedding.Theory()
	part := make([]float64, block*block)
	n, sum := j.embedding.Rows, 0.0
	for a := 0; a < n; a += block {
		for b := a; b < n; b += block {
			aEnd, bEnd := min(n, a+block), min(n, b+block)
			j.embedding.Distances(part, a, aEnd, b, bEnd, weights)
			for _, d := range part[:(aEnd-a)*(bEnd-b)] {
				sum += d
			}
		}
	}
	if !(sum > 0) {
		return fmt.Errorf("distances sum to %v", sum)
	}
	return nil
}

func (j *job) calibrate() error {
	j.layout, j.embedding = nil, nil
	r, err := pairwise.Multiscale(context.Background(), j.net, j.samples, pairwise.Options{Calibrate: -1, Seed: 1})
	if err == nil && r.Calibration == nil {
		err = fmt.Errorf("no calibration")
	}
	return err
}

func (j *job) exact() error {
	r, err := exact.Solve(j.net, j.samples.At(0), j.samples.At(j.samples.Len()-1), exact.Options{Shares: true})
	if err != nil {
		return err
	}
	return r.Verify()
}

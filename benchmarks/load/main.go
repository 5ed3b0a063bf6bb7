// Command load measures how fast files are read, against plain readers of the
// same bytes in the same run.
//
//	go run ./benchmarks/load
//	go run ./benchmarks/load --edges 100000 --runs 3
//
// It writes a road-like network and samples into a temporary folder and prints
// a Markdown table: medians of the runs, and the time of others to barrow's:
// encoding/csv that splits the same rows and reads a number of each, and checks
// and keeps nothing; the same with names numbered in a map and rows kept; and
// reading the bytes alone. barrow sums up a SHA-256, checks every field, looks
// for rows that stand twice, and builds the network or the samples.
package main

import (
	"bufio"
	"encoding/csv"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/pflag"

	"example.org/barrow/benchmarks/internal/peak"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func main() {
	edges := pflag.Int("edges", 1_000_000, "of the network")
	samples := pflag.Int("samples", 20, "over its nodes")
	runs := pflag.Int("runs", 5, "of every reader")
	pflag.Parse()
	if err := measure(*edges, *samples, *runs); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

// A file is what is read, and how barrow does.
type file struct {
	name  string
	write func(io.Writer) error
	read  func(path string) error
	float int // column that holds a number
}

func measure(edges, count, runs int) error {
	dir, err := os.MkdirTemp("", "load")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	net := graphiotest.Road(edges*5/8, 1)
	list := make([]graphio.Sample, count)
	for i := range list {
		list[i] = graphiotest.Counts(graphiotest.Smooth(net, uint64(i+1)), 2*net.Order(), uint64(i+1))
		list[i].Name = fmt.Sprintf("hour-%03d", i)
	}
	samples, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		return err
	}
	readNetwork := func(path string) error {
		_, _, err := graphio.ReadNetwork(path, "", graphio.NetworkOptions{})
		return err
	}
	readSamples := func(path string) error {
		_, _, err := graphio.ReadSamples(path, net, graphio.SampleOptions{})
		return err
	}
	files := []file{
		{"edges.csv", func(w io.Writer) error { return graphio.WriteNetwork(w, net) }, readNetwork, 2},
		{"edges.csv.gz", func(w io.Writer) error { return graphio.WriteNetwork(w, net) }, readNetwork, -1},
		{"edges.csv.zst", func(w io.Writer) error { return graphio.WriteNetwork(w, net) }, readNetwork, -1},
		{"samples-long.csv", func(w io.Writer) error { return graphio.WriteSamples(w, net, samples) }, readSamples, 2},
		{"samples-wide.csv", func(w io.Writer) error { return graphio.WriteWide(w, net, samples) }, readSamples, 1},
	}
	fmt.Printf("%d edges, %d nodes, %d samples\n\n", net.Size(), net.Order(), count)
	fmt.Println("| file | MB | barrow, s | MB/s | peak MiB | encoding/csv : barrow | with names : barrow | bytes only : barrow |")
	fmt.Println("|---|--:|--:|--:|--:|--:|--:|--:|")
	for _, f := range files {
		if err := f.measure(dir, runs); err != nil {
			return fmt.Errorf("%s: %w", f.name, err)
		}
	}
	return nil
}

func (f file) measure(dir string, runs int) error {
	path := filepath.Join(dir, f.name)
	if err := graphio.WriteAtomic(path, f.write); err != nil {
		return err
	}
	info, err := os.Stat(path)
	if err != nil {
		return err
	}
	readers := []func(string) error{f.read, readPlain}
	if f.float >= 0 {
		readers = append(readers, f.readCSV)
		if f.float == 2 {
			readers = append(readers, f.readNamed)
		}
	}
	times := make([][]float64, len(readers))
	mark := peak.Start()
	if err := f.read(path); err != nil {
		return err
	}
	_, grown := mark.Bytes()
	for range runs {
		for k, read := range readers {
			start := time.Now()
			if err := read(path); err != nil {
				return err
			}
			times[k] = append(times[k], time.Since(start).Seconds())
		}
	}
	middle := make([]float64, len(readers))
	for k := range times {
		slices.Sort(times[k])
		middle[k] = times[k][runs/2]
	}
	mb := float64(info.Size()) / 1e6
	byCSV, named := "", ""
	if len(middle) > 2 {
		byCSV = fmt.Sprintf("%.2f", middle[2]/middle[0])
	}
	if len(middle) > 3 {
		named = fmt.Sprintf("%.2f", middle[3]/middle[0])
	}
	fmt.Printf("| %s | %.1f | %.3f | %.0f | %d | %s | %s | %.3f |\n", f.name, mb, middle[0], mb/middle[0], grown>>20, byCSV, named, middle[1]/middle[0])
	return nil
}

func readPlain(path string) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	_, err = io.CopyBuffer(struct{ io.Writer }{io.Discard}, struct{ io.Reader }{f}, make([]byte, 1<<18))
	return err
}

// readCSV splits every row and reads one number of it.
func (f file) readCSV(path string) error {
	in, err := os.Open(path)
	if err != nil {
		return err
	}
	defer in.Close()
	r := csv.NewReader(bufio.NewReaderSize(in, 1<<18))
	r.ReuseRecord = true
	if _, err := r.Read(); err != nil {
		return err
	}
	for {
		row, err := r.Read()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		if _, err := strconv.ParseFloat(row[f.float], 64); err != nil {
			return err
		}
	}
}

// readNamed does the same and numbers the names of every row, as a plain
// program would that wants to use them.
func (f file) readNamed(path string) error {
	in, err := os.Open(path)
	if err != nil {
		return err
	}
	defer in.Close()
	r := csv.NewReader(bufio.NewReaderSize(in, 1<<18))
	r.ReuseRecord = true
	if _, err := r.Read(); err != nil {
		return err
	}
	number := map[string]int32{}
	type entry struct {
		a, b  int32
		value float64
	}
	var kept []entry
	numbered := func(name string) int32 {
		v, known := number[name]
		if !known {
			v = int32(len(number))
			number[strings.Clone(name)] = v
		}
		return v
	}
	for {
		row, err := r.Read()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		x, err := strconv.ParseFloat(row[f.float], 64)
		if err != nil {
			return err
		}
		kept = append(kept, entry{numbered(row[0]), numbered(row[1]), x})
	}
}

// Command pipeline measures the stages of a run, from files to distances, on
// road-like networks.
//
//	go run ./benchmarks/pipeline
//	go run ./benchmarks/pipeline --sizes 100000 --samples 1000
//
// For each size it writes a network and samples as input files and starts a
// process of its own, which times the stages: load (read and check the files),
// lay out (choose times and levels), embed (all samples), matrix (all pairs from
// the embedding), calibrate (the whole calibrated matrix once more, with the
// pairs solved exactly) and exact (one pair, cold, with its certificate). It
// prints a Markdown table: seconds, and the most memory the process took
// during the stage.
package main

import (
	"bufio"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"github.com/spf13/pflag"
)

func main() {
	if len(os.Args) == 3 && os.Args[1] == "measure" {
		exit(measure(os.Args[2]))
		return
	}
	sizes := pflag.IntSlice("sizes", []int{1000, 10000, 100000}, "nodes of the networks")
	count := pflag.Int("samples", 100, "samples on each")
	hits := pflag.Int("counts", 20000, "counts in each sample")
	seed := pflag.Uint64("seed", 1, "of networks and samples")
	pflag.Parse()
	fmt.Println(header())
	for _, n := range *sizes {
		exit(one(n, *count, *hits, *seed))
	}
}

func exit(err error) {
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

// one writes the files of a size and has another process measure them.
func one(n, count, hits int, seed uint64) error {
	folder, err := os.MkdirTemp("", "pipeline")
	if err != nil {
		return err
	}
	defer os.RemoveAll(folder)
	net := graphiotest.Road(n, seed)
	if err := write(filepath.Join(folder, "edges.csv"), func(w *bufio.Writer) { writeEdges(w, net) }); err != nil {
		return err
	}
	if err := write(filepath.Join(folder, "samples.csv"), func(w *bufio.Writer) { writeSamples(w, net, count, hits, seed) }); err != nil {
		return err
	}
	self, err := os.Executable()
	if err != nil {
		return err
	}
	cmd := exec.Command(self, "measure", folder)
	cmd.Stdout, cmd.Stderr = os.Stdout, os.Stderr
	return cmd.Run()
}

func write(path string, do func(w *bufio.Writer)) error {
	file, err := os.Create(path)
	if err != nil {
		return err
	}
	defer file.Close()
	w := bufio.NewWriterSize(file, 1<<20)
	do(w)
	return w.Flush()
}

func writeEdges(w *bufio.Writer, net *graphio.Network) {
	fmt.Fprintln(w, "from,to,length")
	for _, e := range net.EdgeList() {
		fmt.Fprintf(w, "%s,%s,%v\n", net.Name(int(e.From)), net.Name(int(e.To)), e.Length)
	}
}

// writeSamples draws counts from mixtures of ten smooth samples.
func writeSamples(w *bufio.Writer, net *graphio.Network, count, hits int, seed uint64) {
	base := make([][]float64, 10)
	for k := range base {
		base[k] = make([]float64, net.Order())
		s := graphiotest.Smooth(net, seed+uint64(k))
		s.Dense(base[k], 1/s.Total())
	}
	rng := rand.New(rand.NewPCG(seed, 1))
	fmt.Fprintln(w, "sample,node,value")
	for i := range count {
		mix := graphio.Sample{Name: "mixture"}
		share := make([]float64, len(base))
		for k := range share {
			share[k] = rng.ExpFloat64()
		}
		for v := range net.Order() {
			x := 0.0
			for k := range base {
				x += share[k] * base[k][v]
			}
			mix.Nodes, mix.Values = append(mix.Nodes, int32(v)), append(mix.Values, x)
		}
		s := graphiotest.Counts(mix, hits, seed+uint64(i))
		for k, v := range s.Nodes {
			fmt.Fprintf(w, "s%d,%s,%v\n", i, net.Name(int(v)), s.Values[k])
		}
	}
}

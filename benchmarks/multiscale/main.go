// Command multiscale measures the multiscale engine: what whole matrices take,
// how the time of the embedding grows, how fast vectors are compared, and how
// good the estimates are on pairs held out.
//
//	go run ./benchmarks/multiscale whole
//	go run ./benchmarks/multiscale linear
//	go run ./benchmarks/multiscale compare
//	go run ./benchmarks/multiscale accuracy --data FOLDER
//
// Each prints a Markdown table. whole runs each case in a process of its own, so
// that the memory is its own. Ratios are to references measured in the same run:
// a plain loop that copies memory, and additions of absolute differences on
// values that stay in registers.
package main

import (
	"fmt"
	"os"

	"github.com/spf13/pflag"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func main() {
	if err := run(os.Args[1:]); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(args []string) error {
	what := ""
	if len(args) > 0 {
		what, args = args[0], args[1:]
	}
	flags := pflag.NewFlagSet(what, pflag.ExitOnError)
	cases := flags.StringSlice("cases", []string{"1000x100000", "10000x10000", "200x1000000"}, "samples x nodes of whole")
	memory := flags.StringSlice("memory", []string{"4", "4", "8"}, "GiB for each case of whole")
	sizes := flags.IntSlice("sizes", []int{10_000, 31_600, 100_000, 316_000, 1_000_000}, "nodes of linear")
	runs := flags.Int("runs", 5, "runs of linear and compare, of which the median counts")
	data := flags.String("data", "", "a folder of real sets for accuracy; \"\" for generated networks alone")
	seeds := flags.Int("seeds", 3, "choices of pairs for accuracy, of which the median counts")
	if err := flags.Parse(args); err != nil {
		return err
	}
	switch what {
	case "whole":
		return wholes(*cases, *memory)
	case "one": // what whole starts
		return one(*cases, *memory)
	case "linear":
		return linear(*sizes, *runs)
	case "compare":
		return compare(*runs)
	case "accuracy":
		return accuracy(*data, *seeds)
	}
	return fmt.Errorf("want whole, linear, compare or accuracy")
}

// mixtures are samples of counts drawn from mixtures of ten smooth ones; with
// hits of 0 they are the mixtures themselves.
func mixtures(net *graphio.Network, count, hits int) *graphio.Samples {
	base := make([][]float64, 10)
	for k := range base {
		base[k] = make([]float64, net.Order())
		s := graphiotest.Smooth(net, uint64(k))
		s.Dense(base[k], 1/s.Total())
	}
	rng := newRand(uint64(count))
	list := make([]graphio.Sample, count)
	for i := range list {
		mix := graphio.Sample{Nodes: make([]int32, net.Order()), Values: make([]float64, net.Order())}
		for v := range mix.Nodes {
			mix.Nodes[v] = int32(v)
		}
		for _, b := range base {
			share := rng.ExpFloat64()
			for v, x := range b {
				mix.Values[v] += share * x
			}
		}
		list[i] = mix
		if hits > 0 {
			list[i] = graphiotest.Counts(mix, hits, uint64(i))
		}
	}
	return graphiotest.Samples(net, list...)
}

// Command exact measures barrow's exact solver side by side with LEMON's.
//
//	go run ./benchmarks/exact
//	go run ./benchmarks/exact --sizes 1000000 --families road --samples smooth --runs 1
//	go run ./benchmarks/exact --claims --sizes 10000,100000
//	go run ./benchmarks/exact --stress 5m
//
// Each instance is written to a file in whole numbers. Then, run after run,
// every solver in turn solves it in a process of its own, so that all see the
// same machine; short runs are repeated in it, once it is warm. Optima must agree to the last digit. It prints a Markdown
// table. With --claims and --stress it runs barrow alone. Time runs from a network in memory to the optimum, what prepares a
// solver included. Seconds and MiB are medians; a ratio is the median over the runs of the
// other's time to barrow's in the same run, with the least and the greatest.
package main

import (
	"fmt"
	"os"
	"path/filepath"
	"time"

	"github.com/spf13/pflag"
)

type options struct {
	sizes          []int
	families       []string
	samples        []string
	runs           int
	seed           uint64
	limit          time.Duration
	slow           time.Duration
	claims         bool
	stress         time.Duration
	source, lemon  string
	data, distance string
}

func main() {
	if len(os.Args) == 3 && os.Args[1] == "solve" {
		if err := solveFile(os.Args[2]); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		return
	}
	var opt options
	pflag.IntSliceVar(&opt.sizes, "sizes", []int{1000, 10000, 100000}, "nodes of generated networks")
	pflag.StringSliceVar(&opt.families, "families", []string{"road", "grid", "knn", "scale-free"}, "of generated networks; also unit-grid; \"\" for none")
	pflag.StringSliceVar(&opt.samples, "samples", []string{"smooth", "sparse", "counts", "point"}, "kinds of samples; also noise")
	pflag.IntVar(&opt.runs, "runs", 5, "runs of every solver")
	pflag.Uint64Var(&opt.seed, "seed", 1, "of networks and samples")
	pflag.DurationVar(&opt.limit, "limit", 2*time.Minute, "time for one run, reading the instance included")
	pflag.DurationVar(&opt.slow, "slow", 20*time.Second, "a solver whose first run takes longer is not run again on that instance")
	pflag.StringVar(&opt.source, "lemon-source", "benchmarks/exact/lemon/lemon.cc", "the driver to build")
	pflag.StringVar(&opt.data, "data", "", "a folder of real sets to measure as well")
	pflag.StringVar(&opt.distance, "pairs", "testdata/reference_distances.csv", "which pairs of the real sets")
	pflag.BoolVar(&opt.claims, "claims", false, "measure barrow alone: ties, empty areas, gaps, unmatched mass, pairs in a row")
	pflag.DurationVar(&opt.stress, "stress", 0, "solve random cases for so long, and check every proof")
	pflag.Parse()
	run := measure
	switch {
	case opt.claims:
		run = func(opt options) error {
			for _, n := range opt.sizes {
				if err := claims(n, opt.runs, opt.seed); err != nil {
					return err
				}
			}
			return nil
		}
	case opt.stress > 0:
		run = func(opt options) error { return stress(opt.stress, opt.seed) }
	}
	if err := run(opt); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func measure(opt options) error {
	folder, err := os.MkdirTemp("", "exact")
	if err != nil {
		return err
	}
	defer os.RemoveAll(folder)
	if opt.lemon, err = buildLemon(opt.source, folder); err != nil {
		fmt.Fprintln(os.Stderr, err)
	}
	printHeader()
	for _, n := range opt.sizes {
		for _, family := range opt.families {
			if family == "" {
				continue
			}
			net, err := makeNetwork(family, n, opt.seed)
			if err != nil {
				return err
			}
			for _, kind := range opt.samples {
				p, q, err := makeSamples(kind, net, opt.seed)
				if err != nil {
					return err
				}
				if err := compare(newInstance(family, kind, net, p, q), folder, opt); err != nil {
					return err
				}
			}
		}
	}
	if opt.data == "" {
		return nil
	}
	real, err := realInstances(opt.data, opt.distance)
	if err != nil {
		return err
	}
	for _, in := range real {
		if err := compare(in, folder, opt); err != nil {
			return err
		}
	}
	return nil
}

// compare runs all solvers on an instance in turn and prints its row.
func compare(in instance, folder string, opt options) error {
	path := filepath.Join(folder, "instance.txt")
	file, err := os.Create(path)
	if err != nil {
		return err
	}
	if err := in.write(file); err != nil {
		return err
	}
	if err := file.Close(); err != nil {
		return err
	}
	self, err := os.Executable()
	if err != nil {
		return err
	}
	commands := [][]string{{self, "solve", path}}
	if opt.lemon != "" {
		commands = append(commands, []string{opt.lemon, "network-simplex", path}, []string{opt.lemon, "cost-scaling", path})
	}
	runs := make([][]run, len(commands))
	for range opt.runs {
		for k, command := range commands {
			if k > 0 && len(runs[k]) > 0 && runs[k][0].seconds > opt.slow.Seconds() {
				continue
			}
			r, err := solveBy(opt.limit, command...)
			if err != nil {
				return err
			}
			runs[k] = append(runs[k], r)
			if k == 0 && r.late {
				return fmt.Errorf("%s of %d nodes, %s: barrow took more than %v", in.family, in.nodes, in.samples, opt.limit)
			}
			if want := runs[0][0].optimum; !r.late && r.optimum != want {
				return fmt.Errorf("%s of %d nodes, %s: %v found %s, barrow %s", in.family, in.nodes, in.samples, command[:2], r.optimum, want)
			}
		}
	}
	printRow(in, runs)
	return nil
}

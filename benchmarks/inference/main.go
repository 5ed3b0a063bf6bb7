// Command inference measures what tests are worth: how often they are called on
// data without effect, how often on planted shifts, and what they take.
//
//	go run ./benchmarks/inference
//	go run ./benchmarks/inference --sets 200 --only levels
//
// It prints Markdown tables.
package main

import (
	"context"
	"fmt"
	"os"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"
	"time"

	"github.com/spf13/pflag"
	"gonum.org/v1/gonum/stat/distuv"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/inference/nulls"
)

func main() {
	sets := pflag.Int("sets", 1000, "of data without effect, for every design")
	only := pflag.StringSlice("only", []string{"levels", "power", "speed"}, "which tables")
	picture := pflag.String("picture", "", "file for the power curves, .svg or .png")
	pflag.Parse()
	for _, t := range []struct {
		name string
		run  func() error
	}{{"levels", func() error { return levels(*sets) }}, {"power", func() error { return power(*picture) }}, {"speed", speed}} {
		if !slices.Contains(*only, t.name) {
			continue
		}
		if err := t.run(); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		fmt.Println()
	}
}

// limits are the 99 % interval of a binomial count.
func limits(n int, p float64) (low, high int) {
	b := distuv.Binomial{N: float64(n), P: p}
	for b.CDF(float64(low)) < 0.005 {
		low++
	}
	for high = low; b.CDF(float64(high)) < 0.995; high++ {
	}
	return low, high
}

// levels counts how often a test is called where there is nothing.
func levels(sets int) error {
	low5, high5 := limits(sets, 0.05)
	low1, high1 := limits(sets, 0.01)
	fmt.Printf("| test and design | called at 5 %% in %d sets (%d–%d) | at 1 %% (%d–%d) |\n|---|--:|--:|\n", sets, low5, high5, low1, high1)
	mark := func(d nulls.Design, count, low, high int) string {
		switch {
		case count > high && d.Note == "":
			return fmt.Sprintf("**%d, too often**", count)
		case count < low && !d.Conservative:
			return fmt.Sprintf("**%d, too seldom**", count)
		}
		return fmt.Sprint(count)
	}
	for _, d := range nulls.Designs() {
		p, err := ps(d, sets)
		if err != nil {
			return err
		}
		five, one := 0, 0
		for _, x := range p {
			if x <= 0.05*(1+1e-9) {
				five++
			}
			if x <= 0.01*(1+1e-9) {
				one++
			}
		}
		name := d.Name
		if d.Note != "" {
			name += " (" + d.Note + ")"
		}
		fmt.Printf("| %s | %s | %s |\n", name, mark(d, five, low5, high5), mark(d, one, low1, high1))
	}
	return nil
}

// ps runs a design on all processors.
func ps(d nulls.Design, sets int) ([]float64, error) {
	p := make([]float64, sets)
	var next atomic.Int64
	var all sync.WaitGroup
	var failed atomic.Pointer[error]
	for range runtime.GOMAXPROCS(0) {
		all.Go(func() {
			for k := next.Add(1) - 1; k < int64(sets); k = next.Add(1) - 1 {
				x, err := d.P(uint64(k))
				if err != nil {
					failed.Store(&err)
					return
				}
				p[k] = x
			}
		})
	}
	all.Wait()
	if err := failed.Load(); err != nil {
		return nil, fmt.Errorf("%s: %w", d.Name, *err)
	}
	return p, nil
}

// speed times permutation tests of large matrices.
func speed() error {
	fmt.Println("| test | samples | permutations | seconds |")
	fmt.Println("|---|--:|--:|--:|")
	for _, size := range []struct{ samples, permutations int }{{2000, 999}, {500, 9999}} {
		d := randomMatrix(size.samples)
		factor := inference.Variable{Name: "g"}
		for i := range size.samples {
			factor.Labels = append(factor.Labels, fmt.Sprint(i%3))
		}
		opt := inference.Options{Permutations: size.permutations, Seed: 1}
		for _, t := range []struct {
			name string
			run  func() error
		}{
			{"pseudo-F", func() error {
				_, err := inference.PseudoF(context.Background(), d, factor, inference.Scheme{}, opt)
				return err
			}},
			{"energy", func() error {
				_, err := inference.Energy(context.Background(), d, factor, inference.Scheme{}, opt)
				return err
			}},
			{"dispersion", func() error {
				_, err := inference.Dispersion(context.Background(), d, factor, inference.Scheme{}, opt)
				return err
			}},
			{"Mantel", func() error {
				_, err := inference.Mantel(context.Background(), d, d, inference.Pearson, inference.Scheme{}, opt)
				return err
			}},
		} {
			start := time.Now()
			if err := t.run(); err != nil {
				return err
			}
			fmt.Printf("| %s | %d | %d | %.2f |\n", t.name, size.samples, size.permutations, time.Since(start).Seconds())
		}
	}
	return nil
}

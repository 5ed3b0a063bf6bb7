package main

import (
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"strings"
	"time"

	"example.org/barrow/benchmarks/internal/peak"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio/graphiotest"
)

func newRand(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 99)) }

// wholes measures whole matrices, calibration included, each in a process of
// its own.
func wholes(cases, memory []string) error {
	if len(memory) != len(cases) {
		return fmt.Errorf("%d cases and %d sizes of memory; want as many", len(cases), len(memory))
	}
	self, err := os.Executable()
	if err != nil {
		return err
	}
	fmt.Println("| samples | nodes | edges | pairs | calibrate, s | embed, s | estimate, s | **whole, s** | peak, GiB | vectors | median error | 95th percentile | Spearman |")
	fmt.Println("|--:|--:|--:|--:|--:|--:|--:|--:|--:|---|--:|--:|--:|")
	for i, c := range cases {
		cmd := exec.Command(self, "one", "--cases", c, "--memory", memory[i])
		cmd.Stdout, cmd.Stderr = os.Stdout, os.Stderr
		if err := cmd.Run(); err != nil {
			return err
		}
	}
	return nil
}

// one measures a case: from a network and samples in memory to the matrix.
func one(cases, memory []string) error {
	var count, nodes int
	var gibi uint64
	if _, err := fmt.Sscanf(cases[0]+" "+memory[0], "%dx%d %d", &count, &nodes, &gibi); err != nil {
		return fmt.Errorf("case %q with %q GiB: %w", cases[0], memory[0], err)
	}
	net := graphiotest.Road(nodes, 1)
	samples := mixtures(net, count, 20_000)
	mark := peak.Start()
	var phases pairwise.Phases
	begin := time.Now()
	r, err := pairwise.Multiscale(context.Background(), net, samples, pairwise.Options{
		Shares: true, Calibrate: -1, Seed: 1, Memory: gibi << 30, Phases: &phases,
	})
	if err != nil {
		return err
	}
	took := time.Since(begin).Seconds()
	highest, _ := mark.Bytes()
	row := []string{fmt.Sprint(count), fmt.Sprint(nodes), fmt.Sprint(net.Size()), fmt.Sprint(len(r.Matrix.Value))}
	for _, p := range phases {
		row = append(row, fmt.Sprintf("%.1f", p.Seconds))
	}
	held := "memory"
	if r.OnDisk {
		held = "disk"
	}
	c := r.Calibration
	row = append(row, fmt.Sprintf("**%.1f**", took), fmt.Sprintf("%.2f", float64(highest)/(1<<30)),
		fmt.Sprintf("%d values, %s", r.Width, held), percent(c.MedianError), percent(c.P95), fmt.Sprintf("%.4f", c.Spearman))
	fmt.Printf("| %s |\n", strings.Join(row, " | "))
	return nil
}

func percent(x float64) string { return fmt.Sprintf("%.2f %%", 100*x) }

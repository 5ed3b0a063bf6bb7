package main

import (
	"context"
	"fmt"
	"math"
	"slices"
	"sync"
	"time"

	"gonum.org/v1/gonum/stat"

	"example.org/barrow/dual"
	"example.org/barrow/graphio/graphiotest"
)

// linear measures the embedding on networks of growing size and fits the
// exponent of its time in edges × samples, and compares it with copying as many
// bytes as it moves.
func linear(sizes []int, runs int) error {
	const count = 64
	fmt.Println("| nodes | edges | samples | scales, ns an edge and sample | flows, ns | both, ns | moved, bytes | moved at the speed of copying, ns | embedding : copying |")
	fmt.Println("|--:|--:|--:|--:|--:|--:|--:|--:|--:|")
	var size, took [3][]float64
	for _, n := range sizes {
		net := graphiotest.Road(n, 1)
		samples, err := mixtures(net, count, 20_000).Shares()
		if err != nil {
			return err
		}
		work := float64(net.Size() * count)
		scales, err := estimator(net, nil, true)
		if err != nil {
			return err
		}
		flows, err := estimator(net, [][]float64{nil}, false)
		if err != nil {
			return err
		}
		var seconds [3][]float64
		for range runs {
			sum := 0.0
			for i, e := range []*dual.Estimator{scales, flows} {
				begin := time.Now()
				if _, err := e.Embed(context.Background(), samples, 0, nil); err != nil {
					return err
				}
				s := time.Since(begin).Seconds()
				seconds[i] = append(seconds[i], s)
				sum += s
			}
			seconds[2] = append(seconds[2], sum)
		}
		moved := float64(scales.Moved()+flows.Moved()) * count
		copying := moved / copySpeed()
		var cells [3]float64
		for i, s := range seconds {
			slices.Sort(s)
			cells[i] = s[len(s)/2]
			size[i], took[i] = append(size[i], math.Log(work)), append(took[i], math.Log(cells[i]))
		}
		each := 1e9 / work
		fmt.Printf("| %d | %d | %d | %.2f | %.2f | %.2f | %.0f | %.2f | **%.2f** |\n", n, net.Size(), count,
			cells[0]*each, cells[1]*each, cells[2]*each, moved/work, copying*each, cells[2]/copying)
	}
	for i, name := range []string{"scales", "flows", "both"} {
		_, slope := stat.LinearRegression(size[i], took[i], nil, false)
		fmt.Printf("\nexponent of the time in edges × samples, %s: **%.3f**", name, slope)
	}
	fmt.Println()
	return nil
}

// copySpeed is how many bytes a second all processors read and write together
// when they copy blocks that no cache holds.
func copySpeed() float64 {
	const size = 1 << 26
	threads := threads()
	from, to := make([][]float32, threads), make([][]float32, threads)
	for i := range from {
		from[i], to[i] = make([]float32, size/4), make([]float32, size/4)
	}
	best := 0.0
	for range 5 {
		var wait sync.WaitGroup
		begin := time.Now()
		for i := range from {
			wait.Add(1)
			go func() { copy(to[i], from[i]); wait.Done() }()
		}
		wait.Wait()
		best = max(best, float64(2*size*threads)/time.Since(begin).Seconds())
	}
	return best
}

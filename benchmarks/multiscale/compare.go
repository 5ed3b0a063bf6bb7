package main

import (
	"fmt"
	"runtime"
	"slices"
	"sync"
	"time"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

func threads() int { return runtime.GOMAXPROCS(0) }

func estimator(net *graphio.Network, flows [][]float64, scales bool) (*dual.Estimator, error) {
	t, err := dual.NewTerms(net, dual.TermOptions{Flows: flows, NoScales: !scales})
	if err != nil {
		return nil, err
	}
	weights := make([]float64, len(t.Names()))
	for k := range weights {
		weights[k] = 1
	}
	return t.Weigh(weights)
}

// compare measures the stage that compares all pairs of vectors against the most
// absolute differences that the processors can add up.
func compare(runs int) error {
	fmt.Println("| samples | values a vector | processors | ns a value | peak, ns a value | share of the peak |")
	fmt.Println("|--:|--:|--:|--:|--:|--:|")
	for _, c := range []struct{ rows, width int }{{256, 40_000}, {128, 400_000}, {64, 2_000_000}} {
		e := &dual.Embedding{Width: c.width, Rows: c.rows, Vectors: make([]float32, c.rows*c.width)}
		for i := range e.Vectors {
			e.Vectors[i] = float32(i%13) / 16
		}
		var own, top []float64
		for range runs {
			own = append(own, allPairs(e))
			top = append(top, peakSpeed(threads()))
		}
		slices.Sort(own)
		slices.Sort(top)
		mine, peak := own[len(own)/2], top[len(top)/2]
		fmt.Printf("| %d | %d | %d | %.4f | %.4f | **%.2f** |\n", c.rows, c.width, threads(), 1e9/mine, 1e9/peak, mine/peak)
	}
	return nil
}

// allPairs compares all pairs in squares of 32 samples, on all processors, and
// returns the values compared in a second.
func allPairs(e *dual.Embedding) float64 {
	const side = 32
	type square struct{ i, j int }
	squares := make(chan square, e.Rows*e.Rows)
	pairs := 0
	for i := 0; i < e.Rows; i += side {
		for j := i; j < e.Rows; j += side {
			squares <- square{i, j}
			pairs += side * side
		}
	}
	close(squares)
	var wait sync.WaitGroup
	begin := time.Now()
	for range threads() {
		wait.Add(1)
		go func() {
			defer wait.Done()
			dst := make([]float64, side*side)
			for s := range squares {
				e.AddDistances(dst, s.i, s.i+side, s.j, s.j+side)
			}
		}()
	}
	wait.Wait()
	return float64(pairs) * float64(e.Width) / time.Since(begin).Seconds()
}

package main

import (
	"sync"
	"time"
)

// peakSpeed is how many absolute differences a second the processors take and
// add up in float32 where nothing but registers is touched: the best of the
// instructions they have.
func peakSpeed(threads int) float64 {
	best := 0.0
	for _, k := range kernels() {
		var wait sync.WaitGroup
		begin := time.Now()
		for range threads {
			wait.Add(1)
			go func() { defer wait.Done(); k.run(peakRounds) }()
		}
		wait.Wait()
		best = max(best, float64(peakRounds*k.values*threads)/time.Since(begin).Seconds())
	}
	return best
}

const peakRounds = 1 << 23

// A kernel takes a number of absolute differences in each round.
type kernel struct {
	values int
	run    func(rounds int)
}

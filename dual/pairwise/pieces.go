package pairwise

import (
	"context"
	"sync"
)

// A pair is two samples, from i to j where direction matters.
type pair struct{ i, j int }

// work does tasks 0..tasks-1 on a number of goroutines, each with a function of
// its own from start, and reports each that is done.
//
// Errors: that of the first task that failed, whatever the number of threads:
// tasks are begun in order and those begun are finished. The context's, where
// it ends first.
func work(ctx context.Context, threads, tasks int, progress func(done, total int), start func() func(task int) error) error {
	var (
		wait       sync.WaitGroup
		lock       sync.Mutex
		next, done int
		failed     = tasks
		failure    error
	)
	take := func() int {
		lock.Lock()
		defer lock.Unlock()
		if next >= tasks || failure != nil || ctx.Err() != nil {
			return -1
		}
		next++
		return next - 1
	}
	finish := func(task int, err error) {
		lock.Lock()
		defer lock.Unlock()
		done++
		switch {
		case err == nil:
			progress(done, tasks)
		case task < failed:
			failed, failure = task, err
		}
	}
	for range min(threads, tasks) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			do := start()
			for task := take(); task >= 0; task = take() {
				finish(task, do(task))
			}
		}()
	}
	wait.Wait()
	if err := ctx.Err(); err != nil {
		return err
	}
	return failure
}

// tile is how many samples a side of a square of pairs has that one task
// compares: the vectors of two sides, a strip at a time, fit the second cache.
const tile = 32

// tiles calls compare, on all threads, for squares of pairs that cover those
// with i < j.
func tiles(ctx context.Context, threads, n int, progress func(done, total int), compare func(i0, i1, j0, j1 int)) error {
	type square struct{ i, j int }
	var list []square
	for i := 0; i < n; i += tile {
		for j := i; j < n; j += tile {
			list = append(list, square{i, j})
		}
	}
	return work(ctx, threads, len(list), progress, func() func(int) error {
		return func(task int) error {
			s := list[task]
			compare(s.i, min(n, s.i+tile), s.j, min(n, s.j+tile))
			return nil
		}
	})
}

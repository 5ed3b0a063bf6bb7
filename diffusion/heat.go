package diffusion

import (
	"fmt"
	"runtime"
	"sort"
	"sync"

	"gonum.org/v1/gonum/mat"
)

// HeatOptions says how exactly, and on how many threads, heat is computed.
type HeatOptions struct {
	Tolerance float64 // of the truncation, see Heat; 0 stands for 1e-13
	Threads   int     // 0 stands for the number of processors
}

// longest is the largest time Heat accepts, in units of 2/bound: its order is
// about 10⁶ recursion steps, far past mixing on any network that fits memory
// and not stretched by hand.
const longest = 1e10

// Heat returns exp(-tL) x for every t of times, in their order. x is nodes ×
// samples, row-major, and kept; t >= 0 counts mean steps of the walk. All
// times share one Chebyshev recursion. Each column is within Tolerance times
// the norm of its column of x, in the 2-norm weighted by 1/capacity; the total
// mass of a column is kept to that accuracy too. The result does not depend on
// Threads.
//
// Errors: x of another number of rows, no columns, times that are negative,
// not finite or past 10¹⁰ steps.
//
// Cost: O(√(t log 1/Tolerance) (nodes + edges) samples) for the largest t, and
// O(nodes samples) for each time.
func (w *Walk) Heat(x *mat.Dense, times []float64, opt HeatOptions) ([]*mat.Dense, error) {
	rows, cols := x.Dims()
	if rows != w.Order() {
		return nil, fmt.Errorf("diffusion: a block of %d rows for %d nodes; want one row a node", rows, w.Order())
	}
	order := make([]int, len(times))
	for i, t := range times {
		if !(t >= 0) || t*w.bound/2 > longest {
			return nil, fmt.Errorf("diffusion: time %v; want 0 to %g mean steps", t, longest)
		}
		order[i] = i
	}
	if opt.Tolerance == 0 {
		opt.Tolerance = 1e-13
	}
	if !(opt.Tolerance > 0 && opt.Tolerance < 1) {
		return nil, fmt.Errorf("diffusion: tolerance %v; want above 0 and below 1", opt.Tolerance)
	}
	sort.SliceStable(order, func(i, j int) bool { return times[order[i]] < times[order[j]] })
	ascending := make([]float64, len(times))
	result := make([]*mat.Dense, len(times))
	for k, i := range order {
		ascending[k] = times[i]
		result[i] = mat.NewDense(rows, cols, nil)
	}
	s := newStepper[float64](w)
	parallel((cols+lanes-1)/lanes, opt.Threads, func(panel int) {
		first, width := panel*lanes, min(lanes, cols-panel*lanes)
		block := func() []float64 { return make([]float64, rows*width) }
		in, acc := block(), make([][]float64, len(times))
		for i := range acc {
			acc[i] = block()
		}
		for u := range rows {
			copy(in[u*width:(u+1)*width], x.RawRowView(u)[first:first+width])
		}
		s.heat(acc, in, width, ascending, opt.Tolerance, [2][]float64{block(), block()})
		for k, i := range order {
			for u := range rows {
				copy(result[i].RawRowView(u)[first:first+width], acc[k][u*width:(u+1)*width])
			}
		}
	})
	return result, nil
}

// parallel calls work(0), …, work(jobs-1), each once, on the given number of
// threads (0: the number of processors).
func parallel(jobs, threads int, work func(job int)) {
	if threads <= 0 {
		threads = runtime.GOMAXPROCS(0)
	}
	next := make(chan int)
	var wait sync.WaitGroup
	for range min(threads, jobs) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for job := range next {
				work(job)
			}
		}()
	}
	for job := range jobs {
		next <- job
	}
	close(next)
	wait.Wait()
}

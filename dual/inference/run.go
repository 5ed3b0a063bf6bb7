package inference

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sync"
)

// Options of a test. The zero value draws 999 rearrangements on all processors
// and asks for a level of 5 %.
type Options struct {
	// Permutations is how many rearrangements are drawn; 0 is 999. Where the
	// design has no more distinct ones than one above it, all are gone through.
	Permutations int
	// Level is where P will be called small; 0 is 0.05. A design or a number of
	// permutations that can give no P that small is refused; 1 lets all pass.
	Level float64
	// Stop > 0 ends the drawing once that many reached the observed statistic,
	// with P = Stop/drawn, which keeps the level (Besag & Clifford 1991). Tests
	// that combine statistics draw all.
	Stop int
	Seed uint64
	// Threads is how many goroutines work; 0 is the number of processors. The
	// result does not depend on it.
	Threads int
	// Progress, if set, is told how many rearrangements are done.
	Progress func(done, total int)
}

func (o Options) permutations() int {
	if o.Permutations == 0 {
		return 999
	}
	return o.Permutations
}

func (o Options) level() float64 {
	if o.Level == 0 {
		return 0.05
	}
	return o.Level
}

func (o Options) threads() int {
	if o.Threads <= 0 {
		return runtime.GOMAXPROCS(0)
	}
	return o.Threads
}

func (o Options) check() error {
	if o.Permutations < 0 || o.Stop < 0 {
		return fmt.Errorf("%w: %d permutations, stop after %d; want 0 or more", ErrOption, o.Permutations, o.Stop)
	}
	if !(o.Level >= 0 && o.Level <= 1) {
		return fmt.Errorf("%w: a level of %v; want a share between 0 and 1, such as 0.05", ErrOption, o.Level)
	}
	return nil
}

// An Outcome is an observed statistic among those of rearrangements.
type Outcome struct {
	Statistic float64
	P         float64
	// Error is the standard error of P from drawing; 0 where all rearrangements
	// were gone through.
	Error float64
	// Permutations counts the rearrangements compared with the observed one, or
	// all with it where Exact; Reached, those of them whose statistic is as large
	// or larger, ties within rounding included.
	Permutations, Reached int
	Exact                 bool
	// Distinct is the number of distinct rearrangements; +Inf where too many to
	// count in float64.
	Distinct float64
}

// A job runs the arrangements of a design.
type job struct {
	arranger *arranger
	opt      Options
	exact    bool
	count    int // arrangements to go through, the observed one not counted unless exact
}

func newJob(a *arranger, opt Options) (*job, error) {
	if err := opt.check(); err != nil {
		return nil, err
	}
	j := &job{arranger: a, opt: opt, count: opt.permutations()}
	least := 1 / float64(j.count+1)
	if a.total <= float64(j.count+1) {
		j.exact, j.count, least = true, int(a.total), 1/a.total
	}
	if least > opt.level()*(1+1e-12) {
		if j.exact {
			return nil, fmt.Errorf("%w: the design has %d distinct rearrangements, so P is at least %.3g, above the level %v; want more samples or blocks, or a level that can be reached", ErrFew, j.count, least, opt.level())
		}
		return nil, fmt.Errorf("%w: with %d permutations P is at least %.3g, above the level %v; want %d permutations or more", ErrFew, j.count, least, opt.level(), int(math.Ceil(1/opt.level()))-1)
	}
	return j, nil
}

// arrangement sets dst to number k; number -1 is the observed one.
func (j *job) arrangement(dst []int32, k int) {
	switch {
	case k < 0:
		for i := range dst {
			dst[i] = int32(i)
		}
	case j.exact:
		j.arranger.nth(dst, uint64(k))
	default:
		j.arranger.random(dst, j.opt.Seed, uint64(k))
	}
}

// An evaluation sets out, width values an arrangement, to the statistics of a
// batch. Each goroutine has its own.
type evaluation func(batch [][]int32, out []float64)

// run evaluates the observed arrangement and then all others in batches, and
// hands the values on in order until consume, or the end, says stop.
func (j *job) run(ctx context.Context, width, batch int, evaluate func() evaluation, consume func(k int, values []float64) (more bool)) error {
	threads := j.opt.threads()
	type worker struct {
		eval evaluation
		arr  [][]int32
		out  []float64
	}
	workers := make([]*worker, threads)
	for t := range workers {
		w := &worker{eval: evaluate(), arr: make([][]int32, batch), out: make([]float64, batch*width)}
		for b := range w.arr {
			w.arr[b] = make([]int32, j.arranger.n)
		}
		workers[t] = w
	}
	first := workers[0]
	j.arrangement(first.arr[0], -1)
	first.eval(first.arr[:1], first.out[:width])
	consume(-1, first.out[:width])
	for done := 0; done < j.count; {
		if err := ctx.Err(); err != nil {
			return err
		}
		var all sync.WaitGroup
		for t, w := range workers {
			begin := done + t*batch
			end := min(begin+batch, j.count)
			if begin >= end {
				continue
			}
			all.Go(func() {
				for k := begin; k < end; k++ {
					j.arrangement(w.arr[k-begin], k)
				}
				w.eval(w.arr[:end-begin], w.out[:(end-begin)*width])
			})
		}
		all.Wait()
		for t, w := range workers {
			for b := range batch {
				if k := done + t*batch + b; k < j.count && !consume(k, w.out[b*width:(b+1)*width]) {
					return nil
				}
			}
		}
		done = min(done+threads*batch, j.count)
		if j.opt.Progress != nil {
			j.opt.Progress(done, j.count)
		}
	}
	return nil
}

// tie is how far below the observed statistic one still counts as equal: the
// same arrangement summed in another order differs by rounding.
func tie(observed float64) float64 {
	if math.IsInf(observed, 0) {
		return 0
	}
	return 1e-10 * max(math.Abs(observed), 1e-4)
}

// single runs a test with one statistic, of order 1, an arrangement.
func (j *job) single(ctx context.Context, batch int, evaluate func() evaluation) (Outcome, error) {
	o := Outcome{Exact: j.exact, Distinct: j.arranger.total}
	var threshold, most float64
	var top int // arrangements that share the largest statistic
	stopped := false
	err := j.run(ctx, 1, batch, evaluate, func(k int, values []float64) bool {
		v := values[0]
		if k < 0 {
			o.Statistic = v
			threshold, most = v-tie(v), math.Inf(-1)
			return !math.IsNaN(v)
		}
		o.Permutations++
		if v >= threshold {
			o.Reached++
		}
		switch t := tie(v); {
		case v > most+t:
			most, top = v, 1
		case v >= most-t:
			top++
		}
		stopped = !j.exact && j.opt.Stop > 0 && o.Reached == j.opt.Stop
		return !stopped
	})
	if err != nil {
		return o, err
	}
	if math.IsNaN(o.Statistic) {
		return o, fmt.Errorf("%w: the statistic has no value; do the samples differ at all?", ErrDesign)
	}
	if least := float64(top) / float64(j.count); j.exact && least > j.opt.level()*(1+1e-12) {
		return o, fmt.Errorf("%w: of the %d distinct rearrangements %d share the largest statistic, so P is at least %.3g, above the level %v; want more samples or blocks, or a level that can be reached", ErrFew, j.count, top, least, j.opt.level())
	}
	o.finish(stopped)
	return o, nil
}

// finish sets P and its standard error.
func (o *Outcome) finish(stopped bool) {
	reached, m := float64(o.Reached), float64(o.Permutations)
	switch {
	case o.Exact:
		o.P = reached / m
	case stopped:
		o.P = reached / m
		o.Error = o.P * math.Sqrt((1-o.P)/reached) // of a negative binomial, first order
	default:
		o.P = (reached + 1) / (m + 1)
		o.Error = math.Sqrt(o.P * (1 - o.P) / m)
	}
}

// Permute tests a statistic of one's own, large where there is an effect.
// statistic gets for each sample the number of the one whose labels it is
// given, and is called from several goroutines; its values should be of
// order 1, as ties are told within 1e-10. classes, one a sample, are equal for
// samples whose exchange changes no statistic; nil if there are none such.
func Permute(ctx context.Context, n int, classes []int32, scheme Scheme, opt Options, statistic func(arrangement []int32) float64) (Outcome, error) {
	a, err := scheme.arrange(n, classes)
	if err != nil {
		return Outcome{}, err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return Outcome{}, err
	}
	return j.single(ctx, 16, func() evaluation {
		return func(batch [][]int32, out []float64) {
			for b, arrangement := range batch {
				out[b] = statistic(arrangement)
			}
		}
	})
}

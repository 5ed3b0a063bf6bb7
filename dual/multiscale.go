package dual

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sync"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// Options says how a Multiscale is laid out. The zero value is the default.
type Options struct {
	// Alpha is the exponent of the ground distance that the theoretical
	// weights aim at, above 0 and at most 1; 0 stands for 1.
	Alpha float64
	// Full computes every scale on the network itself instead of on coarser
	// levels: the reference, dearer by far.
	Full bool
	// Width is how long a sample's vector should be at most, in multiples of
	// the number of nodes; 0 stands for 2.5. Networks with many components may
	// need more. It has no effect with Full.
	Width float64
	// Tolerance of the heat kernels, relative; 0 stands for 1e-6.
	Tolerance float64
}

// A Multiscale is the estimator for one network: what embeds samples and makes
// witnesses. It does not change once made, so any number of goroutines may use
// it.
type Multiscale struct {
	net     *graphio.Network
	cascade *diffusion.Cascade
	alpha   float64
	scales  []Scale
}

// A Scale is one term of the estimator.
type Scale struct {
	Name       string  `json:"name"`
	Time       float64 `json:"time"`   // where it begins, in mean steps of the walk
	Begin, End int     `json:"-"`      // its columns
	Weight     float64 `json:"weight"` // c_k by theory, no unit
}

// A Description is the record of the choices made for a network.
type Description struct {
	Alpha float64 `json:"alpha"`
	diffusion.Schedule
	Scales []Scale `json:"scales"`
}

// NewMultiscale chooses times and levels for a network. Errors: options out of
// range. Cost: about that of embedding twenty samples.
func NewMultiscale(net *graphio.Network, opt Options) (*Multiscale, error) {
	if opt.Alpha == 0 {
		opt.Alpha = 1
	}
	if !(opt.Alpha > 0 && opt.Alpha <= 1) {
		return nil, fmt.Errorf("dual: alpha %v; want above 0 and at most 1", opt.Alpha)
	}
	c, err := diffusion.NewCascade(net, diffusion.Options{Full: opt.Full, Width: opt.Width, Tolerance: opt.Tolerance})
	if err != nil {
		return nil, err
	}
	m := &Multiscale{net: net, cascade: c, alpha: opt.Alpha}
	m.name()
	return m, nil
}

// name lists the scales with the weights c_k = t_k^{α/2}. What lies before t_0
// is weighted as if it began at t_0/2, where the next dyadic time would be;
// what is left after the last time by that time.
func (m *Multiscale) name() {
	times := m.cascade.Schedule.Times
	begin := 0
	add := func(name string, time, weigh float64) {
		end := begin + m.cascade.Size(len(m.scales))
		m.scales = append(m.scales, Scale{Name: name, Time: time, Begin: begin, End: end, Weight: math.Pow(weigh, m.alpha/2)})
		begin = end
	}
	add(fmt.Sprintf("0 to %.3g", times[0]), 0, times[0]/2)
	for k, t := range times[:len(times)-1] {
		add(fmt.Sprintf("%.3g to %.3g", t, times[k+1]), t, t)
	}
	last := times[len(times)-1]
	add(fmt.Sprintf("after %.3g", last), last, last)
}

// Describe is the record of the choices made.
func (m *Multiscale) Describe() Description {
	return Description{Alpha: m.alpha, Schedule: m.cascade.Schedule, Scales: m.scales}
}

// Scales lists the terms of the estimator.
func (m *Multiscale) Scales() []Scale { return m.scales }

// Width is the length of a sample's vector.
func (m *Multiscale) Width() int { return m.cascade.Schedule.Width }

// Embed makes the vector of every sample: all scales side by side, unweighted.
// Samples are taken as they are; give shares to compare shares. progress, if
// not nil, is called from time to time with samples done and in all, by one
// goroutine at a time. The result does not depend on threads (0: the number of
// processors).
//
// Errors: samples of another network; the context's, with nothing returned.
// Cost: O(nodes + edges) a sample; 4 Width bytes a sample, and about 64·6
// bytes a node for every thread.
func (m *Multiscale) Embed(ctx context.Context, samples *graphio.Samples, threads int, progress func(done, total int)) (*Embedding, error) {
	if samples.Order() != m.net.Order() {
		return nil, fmt.Errorf("dual: samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), m.net.Order())
	}
	e := &Embedding{Scales: m.scales, Width: m.Width(), Rows: samples.Len()}
	e.Vectors = make([]float32, e.Rows*e.Width)
	panels(ctx, samples.Len(), threads, progress, func(p *diffusion.Panel[float32], first, count int) {
		m.embed(e, p, samples, first, count)
	})
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	return e, nil
}

// panels calls work for every panel of rows, with memory of its thread's own,
// until the context ends.
func panels(ctx context.Context, rows, threads int, progress func(done, total int), work func(p *diffusion.Panel[float32], first, count int)) {
	each(ctx, rows, diffusion.Lanes, threads, progress, func() func(first, count int) {
		var p diffusion.Panel[float32]
		return func(first, count int) { work(&p, first, count) }
	})
}

// each calls work for every batch of rows until the context ends; start makes
// the function of one thread.
func each(ctx context.Context, rows, batch, threads int, progress func(done, total int), start func() func(first, count int)) {
	if threads <= 0 {
		threads = runtime.GOMAXPROCS(0)
	}
	var (
		wait       sync.WaitGroup
		lock       sync.Mutex
		next, done int
	)
	take := func() (first, count int) {
		lock.Lock()
		defer lock.Unlock()
		first = next
		next = min(rows, first+batch)
		return first, next - first
	}
	for range min(threads, (rows+batch-1)/batch) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			work := start()
			for ctx.Err() == nil {
				first, count := take()
				if count == 0 {
					return
				}
				work(first, count)
				lock.Lock()
				done += count
				if progress != nil {
					progress(done, rows)
				}
				lock.Unlock()
			}
		}()
	}
	wait.Wait()
}

func (m *Multiscale) embed(e *Embedding, p *diffusion.Panel[float32], samples *graphio.Samples, first, count int) {
	x := p.Input(m.cascade)
	for l := range count {
		m.fill(x, l, samples.At(first+l))
	}
	m.cascade.Scales(p, func(k int, before, after []float32) {
		for l := range count {
			row := e.Row(first + l)[m.scales[k].Begin:m.scales[k].End]
			for i := range row {
				row[i] = before[i*diffusion.Lanes+l]
			}
			if after == nil {
				continue
			}
			for i := range row {
				row[i] -= after[i*diffusion.Lanes+l]
			}
		}
	})
}

func (m *Multiscale) fill(x []float32, lane int, s graphio.Sample) {
	for i, v := range s.Nodes {
		x[int(v)*diffusion.Lanes+lane] = float32(s.Values[i])
	}
}

// Witness is the potential that attains the estimate of p and q at the given
// weights, one for each scale:
//
//	Σ_k c_k (H_{t_k} - H_{t_{k+1}})ᵀ sign((H_{t_k} - H_{t_{k+1}})(p - q))
//
// with the transpose of exactly what the scales compute (in float64). It shows
// where p and q differ; Repair makes it a proof. Cost: as embedding thirty
// samples; 8 bytes a node for each of twenty or so vectors.
func (m *Multiscale) Witness(p, q graphio.Sample, weights []float64) []float64 {
	x := make([]float64, m.net.Order())
	p.Dense(x, 1)
	q.Dense(x, -1)
	scales := m.cascade.Split(x)
	for k, y := range scales {
		for i, d := range y {
			switch {
			case d > 0:
				y[i] = weights[k]
			case d < 0:
				y[i] = -weights[k]
			default:
				y[i] = 0
			}
		}
	}
	return m.cascade.Join(scales)
}

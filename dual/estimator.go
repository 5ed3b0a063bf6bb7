package dual

import (
	"context"
	"fmt"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// An Estimator is the weighted sum of Terms as one L1 distance: what makes the
// vector of any sample. It does not change once made, so any number of
// goroutines may use it.
type Estimator struct {
	terms  *Terms
	parts  []Scale     // of the vector, all of weight 1
	scales []int       // scale of each of the first parts
	levels []int       // level of each of the parts that follow
	weight [][]float32 // of the nodes of each of all these
	flows  []weighted  // the parts after them
}

// weighted is a flow with the weight of each edge that has one.
type weighted struct {
	flow   *Flow
	edge   []int32
	weight []float32
}

// Weigh gives every term its weight, 0 or more. Terms without weight take no
// room in the vectors.
func (t *Terms) Weigh(weights []float64) (*Estimator, error) {
	if len(weights) != len(t.names) {
		return nil, fmt.Errorf("dual: %d weights for %d terms; want one a term", len(weights), len(t.names))
	}
	e := &Estimator{terms: t}
	width := 0
	add := func(name string, columns int) {
		e.parts = append(e.parts, Scale{Name: name, Begin: width, End: width + columns, Weight: 1})
		width += columns
	}
	for k, reach := range t.reach {
		if !(weights[k] > 0) {
			continue
		}
		w := make([]float32, len(reach))
		for v, r := range reach {
			w[v] = float32(weights[k] * float64(r))
		}
		add(t.names[k], len(w))
		e.scales, e.weight = append(e.scales, k), append(e.weight, w)
	}
	first := len(t.reach)
	if t.levels != nil {
		for k, size := range t.levels.size {
			if weight := weights[first+k]; weight > 0 {
				w := make([]float32, len(size))
				for a, s := range size {
					w[a] = float32(weight * float64(s))
				}
				add(t.names[first+k], len(w))
				e.levels, e.weight = append(e.levels, k), append(e.weight, w)
			}
		}
		first += len(t.levels.parent)
	}
	for i, f := range t.flows {
		group := weights[first : first+t.groups]
		first += t.groups
		part := weighted{flow: f}
		for edge, g := range t.group {
			if group[g] > 0 {
				part.edge, part.weight = append(part.edge, int32(edge)), append(part.weight, float32(group[g]))
			}
		}
		if len(part.edge) > 0 {
			add(fmt.Sprintf("flow %d", i+1), len(part.edge))
			e.flows = append(e.flows, part)
		}
	}
	return e, nil
}

// Width is the length of a sample's vector.
func (e *Estimator) Width() int {
	if len(e.parts) == 0 {
		return 0
	}
	return e.parts[len(e.parts)-1].End
}

// Parts lists what the columns of a vector are.
func (e *Estimator) Parts() []Scale { return e.parts }

// Embed makes the vector of every sample: the L1 distance of two is the
// estimate for them, in the unit of mass times length. It does not depend on
// the other samples, nor on threads (0: the number of processors).
//
// Errors: samples of another network; the context's, with nothing returned.
// Cost: as Multiscale.Embed and Flow.Embed together; 4 Width bytes a sample.
func (e *Estimator) Embed(ctx context.Context, samples *graphio.Samples, threads int, progress func(done, total int)) (*Embedding, error) {
	out := &Embedding{Scales: e.parts, Width: e.Width(), Rows: samples.Len()}
	out.Vectors = make([]float32, out.Rows*out.Width)
	if err := e.EmbedRows(ctx, samples, out.Row, threads, progress); err != nil {
		return nil, err
	}
	return out, nil
}

// EmbedRows is Embed into the rows given, each of Width values, which all have
// to be held at once.
func (e *Estimator) EmbedRows(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) error {
	if samples.Order() != e.terms.net.Order() {
		return fmt.Errorf("dual: samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), e.terms.net.Order())
	}
	n, stages, done := samples.Len(), len(e.flows), 0
	if len(e.scales) > 0 {
		stages++
	}
	if len(e.levels) > 0 {
		stages++
	}
	staged := func(now, _ int) {
		if progress != nil {
			progress((done*n+now)/stages, n)
		}
	}
	if len(e.scales) > 0 {
		e.embedScales(ctx, samples, row, threads, staged)
		done++
	}
	if len(e.levels) > 0 {
		e.embedLevels(ctx, samples, row, threads, staged)
		done++
	}
	for i, part := range e.flows {
		place := e.parts[len(e.weight)+i]
		part.flow.eachRow(ctx, n, samples.At, threads, staged, func(i int, cost []float32) {
			to := row(i)[place.Begin:place.End]
			for k, edge := range part.edge {
				to[k] = part.weight[k] * cost[edge]
			}
		})
		done++
	}
	return ctx.Err()
}

func (e *Estimator) embedLevels(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) {
	part := make(map[int]int, len(e.levels)) // of each level
	for i, k := range e.levels {
		part[k] = len(e.scales) + i
	}
	each(ctx, samples.Len(), 1, threads, progress, func() func(i, count int) {
		var held [2][]float64
		return func(i, _ int) {
			e.terms.levels.masses(samples.At(i), &held, func(k int, mass []float64) {
				at, ok := part[k]
				if !ok {
					return
				}
				to := row(i)[e.parts[at].Begin:e.parts[at].End]
				for a, w := range e.weight[at] {
					to[a] = w * float32(mass[a])
				}
			})
		}
	})
}

func (e *Estimator) embedScales(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) {
	m := e.terms.scales
	at := make([]int, len(m.scales)) // part + 1 of a scale
	for i, k := range e.scales {
		at[k] = i + 1
	}
	panels(ctx, samples.Len(), threads, progress, func(p *diffusion.Panel[float32], first, count int) {
		x := p.Input(m.cascade)
		for l := range count {
			m.fill(x, l, samples.At(first+l))
		}
		m.cascade.Scales(p, func(k int, before, after []float32) {
			if at[k] == 0 {
				return
			}
			place, weight := e.parts[at[k]-1], e.weight[at[k]-1]
			for l := range count {
				to := row(first + l)[place.Begin:place.End]
				for v, w := range weight {
					d := before[v*diffusion.Lanes+l]
					if after != nil {
						d -= after[v*diffusion.Lanes+l]
					}
					to[v] = w * d
				}
			}
		})
	})
}

// Moved is how many bytes Embed reads and writes for one sample, whether a cache
// has them or not. It is what a measurement of the speed is compared with.
func (e *Estimator) Moved() int64 {
	sum := int64(4 * e.Width())
	if len(e.scales) > 0 {
		sum += e.terms.scales.cascade.Moved()
	}
	for _, f := range e.flows {
		sum += f.flow.circuit.Moved()
	}
	return sum
}

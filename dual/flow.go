package dual

import (
	"context"
	"fmt"
	"math"

	"example.org/barrow/diffusion/resistor"
	"example.org/barrow/graphio"
)

// FlowOptions says what a Flow sends mass through; see resistor.Options.
type FlowOptions struct {
	Conductance []float64 // one an edge; nil stands for 1/length
	Unmatched   float64   // cost of creating or removing a unit of mass; 0: not allowed
}

// A Flow sends every sample of one network to rest by a flow that depends on
// nothing but the sample: the current of a network of resistors. The difference
// of two samples' flows moves the one onto the other, so what it costs is an
// upper bound of their transport distance (Beckmann 1952), with directions left
// aside, and it is an L1 distance of vectors made once a sample. With
// conductances of 1/length it lies some 1.2 to 1.8 times above the distance. A
// Flow does not change once made, so any number of goroutines may use it.
type Flow struct {
	order   int
	circuit *resistor.Circuit
}

// NewFlow makes the flow of a network. Errors: conductances out of range.
// Cost: that of routing some hundred samples.
func NewFlow(net *graphio.Network, opt FlowOptions) (*Flow, error) {
	c, err := resistor.New(net, resistor.Options(opt))
	if err != nil {
		return nil, err
	}
	return &Flow{net.Order(), c}, nil
}

// Width is the length of a sample's vector: a value an edge, and one a node
// where mass may be unmatched.
func (f *Flow) Width() int { return f.circuit.Size() }

// A FlowEmbedding holds the cost, length × flow, of every sample on every edge,
// in the unit of mass times length.
type FlowEmbedding struct {
	*Embedding
	Slack []float64 // of each sample, see resistor.Circuit.Route
}

// Embed routes every sample. Samples are taken as they are; give shares to
// compare shares. The vector of a sample does not depend on the others, nor on
// threads (0: the number of processors).
//
// Errors: samples of another network; the context's, with nothing returned.
// Cost: O(nodes + edges) a sample, and for each of some twenty steps of the
// solver as much again on what exact elimination leaves, which road networks of
// up to a hundred thousand nodes do not need; 4 bytes an edge a sample, and 32
// bytes an edge and 128 to 320 a node for every thread.
func (f *Flow) Embed(ctx context.Context, samples *graphio.Samples, threads int, progress func(done, total int)) (*FlowEmbedding, error) {
	n, width := samples.Len(), f.Width()
	e := &FlowEmbedding{
		Embedding: &Embedding{Scales: []Scale{{Name: "flow", End: width, Weight: 1}}, Width: width, Rows: n, Vectors: make([]float32, n*width)},
	}
	var err error
	e.Slack, err = f.EmbedRows(ctx, samples, e.Row, threads, progress)
	if err != nil {
		return nil, err
	}
	return e, nil
}

// EmbedRows is Embed into the rows given, each of Width values, which all have
// to be held at once; it returns the slack of each sample.
func (f *Flow) EmbedRows(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) (slack []float64, err error) {
	if samples.Order() != f.order {
		return nil, fmt.Errorf("dual: samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), f.order)
	}
	slack = make([]float64, samples.Len())
	err = f.route(ctx, samples.Len(), samples.At, row, threads, progress, func(i int, x float64) { slack[i] = x })
	return slack, err
}

// route routes n samples into rows. took, if not nil, gets what Route says of
// each.
func (f *Flow) route(ctx context.Context, n int, sample func(i int) graphio.Sample, row func(i int) []float32, threads int, progress func(done, total int), took func(i int, slack float64)) error {
	each(ctx, n, resistor.Lanes, threads, progress, func() func(first, count int) {
		var p resistor.Panel
		return func(first, count int) {
			list, rows := make([]graphio.Sample, count), make([][]float32, count)
			for l := range count {
				list[l], rows[l] = sample(first+l), row(first+l)
			}
			slack := f.circuit.Route(&p, list, rows)
			for l := range count {
				took(first+l, slack[l])
			}
		}
	})
	return ctx.Err()
}

// eachRow routes n samples and calls take with the costs of each, valid only
// during the call.
func (f *Flow) eachRow(ctx context.Context, n int, sample func(i int) graphio.Sample, threads int, progress func(done, total int), take func(i int, row []float32)) {
	each(ctx, n, resistor.Lanes, threads, progress, func() func(first, count int) {
		var p resistor.Panel
		store := make([]float32, resistor.Lanes*f.Width())
		return func(first, count int) {
			list, rows := make([]graphio.Sample, count), make([][]float32, count)
			for l := range count {
				list[l], rows[l] = sample(first+l), store[l*f.Width():(l+1)*f.Width()]
			}
			f.circuit.Route(&p, list, rows)
			for l, row := range rows {
				take(first+l, row)
			}
		}
	})
}

// Upper is at least the transport distance of samples i and j without
// directions, whatever was rounded on the way: Σ |row i − row j|, and what the
// two samples' slack and the rounding of this sum add. It assumes that both
// have the same total on every component, or that mass may be unmatched. +Inf
// where values are past the range of float32. Cost: O(Width).
func (e *FlowEmbedding) Upper(i, j int) float64 {
	if i == j {
		return 0
	}
	var sum [1]float64
	e.Terms(i, j, sum[:])
	// Each difference is rounded to float32, and summed up in float64.
	return outward(sum[0]*(1+0x1p-24)+e.Slack[i]+e.Slack[j], e.Width)
}

// UpperOf is Upper from a sum that AddDistances made of two vectors of the given
// width, each of whose values went through a difference, at most 32 sums of a
// lane and 3 of lanes in float32: 36 roundings.
func UpperOf(sum, slackA, slackB float64, width int) float64 {
	return outward(sum*(1+36*0x1p-23)+slackA+slackB, width)
}

// outward adds what summing up as many values in float64 may have lost.
func outward(bound float64, width int) float64 {
	bound *= 1 + float64(width+64)*0x1p-53
	if math.IsNaN(bound) {
		return math.Inf(1)
	}
	return bound
}

func (f *Flow) length(e int) float64 { return f.circuit.Length(e) }

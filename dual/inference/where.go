package inference

import (
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// Features are numbers measured on every sample: shares of districts, values of
// nodes at a scale. Values is row-major, one row a sample.
type Features struct {
	Names  []string
	Values []float64
}

// Districts are the shares of each district's nodes, in the order districts
// first appear; nodes without one count for the district "".
// Errors: a network without districts; samples of another network or without mass.
func Districts(net *graphio.Network, samples *graphio.Samples) (*Features, error) {
	of := net.Districts()
	if of == nil {
		return nil, fmt.Errorf("%w: the network has no districts; want a column district in the nodes file", ErrDesign)
	}
	if samples.Order() != net.Order() {
		return nil, fmt.Errorf("samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), net.Order())
	}
	shares, err := samples.Shares()
	if err != nil {
		return nil, err
	}
	var districts index
	f := &Features{}
	for _, name := range of {
		if districts.of(name) == len(f.Names) {
			f.Names = append(f.Names, name)
		}
	}
	f.Values = make([]float64, samples.Len()*len(f.Names))
	for i := range samples.Len() {
		s := shares.At(i)
		for k, v := range s.Nodes {
			f.Values[i*len(f.Names)+districts[of[v]]] += s.Values[k]
		}
	}
	return f, nil
}

// A Place is what one feature says about a factor.
type Place struct {
	Feature   string
	Statistic float64 // F of an analysis of variance; 0 where all values are equal
	// P is of this feature alone; Adjusted, over all features tested.
	P, Adjusted float64
	// Means of the groups, in the order of Placement.Groups.
	Means []float64
}

// A Placement says which features carry a difference of groups.
type Placement struct {
	Factor       string
	Groups       []string
	Places       []Place // in the order of the features
	Permutations int
	Exact        bool
	Distinct     float64
}

// Where tests every feature for a difference of groups and adjusts for their
// number by the step-down max-T of Westfall & Young 1993 (algorithm 2.8; Ge,
// Dudoit & Speed 2003): calling the features whose Adjusted is at most a level
// makes any false call at most that likely, whatever their dependence. With
// blocks, features are taken less their mean over the block first, which
// leaves the arrangements exact and takes the blocks' differences out.
//
// Errors: ErrDesign, ErrFew, ErrOption; the context's.
// Cost: O(samples features) an arrangement; memory for some 16 arrangements a
// goroutine of a number a feature.
func Where(ctx context.Context, features *Features, factor Variable, scheme Scheme, opt Options) (*Placement, error) {
	width := len(features.Names)
	if width == 0 || len(features.Values)%width != 0 {
		return nil, fmt.Errorf("%w: %d values for %d features", ErrDesign, len(features.Values), width)
	}
	n := len(features.Values) / width
	for k, v := range features.Values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("%w: %v for sample number %d in feature %q; want a finite number", ErrDesign, v, k/width+1, features.Names[k%width])
		}
	}
	g, err := factor.grouping(n)
	if err != nil {
		return nil, err
	}
	a, err := scheme.arrange(n, g.code)
	if err != nil {
		return nil, err
	}
	j, err := newJob(a, opt)
	if err != nil {
		return nil, err
	}
	l := &layers{g: g, n: n, width: width, x: lessBlocks(features.Values, n, width, scheme.Blocks)}
	l.square()
	m := newMaxT(width)
	err = j.run(ctx, width, 8, l.evaluation, func(k int, values []float64) bool {
		if k < 0 {
			m.observe(values)
		} else {
			m.count(values)
		}
		return true
	})
	if err != nil {
		return nil, err
	}
	r := &Placement{Factor: factor.Name, Groups: g.names, Permutations: j.count, Exact: j.exact, Distinct: a.total}
	alone, adjusted := m.p(j)
	for f, name := range features.Names {
		r.Places = append(r.Places, Place{Feature: name, Statistic: m.observed[f], P: alone[f], Adjusted: adjusted[f], Means: g.means(features.Values, f, width)})
	}
	return r, nil
}

func (g *grouping) means(values []float64, f, width int) []float64 {
	mean := make([]float64, len(g.size))
	for i, c := range g.code {
		mean[c] += values[i*width+f] / float64(g.size[c])
	}
	return mean
}

// lessBlocks takes off every feature its mean over the sample's block, or over
// all samples.
func lessBlocks(values []float64, n, width int, labels []string) []float64 {
	var blocks index
	members := map[int][]int{}
	for i := range n {
		b := 0
		if labels != nil {
			b = blocks.of(labels[i])
		}
		members[b] = append(members[b], i)
	}
	x := make([]float64, len(values))
	mean := make([]float64, width)
	for b := range len(members) {
		clear(mean)
		for _, i := range members[b] {
			floats.AddScaled(mean, 1/float64(len(members[b])), values[i*width:(i+1)*width])
		}
		for _, i := range members[b] {
			floats.SubTo(x[i*width:(i+1)*width], values[i*width:(i+1)*width], mean)
		}
	}
	return x
}

// layers computes F for all features of an arrangement.
type layers struct {
	g        *grouping
	n, width int
	x        []float64 // means taken off
	squares  []float64 // total sum of squares of each feature
	blank    []bool    // no variation beyond rounding
}

func (l *layers) square() {
	l.squares, l.blank = make([]float64, l.width), make([]bool, l.width)
	for i := range l.n {
		for f, v := range l.x[i*l.width : (i+1)*l.width] {
			l.squares[f] += float64(v * v)
		}
	}
	largest := slices.Max(l.squares)
	for f, s := range l.squares {
		l.blank[f] = s <= 1e-24*largest
	}
}

func (l *layers) evaluation() evaluation {
	groups := len(l.g.size)
	sums := make([]float64, groups*l.width)
	return func(batch [][]int32, out []float64) {
		for b, arrangement := range batch {
			clear(sums)
			for i, from := range arrangement {
				c := int(l.g.code[from])
				floats.Add(sums[c*l.width:(c+1)*l.width], l.x[i*l.width:(i+1)*l.width])
			}
			l.ratios(sums, out[b*l.width:(b+1)*l.width])
		}
	}
}

func (l *layers) ratios(sums, out []float64) {
	groups := len(l.g.size)
	clear(out)
	for c, size := range l.g.size {
		for f, s := range sums[c*l.width : (c+1)*l.width] {
			out[f] += s * s / float64(size)
		}
	}
	free, left := float64(groups-1), float64(l.n-groups)
	for f, between := range out {
		within := l.squares[f] - between
		switch {
		case l.blank[f]:
			out[f] = 0
		case within <= 1e-12*l.squares[f]:
			out[f] = math.MaxFloat64
		default:
			out[f] = between / free / (within / left)
		}
	}
}

// maxT counts successive maxima: in the order of falling observed statistics,
// how often the largest of an arrangement from there on reaches the observed.
type maxT struct {
	observed       []float64
	falling        []int32
	alone, stepped []int // by feature
}

func newMaxT(width int) *maxT {
	return &maxT{alone: make([]int, width), stepped: make([]int, width)}
}

func (m *maxT) observe(values []float64) {
	m.observed = slices.Clone(values)
	m.falling = ascending(values)
	slices.Reverse(m.falling)
}

func (m *maxT) count(values []float64) {
	most := 0.0
	for _, f := range slices.Backward(m.falling) {
		most = max(most, values[f])
		threshold := m.observed[f] - tie(m.observed[f])
		if values[f] >= threshold {
			m.alone[f]++
		}
		if most >= threshold {
			m.stepped[f]++
		}
	}
}

// p is each feature's own P, and the adjusted, made to rise as statistics fall.
func (m *maxT) p(j *job) (alone, adjusted []float64) {
	alone, adjusted = make([]float64, len(m.observed)), make([]float64, len(m.observed))
	share := func(reached int) float64 {
		o := Outcome{Exact: j.exact, Permutations: j.count, Reached: reached}
		o.finish(false)
		return o.P
	}
	largest := 0.0
	for _, f := range m.falling {
		alone[f] = share(m.alone[f])
		largest = max(largest, share(m.stepped[f]))
		adjusted[f] = largest
	}
	return alone, adjusted
}

// Nodes are the shares of each node, and, for every time given, the same after
// diffusion for so long: what a node and its surroundings hold at that scale.
// A node without mass in all samples is left out of the undiffused shares.
// Errors: samples of another network or without mass. Memory: 8 bytes a node,
// sample and time. Cost: that of the heat kernel, see diffusion.Walk.Heat.
func Nodes(net *graphio.Network, samples *graphio.Samples, times []float64) (*Features, error) {
	if samples.Order() != net.Order() {
		return nil, fmt.Errorf("samples over %d nodes for a network of %d; want samples read with this network", samples.Order(), net.Order())
	}
	shares, err := samples.Shares()
	if err != nil {
		return nil, err
	}
	n, rows := net.Order(), shares.Len()
	x := mat.NewDense(n, rows, nil)
	held := make([]bool, n)
	for i := range rows {
		s := shares.At(i)
		for k, v := range s.Nodes {
			x.Set(int(v), i, s.Values[k])
			held[v] = true
		}
	}
	layers := []*mat.Dense{x}
	if len(times) > 0 {
		diffused, err := diffusion.NewWalk(net).Heat(x, times, diffusion.HeatOptions{})
		if err != nil {
			return nil, err
		}
		layers = append(layers, diffused...)
	}
	f := &Features{}
	var columns [][]float64
	for k, layer := range layers {
		for v := range n {
			if k == 0 && !held[v] {
				continue
			}
			name := net.Name(v)
			if k > 0 {
				name = fmt.Sprintf("%s at scale %.3g", name, times[k-1])
			}
			f.Names = append(f.Names, name)
			columns = append(columns, layer.RawRowView(v))
		}
	}
	f.Values = make([]float64, rows*len(columns))
	for c, column := range columns {
		for i, value := range column {
			f.Values[i*len(columns)+c] = value
		}
	}
	return f, nil
}

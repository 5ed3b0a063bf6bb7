package dual

import (
	"context"
	"fmt"
	"math"
	"slices"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// Terms are the L1 norms that a calibrated estimate adds up, each with a weight
// of its own:
//
//	scales    Σ_v reach_k(v) |((H_{t_k} - H_{t_{k+1}})(p - q))_v|
//	flows     Σ length_e |f_e(p) - f_e(q)| over a group of edges
//
// The scales are those of Multiscale with the theory's factor t_k^½ replaced by
// how far the walk gets from a node by then (diffusion.Cascade.Reach), so that
// all terms have the unit of the lengths. The flows are those of one or more
// Flows, the edges of each in groups of like use, the most used last: what a
// flow that serves all pairs makes worse than it need be for one pair differs
// between main roads and side streets.
type Terms struct {
	net    *graphio.Network
	levels *Levels     // nil: none
	scales *Multiscale // nil: none
	reach  [][]float32 // of the nodes of each scale
	flows  []*Flow
	group  []uint8 // of each edge
	groups int
	names  []string
}

// TermOptions says what Terms consist of.
type TermOptions struct {
	Options
	NoScales bool
	// Levels adds a term for each level of a hierarchy.
	Levels *Levels
	// Flows lists the conductances of each flow; nil stands for 1/length.
	Flows [][]float64
	// Use of each edge, by which it is sorted into one of Groups groups of as
	// many edges each.
	Use       []float64
	Groups    int // 0 stands for 1, most are 255
	Unmatched float64
}

// NewTerms prepares the terms for a network. Errors: options out of range.
func NewTerms(net *graphio.Network, opt TermOptions) (*Terms, error) {
	t := &Terms{net: net, groups: max(1, opt.Groups), levels: opt.Levels}
	if t.groups > 255 {
		return nil, fmt.Errorf("dual: %d groups of edges; want at most 255", t.groups)
	}
	if !opt.NoScales {
		var err error
		if t.scales, err = NewMultiscale(net, opt.Options); err != nil {
			return nil, err
		}
		t.setReach()
		for _, s := range t.scales.scales {
			t.names = append(t.names, "scale "+s.Name)
		}
	}
	if t.levels != nil {
		for k := range t.levels.parent {
			t.names = append(t.names, fmt.Sprintf("level %d", k))
		}
	}
	for i, c := range opt.Flows {
		f, err := NewFlow(net, FlowOptions{Conductance: c, Unmatched: opt.Unmatched})
		if err != nil {
			return nil, err
		}
		t.flows = append(t.flows, f)
		for g := range t.groups {
			t.names = append(t.names, fmt.Sprintf("flow %d, edges %d/%d", i+1, g+1, t.groups))
		}
	}
	if len(t.flows) == 0 {
		return t, nil
	}
	return t, t.sortEdges(opt.Use)
}

// setReach prepares the weights of the nodes within each scale.
func (t *Terms) setReach() {
	step := make([]float64, t.net.Order())
	edges := t.net.EdgeList()
	for v := range step {
		square, weight := 0.0, 0.0
		for _, a := range t.net.Arcs(v) {
			e := edges[a.Edge]
			square += float64(e.Weight * e.Length * e.Length)
			weight += e.Weight
		}
		if weight > 0 {
			step[v] = square / weight
		}
	}
	for _, r := range t.scales.cascade.Reach(step) {
		short := make([]float32, len(r))
		for v, x := range r {
			short[v] = float32(x)
		}
		t.reach = append(t.reach, short)
	}
}

// sortEdges puts the edges into groups by use, ties by number.
func (t *Terms) sortEdges(use []float64) error {
	width := t.flows[0].Width()
	if t.groups > 1 && len(use) != width {
		return fmt.Errorf("dual: use of %d edges for flows along %d; want one an edge", len(use), width)
	}
	t.group = make([]uint8, width)
	if t.groups == 1 {
		return nil
	}
	order := make([]int32, width)
	for e := range order {
		order[e] = int32(e)
	}
	slices.SortStableFunc(order, func(a, b int32) int {
		switch {
		case use[a] < use[b]:
			return -1
		case use[a] > use[b]:
			return 1
		}
		return 0
	})
	for rank, e := range order {
		t.group[e] = uint8(rank * t.groups / width)
	}
	return nil
}

// Names says what each term is.
func (t *Terms) Names() []string { return t.names }

// Describe is the record of the choices made for the scales; nil without.
func (t *Terms) Describe() *Description {
	if t.scales == nil {
		return nil
	}
	d := t.scales.Describe()
	return &d
}

// MostWidth is the length of a sample's vector if every term has a weight.
func (t *Terms) MostWidth() int {
	width := 0
	if t.scales != nil {
		width = t.scales.Width()
	}
	if t.levels != nil {
		width += t.levels.width
	}
	for _, f := range t.flows {
		width += f.Width()
	}
	return width
}

// Of returns the value of every term for every pair, in the unit of mass times
// length. Samples are taken as they are. The result does not depend on threads.
// Errors: the context's. Cost: as embedding a sample for each pair.
func (t *Terms) Of(ctx context.Context, pairs []Pair, threads int) ([][]float64, error) {
	values, differences := make([][]float64, len(pairs)), make([]graphio.Sample, len(pairs))
	for i, at := range pairs {
		differences[i] = at.difference()
		values[i] = make([]float64, len(t.names))
	}
	first := 0
	if t.scales != nil {
		t.scalesOf(ctx, differences, values, threads)
		first = len(t.scales.scales)
	}
	if t.levels != nil {
		t.levelsOf(ctx, differences, values, first, threads)
		first += len(t.levels.parent)
	}
	for _, f := range t.flows {
		f.termsOf(ctx, differences, t.group, threads, func(i int) []float64 { return values[i][first : first+t.groups] })
		first += t.groups
	}
	return values, ctx.Err()
}

func (t *Terms) levelsOf(ctx context.Context, differences []graphio.Sample, values [][]float64, first, threads int) {
	each(ctx, len(differences), 1, threads, nil, func() func(i, count int) {
		var held [2][]float64
		return func(i, _ int) {
			t.levels.masses(differences[i], &held, func(k int, mass []float64) {
				sum := 0.0
				for a, m := range mass {
					sum += math.Abs(float64(t.levels.size[k][a]) * m)
				}
				values[i][first+k] = sum
			})
		}
	})
}

func (t *Terms) scalesOf(ctx context.Context, differences []graphio.Sample, values [][]float64, threads int) {
	m := t.scales
	panels(ctx, len(differences), threads, nil, func(p *diffusion.Panel[float32], first, count int) {
		x := p.Input(m.cascade)
		for l := range count {
			m.fill(x, l, differences[first+l])
		}
		m.cascade.Scales(p, func(k int, before, after []float32) {
			for l := range count {
				sum := 0.0
				for v, r := range t.reach[k] {
					d := before[v*diffusion.Lanes+l]
					if after != nil {
						d -= after[v*diffusion.Lanes+l]
					}
					sum += math.Abs(float64(r * d))
				}
				values[first+l][k] = sum
			}
		})
	})
}

// termsOf adds the costs of each group of edges to the terms of each sample.
func (f *Flow) termsOf(ctx context.Context, samples []graphio.Sample, group []uint8, threads int, terms func(i int) []float64) {
	f.eachRow(ctx, len(samples), func(i int) graphio.Sample { return samples[i] }, threads, nil, func(i int, row []float32) {
		sums := terms(i)
		for e, c := range row {
			sums[group[e]] += math.Abs(float64(c))
		}
	})
}

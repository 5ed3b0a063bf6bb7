package main

import (
	"context"
	"fmt"
	"image/color"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	glyph "gonum.org/v1/plot/vg/draw"

	"example.org/barrow/dual"
	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
	"example.org/barrow/graphio/shortest"
)

// randomMatrix is an L1 matrix of random points.
func randomMatrix(n int) *pairwise.Matrix {
	r := rand.New(rand.NewPCG(1, uint64(n)))
	x := make([][4]float64, n)
	for i := range x {
		for k := range x[i] {
			x[i][k] = r.NormFloat64()
		}
	}
	m := &pairwise.Matrix{}
	for i := range x {
		m.Names = append(m.Names, fmt.Sprint(i))
		for j := i + 1; j < n; j++ {
			d := 0.0
			for k := range x[i] {
				d += math.Abs(x[i][k] - x[j][k])
			}
			m.Value = append(m.Value, d)
		}
	}
	return m
}

// power counts how often a planted shift between two groups of samples is
// called at 5 %: counts at the nodes about a place, which in the second group
// lies some way off.
func power(picture string) error {
	const nodes, each, counts, sets = 900, 10, 60, 200
	net := graphiotest.Road(nodes, 5)
	estimate, err := theory(net)
	if err != nil {
		return err
	}
	fmt.Printf("Two groups of %d samples of %d counts about a place each, on %d nodes; %d sets.\n\n", each, counts, nodes, sets)
	fmt.Println("| the places lie apart, mean edges | energy on multiscale distances | on total variation | node by node, max-T | districts, max-T |")
	fmt.Println("|--:|--:|--:|--:|--:|")
	mean := 0.0
	for _, e := range net.EdgeList() {
		mean += e.Length / float64(net.Size())
	}
	curves := make([]plotter.XYs, 4)
	for _, apart := range []float64{0, 0.25, 0.5, 1, 1.5, 2, 3, 4, 6, 8} {
		var called [4]int
		for set := range sets {
			p, err := shifted(net, estimate, apart*mean, each, counts, uint64(set))
			if err != nil {
				return err
			}
			for k, x := range p {
				if x <= 0.05 {
					called[k]++
				}
			}
		}
		fmt.Printf("| %v | %d %% | %d %% | %d %% | %d %% |\n", apart, called[0]*100/sets, called[1]*100/sets, called[2]*100/sets, called[3]*100/sets)
		for k := range curves {
			curves[k] = append(curves[k], plotter.XY{X: apart, Y: float64(called[k]) / float64(sets) * 100})
		}
	}
	if picture == "" {
		return nil
	}
	return draw(curves, picture)
}

// draw shows the curves.
func draw(curves []plotter.XYs, path string) error {
	p := plot.New()
	p.Title.Text = "How often a shift is called at 5 %"
	p.X.Label.Text = "the places lie apart, in mean edges"
	p.Y.Label.Text = "called, %"
	p.Y.Min, p.Y.Max = 0, 100
	p.Legend.Padding = vg.Points(3)
	names := []string{"energy, multiscale distances", "energy, total variation", "node by node, max-T", "districts, max-T"}
	colours := []color.Color{color.RGBA{0, 90, 160, 255}, color.RGBA{200, 95, 0, 255}, color.RGBA{90, 90, 90, 255}, color.RGBA{0, 130, 90, 255}}
	for k, xy := range curves {
		line, points, err := plotter.NewLinePoints(xy)
		if err != nil {
			return err
		}
		line.Color, points.Color = colours[k], colours[k]
		line.Width = vg.Points(1.2)
		if k > 0 {
			line.Dashes = []vg.Length{vg.Points(float64(7 - 2*k)), vg.Points(2)}
		}
		points.Shape = []glyph.GlyphDrawer{glyph.CircleGlyph{}, glyph.SquareGlyph{}, glyph.TriangleGlyph{}, glyph.CrossGlyph{}}[k]
		p.Add(line, points)
		p.Legend.Add(names[k], line, points)
	}
	return p.Save(14*vg.Centimeter, 9*vg.Centimeter, path)
}

func theory(net *graphio.Network) (*dual.Estimator, error) {
	terms, err := dual.NewTerms(net, dual.TermOptions{})
	if err != nil {
		return nil, err
	}
	weights := make([]float64, len(terms.Names()))
	for k := range weights {
		weights[k] = 1
	}
	return terms.Weigh(weights)
}

// shifted is the P of each test on one simulated set.
func shifted(net *graphio.Network, e *dual.Estimator, apart float64, each, counts int, seed uint64) ([4]float64, error) {
	r := rand.New(rand.NewPCG(seed, math.Float64bits(apart)))
	place := r.IntN(net.Order())
	other := atDistance(net, place, apart)
	var list []graphio.Sample
	factor := inference.Variable{Name: "g"}
	for i := range 2 * each {
		centre, label := place, "here"
		if i >= each {
			centre, label = other, "there"
		}
		s := graphiotest.Counts(bump(net, centre), counts, r.Uint64())
		s.Name = fmt.Sprint(i)
		list = append(list, s)
		factor.Labels = append(factor.Labels, label)
	}
	var p [4]float64
	samples, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		return p, err
	}
	shares, err := samples.Shares()
	if err != nil {
		return p, err
	}
	ctx := context.Background()
	vectors, err := e.Embed(ctx, shares, 1, nil)
	if err != nil {
		return p, err
	}
	moved, err := pairwise.Compare(ctx, samples.Names(), vectors, pairwise.Options{Threads: 1})
	if err != nil {
		return p, err
	}
	varied, err := pairwise.Variation(ctx, net, samples, pairwise.Options{Shares: true, Threads: 1})
	if err != nil {
		return p, err
	}
	opt := inference.Options{Permutations: 199, Seed: seed, Threads: 1}
	for k, d := range []*pairwise.Matrix{moved, varied.Matrix} {
		t, err := inference.Energy(ctx, d, factor, inference.Scheme{}, opt)
		if err != nil {
			return p, err
		}
		p[k] = t.P
	}
	for k, f := range []*inference.Features{nodesOf(net, shares), cells(net, shares)} {
		w, err := inference.Where(ctx, f, factor, inference.Scheme{}, opt)
		if err != nil {
			return p, err
		}
		p[2+k] = 1
		for _, place := range w.Places {
			p[2+k] = min(p[2+k], place.Adjusted)
		}
	}
	return p, nil
}

func distancesFrom(net *graphio.Network, v int) []float64 {
	d := make([]float64, net.Order())
	for u := range d {
		d[u] = math.Inf(1)
	}
	d[v] = 0
	shortest.Sweep(net, d, shortest.Either, nil)
	return d
}

// atDistance is the node whose distance comes nearest to the one wanted.
func atDistance(net *graphio.Network, v int, want float64) int {
	best, off := v, math.Inf(1)
	for u, d := range distancesFrom(net, v) {
		if x := math.Abs(d - want); x < off {
			best, off = u, x
		}
	}
	return best
}

// bump is mass that falls off from a node by a factor of e every three mean
// edges.
func bump(net *graphio.Network, v int) graphio.Sample {
	mean := 0.0
	for _, e := range net.EdgeList() {
		mean += e.Length / float64(net.Size())
	}
	s := graphio.Sample{Name: "bump"}
	for u, d := range distancesFrom(net, v) {
		s.Nodes, s.Values = append(s.Nodes, int32(u)), append(s.Values, math.Exp(-d/(3*mean)))
	}
	return s
}

func nodesOf(net *graphio.Network, shares *graphio.Samples) *inference.Features {
	f := &inference.Features{Values: make([]float64, shares.Len()*net.Order())}
	for v := range net.Order() {
		f.Names = append(f.Names, net.Name(v))
	}
	for i := range shares.Len() {
		shares.At(i).Dense(f.Values[i*net.Order():(i+1)*net.Order()], 1)
	}
	return f
}

// cells are 36 squares of the plane.
func cells(net *graphio.Network, shares *graphio.Samples) *inference.Features {
	const side = 6
	x, y, _ := net.Places()
	at := func(v []float64, k int) int {
		low, high := slices.Min(v), slices.Max(v)
		return min(side-1, int(side*(v[k]-low)/(high-low)))
	}
	f := &inference.Features{Values: make([]float64, shares.Len()*side*side)}
	for c := range side * side {
		f.Names = append(f.Names, fmt.Sprint("cell", c))
	}
	for i := range shares.Len() {
		s := shares.At(i)
		for k, v := range s.Nodes {
			f.Values[i*side*side+at(x, int(v))*side+at(y, int(v))] += s.Values[k]
		}
	}
	return f
}

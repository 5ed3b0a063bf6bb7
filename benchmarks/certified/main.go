// Command certified measures what proof costs: bounds of all pairs, proved
// nearest samples and rankings, against solving every pair exactly.
//
//	go run ./benchmarks/certified
//	go run ./benchmarks/certified --nodes 2000 --samples 100 --budgets 2s,5s
//
// The time to solve every pair is that of a random part of them, warm-started
// row by row as barrow does, in proportion. It prints Markdown tables.
package main

import (
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"time"

	"github.com/spf13/pflag"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func main() {
	nodes := pflag.Int("nodes", 10_000, "of the road-like network")
	count := pflag.Int("samples", 300, "over it")
	budgets := pflag.DurationSlice("budgets", []time.Duration{10 * time.Second, 30 * time.Second, time.Minute, 2 * time.Minute}, "for the frontier of gap against time")
	kinds := pflag.StringSlice("kinds", []string{"smooth", "counts", "series"}, "of samples")
	rows := pflag.Int("rows", 12, "samples whose pairs among them are solved to time all")
	rank := pflag.Bool("rank", true, "also rank 5,000 samples on 2,000 nodes")
	pflag.Parse()
	if err := run(*nodes, *count, *rows, *budgets, *kinds, *rank); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(nodes, count, rows int, budgets []time.Duration, kinds []string, rank bool) error {
	net := graphiotest.Road(nodes, 1)
	fmt.Printf("%d nodes, %d edges, %d samples, %d pairs\n\n", net.Order(), net.Size(), count, count*(count-1)/2)
	fmt.Println("| samples | what is asked | seconds | of solving every pair | pairs solved | mean gap | widest gap |")
	fmt.Println("|---|---|--:|--:|--:|--:|--:|")
	for _, kind := range kinds {
		samples, err := makeSamples(kind, net, count)
		if err != nil {
			return err
		}
		all, err := everyPair(net, samples, rows)
		if err != nil {
			return err
		}
		fmt.Printf("| %s | every pair, exactly (from a part) | %.0f | 1 | all | 0 | 0 |\n", kind, all)
		for _, budget := range budgets {
			if err := certify(kind, fmt.Sprintf("the best in %v", budget), net, samples, pairwise.Goal{Budget: budget}, all); err != nil {
				return err
			}
		}
		limit := time.Duration(all / 2 * float64(time.Second)) // past that, solving all is the better way
		for _, g := range []struct {
			text string
			goal pairwise.Goal
		}{
			{"a gap of 20 %", pairwise.Goal{Gap: 0.2, Budget: limit}}, {"a mean gap of 5 %", pairwise.Goal{Gap: 0.05, Mean: true, Budget: limit}},
			{"each sample's nearest 10", pairwise.Goal{Top: 10, Budget: limit}},
		} {
			if err := certify(kind, g.text, net, samples, g.goal, all); err != nil {
				return err
			}
		}
	}
	if rank {
		return query()
	}
	return nil
}

// makeSamples is unlike smooth ones; counts of them, 10 a node; or a series that
// goes through four smooth ones and back, in counts.
func makeSamples(kind string, net *graphio.Network, count int) (*graphio.Samples, error) {
	list := make([]graphio.Sample, count)
	for k := range list {
		seed := uint64(k + 1)
		var s graphio.Sample
		switch kind {
		case "smooth":
			s = graphiotest.Smooth(net, seed)
		case "counts":
			s = graphiotest.Counts(graphiotest.Smooth(net, seed), 10*net.Order(), seed)
		case "series":
			s = graphiotest.Counts(between(net, 4*float64(k)/float64(count)), 10*net.Order(), seed)
		default:
			return nil, fmt.Errorf("samples %q; want smooth, counts or series", kind)
		}
		s.Name = fmt.Sprintf("s%03d", k)
		list[k] = s
	}
	return graphio.NewSamples(net.Order(), list)
}

// between is part of the way from one smooth sample to the next of four.
func between(net *graphio.Network, at float64) graphio.Sample {
	from := int(at)
	x := at - float64(from)
	p, q := graphiotest.Smooth(net, uint64(100+from%4)).Share(), graphiotest.Smooth(net, uint64(100+(from+1)%4)).Share()
	s := graphio.Sample{Name: "between", Nodes: p.Nodes, Values: make([]float64, len(p.Values))}
	for i := range s.Values {
		s.Values[i] = (1-x)*p.Values[i] + x*q.Values[i]
	}
	return s
}

// everyPair is the time to solve all pairs, from those among some samples.
func everyPair(net *graphio.Network, samples *graphio.Samples, rows int) (float64, error) {
	n := samples.Len()
	rows = min(rows, n)
	r := rand.New(rand.NewPCG(1, 1))
	var list []graphio.Sample
	for _, i := range r.Perm(n)[:rows] {
		list = append(list, samples.At(i))
	}
	part, err := graphio.NewSamples(net.Order(), list)
	if err != nil {
		return 0, err
	}
	start := time.Now()
	if _, err := pairwise.Exact(context.Background(), net, part, pairwise.Options{Shares: true}); err != nil {
		return 0, err
	}
	return time.Since(start).Seconds() * float64(n*(n-1)) / float64(rows*(rows-1)), nil
}

func certify(kind, text string, net *graphio.Network, samples *graphio.Samples, goal pairwise.Goal, all float64) error {
	start := time.Now()
	r, err := pairwise.Certified(context.Background(), net, samples, goal, pairwise.Options{Shares: true, Calibrate: -1, Seed: 1})
	if err != nil {
		return err
	}
	took := time.Since(start).Seconds()
	c := r.Certificate
	if !c.Settled && goal.Gap+float64(goal.Top) > 0 {
		text += " (not reached)"
	}
	fmt.Printf("| %s | %s | %.1f | %.2f | %d | %.1f %% | %.1f %% |\n", kind, text, took, took/all, c.Solved, 100*c.MeanGap, 100*c.MaxGap)
	return nil
}

// query ranks one sample against many.
func query() error {
	net := graphiotest.Road(2000, 2)
	samples, err := makeSamples("counts", net, 5000)
	if err != nil {
		return err
	}
	fmt.Println()
	fmt.Println("| 2,000 nodes, 5,000 samples of counts: the 5 nearest to one | seconds | pairs solved |")
	fmt.Println("|---|--:|--:|")
	for _, q := range []int{0, 2500, 4999} {
		start := time.Now()
		_, c, err := pairwise.Rank(context.Background(), net, samples, q, 5, pairwise.Options{Shares: true})
		if err != nil {
			return err
		}
		fmt.Printf("| sample %d, embedding included | %.2f | %d |\n", q, time.Since(start).Seconds(), c.Solved)
	}
	return nil
}

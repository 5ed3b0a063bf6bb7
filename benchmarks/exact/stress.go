package main

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// stress solves random cases of every family, size, kind of mass, range of
// lengths and option until the time is up. Nothing is compared with another
// solver: the proof of each result is checked, and so is that a second pair
// solved warm costs what it costs cold.
func stress(limit time.Duration, seed uint64) error {
	end := time.Now().Add(limit)
	kinds := map[string]int{}
	cases, pivots := 0, 0
	for ; time.Now().Before(end); cases++ {
		r := rand.New(rand.NewPCG(seed, uint64(cases)))
		kind, took, err := stressCase(r)
		if err != nil {
			return fmt.Errorf("case %d of seed %d, %s: %w", cases, seed, kind, err)
		}
		kinds[kind]++
		pivots += took
	}
	fmt.Printf("%d cases, %d pivots, every proof holds: %v\n", cases, pivots, kinds)
	return nil
}

func stressCase(r *rand.Rand) (kind string, pivots int, err error) {
	n := int(math.Exp(1 + 8*r.Float64())) // 3 to 8,000
	families := []string{"road", "grid", "unit-grid", "knn", "scale-free"}
	kind = families[r.IntN(len(families))]
	net, err := makeNetwork(kind, max(n, 16), r.Uint64())
	if err != nil {
		return kind, 0, err
	}
	spread := []float64{0, 0, 3, 9}[r.IntN(4)] // orders of magnitude of lengths
	net, err = relengthened(net, func(e graphio.Edge) float64 {
		return e.Length * math.Pow(10, spread*r.Float64())
	}, false)
	if err != nil {
		return kind, 0, err
	}
	opt := exact.Options{Shares: r.IntN(3) > 0}
	if r.IntN(4) == 0 {
		opt.Gap = math.Pow(10, -1-4*r.Float64())
	}
	p, q, other := stressSample(r, net, "p"), stressSample(r, net, "q"), stressSample(r, net, "other")
	if !opt.Shares {
		if r.IntN(2) == 0 {
			opt.Unmatched = net.EdgeList()[0].Length * math.Pow(10, 8*r.Float64()-4)
		} else {
			p, q, other = p.Share(), q.Share(), other.Share()
		}
	}
	s, err := exact.NewSolver(net, opt)
	if err != nil {
		return kind, 0, err
	}
	first, err := s.Solve(context.Background(), p, other)
	if err != nil {
		return kind, 0, err
	}
	warm, err := s.Solve(context.Background(), p, q)
	if err != nil {
		return kind, 0, err
	}
	cold, err := exact.Solve(net, p, q, opt)
	if err != nil {
		return kind, 0, err
	}
	for _, result := range []*exact.Result{first, warm, cold} {
		if err := result.Verify(); err != nil {
			return kind, 0, err
		}
	}
	if slack := 1e-9 * cold.Upper; warm.Lower > cold.Upper+slack || cold.Lower > warm.Upper+slack {
		return kind, 0, fmt.Errorf("warm %v to %v, cold %v to %v", warm.Lower, warm.Upper, cold.Lower, cold.Upper)
	}
	return kind, first.Pivots + warm.Pivots + cold.Pivots, nil
}

// stressSample has whole or broken masses, at few nodes or many, of one size or
// twelve orders of magnitude apart.
func stressSample(r *rand.Rand, net *graphio.Network, name string) graphio.Sample {
	s := graphio.Sample{Name: name}
	share := math.Pow(10, -3*r.Float64())
	spread := []float64{0, 1, 12}[r.IntN(3)]
	whole := r.IntN(2) == 0
	for v := range int32(net.Order()) {
		if r.Float64() > share {
			continue
		}
		x := math.Pow(10, spread*r.Float64())
		if whole {
			x = math.Ceil(x)
		}
		s.Nodes, s.Values = append(s.Nodes, v), append(s.Values, x)
	}
	if len(s.Nodes) == 0 {
		return renamed(graphiotest.Point(r.IntN(net.Order())), name)
	}
	return s
}

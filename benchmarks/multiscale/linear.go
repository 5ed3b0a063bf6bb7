package main

import (
	"context"
	"fmt"
	"math"
	"sync"
	"time"

	"gonum.org/v1/gonum/stat"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// laid is a network of a size, ready to embed.
type laid struct {
	net     *graphio.Network
	samples *graphio.Samples
	parts   [2]*dual.Estimator // scales, flows
	seconds [3][]float64       // of each, and of both
	ratio   []float64          // of both to copying
}

// linear measures the embedding on networks of growing size and fits the
// exponent of its time in edges × samples, and compares it with copying as many
// bytes as it moves. Sizes take turns, so that all see the same machine.
func linear(sizes []int, runs int) error {
	const count = 256
	var list []*laid
	for _, n := range sizes {
		l := &laid{net: graphiotest.Road(n, 1)}
		var err error
		if l.samples, err = mixtures(l.net, count, 20_000).Shares(); err != nil {
			return err
		}
		if l.parts[0], err = estimator(l.net, nil, true); err != nil {
			return err
		}
		if l.parts[1], err = estimator(l.net, [][]float64{nil}, false); err != nil {
			return err
		}
		list = append(list, l)
	}
	most := 0
	for _, l := range list {
		most = max(most, count*max(l.parts[0].Width(), l.parts[1].Width()))
	}
	vectors := make([]float32, most)
	for i := range vectors {
		vectors[i] = 1 // else the pages are not there yet
	}
	c := newCopier()
	for range runs {
		for _, l := range list {
			if err := l.run(c, vectors); err != nil {
				return err
			}
		}
	}
	fmt.Println("| nodes | edges | samples | scales, ns an edge and sample | flows, ns | both, ns | moved, bytes | embedding : copying |")
	fmt.Println("|--:|--:|--:|--:|--:|--:|--:|--:|")
	var size []float64
	var took [3][]float64
	for _, l := range list {
		work := float64(l.net.Size() * count)
		size = append(size, math.Log(work))
		row := fmt.Sprintf("| %d | %d | %d |", l.net.Order(), l.net.Size(), count)
		for i, s := range l.seconds {
			m := middle(s)
			took[i] = append(took[i], math.Log(m))
			row += fmt.Sprintf(" %.2f |", 1e9*m/work)
		}
		fmt.Printf("%s %.0f | **%.2f** |\n", row, float64(l.moved())/float64(l.net.Size()), middle(l.ratio))
	}
	for i, name := range []string{"scales", "flows", "both"} {
		_, slope := stat.LinearRegression(size, took[i], nil, false)
		fmt.Printf("\nexponent of the time in edges × samples, %s: **%.3f**", name, slope)
	}
	fmt.Println()
	return nil
}

// moved is the bytes a sample moves.
func (l *laid) moved() int64 { return l.parts[0].Moved() + l.parts[1].Moved() }

func (l *laid) run(c *copier, vectors []float32) error {
	sum := 0.0
	for i, e := range l.parts {
		row := func(i int) []float32 { return vectors[i*e.Width() : (i+1)*e.Width()] }
		begin := time.Now()
		if err := e.EmbedRows(context.Background(), l.samples, row, 0, nil); err != nil {
			return err
		}
		s := time.Since(begin).Seconds()
		l.seconds[i] = append(l.seconds[i], s)
		sum += s
	}
	l.seconds[2] = append(l.seconds[2], sum)
	l.ratio = append(l.ratio, sum/(float64(l.moved())*float64(l.samples.Len())/c.speed()))
	return nil
}

// copier copies blocks that no cache holds.
type copier struct{ from, to [][]float32 }

const blockBytes = 1 << 26

func newCopier() *copier {
	c := &copier{}
	for range threads() {
		from, to := make([]float32, blockBytes/4), make([]float32, blockBytes/4)
		for i := range from {
			from[i], to[i] = float32(i), 1 // else the pages are not there yet
		}
		c.from, c.to = append(c.from, from), append(c.to, to)
	}
	return c
}

// speed is how many bytes a second all processors read and write together.
func (c *copier) speed() float64 {
	const rounds = 4
	var wait sync.WaitGroup
	begin := time.Now()
	for i := range c.from {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for range rounds {
				copy(c.to[i], c.from[i])
			}
		}()
	}
	wait.Wait()
	return float64(2*rounds*blockBytes*len(c.from)) / time.Since(begin).Seconds()
}

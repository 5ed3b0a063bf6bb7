package diffusion

import (
	"math"
	"testing"
	"time"

	"example.org/barrow/graphio/graphiotest"
)

// BenchmarkScales sends one panel of samples through the cascade of a road
// network. Beside the time it reports nanoseconds for each edge and sample, and
// the time divided by that of copying as many bytes as the recursions read and
// write, measured in the same run on as large a block.
func BenchmarkScales(b *testing.B) {
	net := graphiotest.Road(100_000, 1)
	c, err := NewCascade(net, Options{})
	if err != nil {
		b.Fatal(err)
	}
	var p Panel[float32]
	sum := 0.0
	run := func() {
		x := p.Input(c)
		for i := range x {
			x[i] = float32(i%7) / 7
		}
		c.Scales(&p, func(_ int, before, after []float32) { sum += float64(before[0]) })
	}
	run()
	began := time.Now()
	for b.Loop() {
		run()
	}
	each := time.Since(began).Seconds() / float64(b.N)
	if math.IsNaN(sum) {
		b.Fatal("mass is not a number")
	}
	b.ReportMetric(1e9*each/float64(net.Size()*Lanes), "ns/edge·sample")
	b.ReportMetric(each/copying(c), "copies")
}

// copying is the time to copy as many bytes as Scales touches.
func copying(c *Cascade) float64 {
	var blocks float64 // values read or written, in panels of the whole network
	for _, s := range c.stages {
		size := float64(c.h.walks[s.level].Order()) / float64(c.Order())
		half := c.steps[s.level].half
		orders := 0
		for _, t := range s.times {
			n := len(chebyshev(t*half, c.Schedule.Tolerance))
			blocks += 2 * float64(n) * size // the sum, read and written
			orders = max(orders, n)
		}
		blocks += 3 * float64(orders-1) * size // T_k, T_{k-1}, T_{k+1}
	}
	a, z := make([]float32, c.Order()*Lanes), make([]float32, c.Order()*Lanes)
	copy(z, a)
	const rounds = 20
	began := time.Now()
	for range rounds {
		copy(z, a)
	}
	return time.Since(began).Seconds() / rounds * blocks / 2
}

func BenchmarkNewCascade(b *testing.B) {
	net := graphiotest.Road(100_000, 1)
	for b.Loop() {
		if _, err := NewCascade(net, Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

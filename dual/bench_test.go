package dual

import (
	"context"
	"testing"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

// BenchmarkEmbed makes the vectors of 100 samples on a road network of 100
// thousand nodes, on all processors.
func BenchmarkEmbed(b *testing.B) {
	net := graphiotest.Road(100_000, 1)
	m, err := NewMultiscale(net, Options{})
	if err != nil {
		b.Fatal(err)
	}
	var list []graphio.Sample
	for i := range uint64(100) {
		list = append(list, graphiotest.Sparse(net, 50_000, i).Share())
	}
	samples := graphiotest.Samples(net, list...)
	for b.Loop() {
		if _, err := m.Embed(context.Background(), samples, 0, nil); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(net.Size()*samples.Len()), "ns/edge·sample")
	b.ReportMetric(float64(m.Width())/float64(net.Order()), "values/node")
}

// BenchmarkDistances compares two blocks of 16 vectors of 250 thousand values,
// on one thread.
func BenchmarkDistances(b *testing.B) {
	const rows, width = 32, 250_000
	e := &Embedding{Scales: []Scale{{End: width, Weight: 1}}, Width: width, Rows: rows, Vectors: make([]float32, rows*width)}
	for i := range e.Vectors {
		e.Vectors[i] = float32(i % 13)
	}
	dst := make([]float64, 256)
	for b.Loop() {
		e.Distances(dst, 0, 16, 16, 32, e.Theory())
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/(256*width), "ns/value")
}

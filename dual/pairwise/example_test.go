package pairwise_test

import (
	"context"
	"fmt"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// Three samples on a street of three corners, 100 m and 200 m apart.
func Example() {
	net, err := graphio.NewNetwork([]string{"west", "middle", "east"}, []graphio.Edge{
		{From: 0, To: 1, Length: 100, Weight: 0.01},
		{From: 1, To: 2, Length: 200, Weight: 0.005},
	})
	if err != nil {
		panic(err)
	}
	samples, err := graphio.NewSamples(3, []graphio.Sample{
		{Name: "morning", Nodes: []int32{0}, Values: []float64{8}},
		{Name: "noon", Nodes: []int32{0, 1}, Values: []float64{3, 3}},
		{Name: "evening", Nodes: []int32{2}, Values: []float64{5}},
	})
	if err != nil {
		panic(err)
	}
	r, err := pairwise.Exact(context.Background(), net, samples, pairwise.Options{Shares: true})
	if err != nil {
		panic(err)
	}
	for i, a := range r.Matrix.Names {
		for j, b := range r.Matrix.Names[:i] {
			fmt.Printf("%s to %s: %.0f m\n", a, b, r.Matrix.At(i, j))
		}
	}
	// Output:
	// noon to morning: 50 m
	// evening to morning: 300 m
	// evening to noon: 250 m
}

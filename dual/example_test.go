package dual_test

import (
	"context"
	"fmt"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Three hours on a short street: the estimator sees that the noon crowd stands
// nearer to the morning's than the evening's does, which node by node they
// do not.
func Example() {
	street, err := graphio.NewNetwork([]string{"mill", "quay", "gate", "yard"}, []graphio.Edge{
		{From: 0, To: 1, Length: 100, Weight: 1},
		{From: 1, To: 2, Length: 100, Weight: 1},
		{From: 2, To: 3, Length: 100, Weight: 1},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	morning := graphio.Sample{Name: "morning", Nodes: []int32{0}, Values: []float64{1}}
	noon := graphio.Sample{Name: "noon", Nodes: []int32{1}, Values: []float64{1}}
	evening := graphio.Sample{Name: "evening", Nodes: []int32{3}, Values: []float64{1}}
	samples, err := graphio.NewSamples(street.Order(), []graphio.Sample{morning, noon, evening})
	if err != nil {
		fmt.Println(err)
		return
	}
	m, err := dual.NewMultiscale(street, dual.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	e, err := m.Embed(context.Background(), samples, 0, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("node by node:", dual.Variation(morning, noon), dual.Variation(morning, evening))
	near, far := e.Distance(0, 1, e.Theory()), e.Distance(0, 2, e.Theory())
	fmt.Printf("evening is %.1f times as far as noon\n", far/near)
	lower, _ := dual.Certify(street, m.Witness(morning, evening, e.Theory()), morning, evening)
	fmt.Printf("and at least %.0f away\n", lower)
	// Output:
	// node by node: 1 1
	// evening is 1.8 times as far as noon
	// and at least 300 away
}

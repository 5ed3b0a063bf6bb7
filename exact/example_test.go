package exact_test

import (
	"fmt"

	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// Two carts stand at the mill and one at the gate; later all are at the gate.
func ExampleSolve() {
	net, err := graphio.NewNetwork([]string{"mill", "quay", "gate"}, []graphio.Edge{
		{From: 0, To: 1, Length: 300, Weight: 1},
		{From: 1, To: 2, Length: 120, Weight: 1},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	before := graphio.Sample{Name: "before", Nodes: []int32{0, 2}, Values: []float64{2, 1}}
	after := graphio.Sample{Name: "after", Nodes: []int32{2}, Values: []float64{3}}
	r, err := exact.Solve(net, before, after, exact.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("cart metres:", r.Distance())
	fmt.Println("flow:", r.Flow)
	fmt.Println("proof holds:", r.Verify() == nil)
	// Output:
	// cart metres: 840
	// flow: [2 2]
	// proof holds: true
}

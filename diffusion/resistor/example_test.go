package resistor_test

import (
	"fmt"
	"math"

	"example.org/barrow/diffusion/resistor"
	"example.org/barrow/graphio"
)

// A unit of mass from the mill to the gate goes both ways round the block, two
// thirds of it the shorter one: more than the 200 of the shorter way alone.
func Example() {
	block, err := graphio.NewNetwork([]string{"mill", "quay", "gate", "yard"}, []graphio.Edge{
		{From: 0, To: 1, Length: 100, Weight: 1},
		{From: 1, To: 2, Length: 100, Weight: 1},
		{From: 2, To: 3, Length: 200, Weight: 1},
		{From: 3, To: 0, Length: 200, Weight: 1},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	c, err := resistor.New(block, resistor.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	mill := graphio.Sample{Name: "mill", Nodes: []int32{0}, Values: []float64{1}}
	gate := graphio.Sample{Name: "gate", Nodes: []int32{2}, Values: []float64{1}}
	rows := [][]float32{make([]float32, c.Size()), make([]float32, c.Size())}
	var p resistor.Panel
	c.Route(&p, []graphio.Sample{mill, gate}, rows)
	cost := 0.0
	for e := range rows[0] {
		cost += math.Abs(float64(rows[0][e] - rows[1][e]))
	}
	fmt.Printf("%.1f\n", cost)
	// Output: 266.7
}

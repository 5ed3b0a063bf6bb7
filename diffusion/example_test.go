package diffusion_test

import (
	"fmt"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/diffusion"
	"example.org/barrow/graphio"
)

// A unit of mass at the mill spreads along a short street. By hand, at t = 1:
// e⁻¹(1 + (cosh 1 - 1)/3), e⁻¹ sinh 1, e⁻¹(cosh 1 - 1)·2/3.
func ExampleWalk_Heat() {
	net, err := graphio.NewNetwork([]string{"mill", "quay", "gate"}, []graphio.Edge{
		{From: 0, To: 1, Length: 300, Weight: 1},
		{From: 1, To: 2, Length: 120, Weight: 2},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	start := mat.NewDense(3, 1, []float64{1, 0, 0})
	heat, err := diffusion.NewWalk(net).Heat(start, []float64{0, 1, 50}, diffusion.HeatOptions{})
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, h := range heat {
		fmt.Printf("%.3f\n", mat.Col(nil, 0, h))
	}
	// Output:
	// [1.000 0.000 0.000]
	// [0.434 0.432 0.133]
	// [0.167 0.500 0.333]
}

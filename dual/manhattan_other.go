//go:build !amd64

package dual

func absolute(sum *[16]float64, a, b []float32) { absolutePlain(sum, a, b) }

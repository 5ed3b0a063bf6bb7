//go:build !amd64

package dual

func taxiBlocks(sum *[8]float64, a, b []float32) { taxiPlain(sum, a, b) }

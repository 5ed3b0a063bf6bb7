package dual

import "golang.org/x/sys/cpu"

func absolute(sum *[16]float64, a, b []float32) {
	if !cpu.X86.HasAVX2 || len(a) == 0 {
		absolutePlain(sum, a, b)
		return
	}
	absoluteAVX2(sum, &a[0], &b[0], len(a)/16)
}

// absoluteAVX2 is absolutePlain over blocks of 16 values, at least one.
//
//go:noescape
func absoluteAVX2(sum *[16]float64, a, b *float32, blocks int)

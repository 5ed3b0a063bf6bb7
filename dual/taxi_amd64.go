package dual

import "golang.org/x/sys/cpu"

func taxiBlocks(sum *[8]float64, a, b []float32) {
	if !cpu.X86.HasAVX2 || len(a) == 0 {
		taxiPlain(sum, a, b)
		return
	}
	taxiAVX2(sum, &a[0], &b[0], len(a)/32)
}

// taxiAVX2 is taxiPlain over blocks of 32 values, at least one.
//
//go:noescape
func taxiAVX2(sum *[8]float64, a, b *float32, blocks int)

package dual

import "golang.org/x/sys/cpu"

func taxiBlocks(sum *[8]float64, a, b []float32) {
	switch {
	case len(a) == 0:
	case cpu.X86.HasAVX512F && cpu.X86.HasAVX512DQ:
		taxiAVX512(sum, &a[0], &b[0], len(a)/block)
	case cpu.X86.HasAVX2:
		taxiAVX2(sum, &a[0], &b[0], len(a)/block)
	default:
		taxiPlain(sum, a, b)
	}
}

// taxiAVX2 and taxiAVX512 are taxiPlain over blocks of 64 values, at least one.

//go:noescape
func taxiAVX2(sum *[8]float64, a, b *float32, blocks int)

//go:noescape
func taxiAVX512(sum *[8]float64, a, b *float32, blocks int)

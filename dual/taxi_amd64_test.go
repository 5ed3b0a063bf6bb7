package dual

import (
	"math/rand/v2"
	"testing"

	"golang.org/x/sys/cpu"
)

// Each set of instructions the processor has gives the bits of the plain form.
func TestTaxiInstructions(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 8))
	a, b := make([]float32, 640), make([]float32, 640)
	for i := range a {
		a[i], b[i] = float32(rng.NormFloat64()), float32(rng.NormFloat64())
	}
	var want [8]float64
	taxiPlain(&want, a, b)
	try := func(name string, has bool, f func(sum *[8]float64, a, b *float32, blocks int)) {
		if !has {
			t.Logf("left out: no %s here", name)
			return
		}
		var got [8]float64
		if f(&got, &a[0], &b[0], len(a)/block); got != want {
			t.Errorf("%s: %v, plain %v", name, got, want)
		}
	}
	try("AVX2", cpu.X86.HasAVX2, taxiAVX2)
	try("AVX-512", cpu.X86.HasAVX512F && cpu.X86.HasAVX512DQ, taxiAVX512)
}

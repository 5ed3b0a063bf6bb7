package peak_test

import (
	"runtime"
	"testing"

	"example.org/barrow/benchmarks/internal/peak"
)

func TestBytes(t *testing.T) {
	if runtime.GOOS != "linux" {
		t.Log("no memory record on this system: nothing to check")
		return
	}
	mark := peak.Start()
	block := make([]byte, 64<<20)
	for i := 0; i < len(block); i += 4096 {
		block[i] = 1
	}
	runtime.KeepAlive(block)
	highest, grown := mark.Bytes()
	if grown < 60<<20 || highest < grown {
		t.Errorf("peak of %d, %d grown, after touching %d", highest, grown, 64<<20)
	}
}

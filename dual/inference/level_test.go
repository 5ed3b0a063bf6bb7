package inference_test

import (
	"testing"

	"example.org/barrow/dual/inference/nulls"
)

// Every test, in every design offered, is silent where there is nothing: called
// at 5 % in one set of twenty, within the 99.9 % binomial interval of so many
// sets (there are many designs); benchmarks/inference counts 1,000 each, at 1 %
// too.
func TestLevels(t *testing.T) {
	sets := 120
	if testing.Short() { // under the race detector, which looks for other things
		sets = 12
	}
	for _, d := range nulls.Designs() {
		called := 0
		for seed := range uint64(sets) {
			p, err := d.P(seed)
			if err != nil {
				t.Fatalf("%s: %v", d.Name, err)
			}
			if p <= 0.05*(1+1e-9) {
				called++
			}
		}
		low, high := limitsAt(sets, 0.05, 0.001)
		if d.Conservative {
			low = 0
		}
		if called < low || called > high {
			t.Errorf("%s: called in %d of %d sets without effect, want %d to %d", d.Name, called, sets, low, high)
		}
	}
}

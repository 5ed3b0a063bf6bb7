package diffusion

import (
	"testing"

	"example.org/barrow/graphio/graphiotest"
)

// Districts are few, hold every node, and never cross components.
func TestDistricts(t *testing.T) {
	for _, n := range []int{5, 40, 3000} {
		net := graphiotest.Road(n, 1)
		label, middle := NewHierarchy(NewWalk(net)).Districts()
		size := make([]int, len(middle))
		for _, d := range label {
			size[d]++
		}
		for d, m := range middle {
			if size[d] == 0 || m < 0 || label[m] != int32(d) {
				t.Errorf("%d nodes: district %d of %d nodes around %d", n, d, size[d], m)
			}
		}
		if len(middle) > 2*smallest {
			t.Errorf("%d nodes: %d districts", n, len(middle))
		}
	}
}

package inference

import (
	"cmp"
	"slices"
)

// ascending is the order of the values, equal ones by where they stand.
func ascending(v []float64) []int32 {
	order := make([]int32, len(v))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		if c := cmp.Compare(v[a], v[b]); c != 0 {
			return c
		}
		return cmp.Compare(a, b)
	})
	return order
}

// ranks are 1, 2, …, equal values sharing the mean of theirs.
func ranks(v []float64) []float64 {
	order := ascending(v)
	r := make([]float64, len(v))
	for begin := 0; begin < len(order); {
		end := begin + 1
		for end < len(order) && v[order[end]] == v[order[begin]] {
			end++
		}
		for _, k := range order[begin:end] {
			r[k] = float64(begin+end+1) / 2
		}
		begin = end
	}
	return r
}

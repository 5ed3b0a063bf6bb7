//go:build !amd64

package main

func kernels() []kernel {
	return []kernel{{8, func(rounds int) {
		var sum [8]float32
		x, y := float32(rounds), float32(1)
		for range rounds {
			for l := range sum {
				d := x - y
				if d < 0 {
					d = -d
				}
				sum[l] += d
			}
			x, y = y, x
		}
		sink = sum
	}}}
}

var sink [8]float32

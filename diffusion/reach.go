package diffusion

import "math"

// Reach returns, for each scale, how far a walk gets from each node of the
// scale's level until the scale begins (for the first scale: until half its
// end), as if its steps went in independent directions:
//
//	√ ∫₀ᵗ H_sᵀ step ds
//
// step being the mean squared length of a step from each node of the network.
// On a network of even lengths that is the factor t^½ of the theory times the
// length; on an uneven one it differs from node to node. The integral is taken
// by the trapezium rule between the dyadic times. Cost: as Split.
func (c *Cascade) Reach(step []float64) [][]float64 {
	var p Panel[float64]
	// Hᵀ acts on functions, and C⁻¹ H C = Hᵀ, C the capacities.
	x := p.block(0, len(step))
	for v, s := range step {
		x[v] = s * c.h.walks[0].capacity[v]
	}
	reach := make([][]float64, c.Schedule.Scales())
	sum := make([]float64, len(step)) // the integral times the capacity
	level, since := 0, 0.0
	cascade(c, c.double(), &p, 1, fine, func(k int, before, after []float64) {
		if to := c.Schedule.Level[k]; to != level {
			up := make([]float64, c.h.walks[to].Order())
			restrict(c.h, up, sum, 1, level, to)
			sum, level = up, to
		}
		reach[k] = make([]float64, len(sum))
		for v, s := range sum {
			if k == 0 {
				s = before[v] * c.Schedule.Times[0] / 2
			}
			reach[k][v] = math.Sqrt(max(0, s) / c.h.walks[level].capacity[v])
		}
		if after == nil {
			return
		}
		until := c.Schedule.Times[k]
		for v := range sum {
			sum[v] += float64((until - since) / 2 * (before[v] + after[v]))
		}
		since = until
	})
	return reach
}

package diffusion

// Moved is how many bytes Scales reads and writes for one sample, whether a
// cache has them or not: for each order of a recursion, and each row of a panel,
// the row itself, the rows of its neighbours with their entries, the row before
// and after, and every sum that takes it. It is what a measurement of the speed
// is compared with.
func (c *Cascade) Moved() int64 {
	const cell = 4 // bytes a value of one sample
	sum := int64(0)
	for _, s := range c.stages {
		w := c.h.walks[s.level]
		n, entries := int64(w.Order()), int64(w.weight.NNZ())
		orders := make([]int, len(s.times))
		for i, t := range s.times {
			orders[i] = len(chebyshev(t*w.bound/2, c.Schedule.Tolerance))
		}
		for k := range orders[len(orders)-1] {
			sum += cell*(entries+3*n) + 8*entries/lanes
			for _, o := range orders {
				if k < o {
					sum += 3 * cell * n
				}
			}
		}
	}
	return sum
}

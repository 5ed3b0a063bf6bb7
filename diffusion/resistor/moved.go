package resistor

// Moved is how many bytes Route reads and writes for one sample, whether a cache
// has them or not: for each step of the solver both ways through the factor, the
// product with the Laplacian, and the sums; then the costs. It is what a
// measurement of the speed is compared with.
func (c *Circuit) Moved() int64 {
	const cell = 8 // bytes a value of one sample
	through := func(nodes, entries int) int64 {
		return cell*int64(3*entries+4*nodes) + int64(2*12*entries/lanes)
	}
	core := len(c.laplacian.diagonal)
	outer := through(c.factor.cut, c.factor.start[c.factor.cut])
	step := through(core, len(c.inner.row)) + cell*int64(len(c.laplacian.col)+8*core) + int64(12*len(c.laplacian.col)/lanes)
	return outer + int64(c.steps)*step + int64(len(c.length))*(6*cell+4) + int64(len(c.factor.order))*4*cell
}

//go:build !amd64

package resistor

func (f *factor) forward(b []row, first, end int)  { f.forwardPlain(b, first, end) }
func (f *factor) backward(b []row, first, end int) { f.backwardPlain(b, first, end) }

func (l *laplacian) product(dst, x []row, first, end int) { l.productPlain(dst, x, first, end) }

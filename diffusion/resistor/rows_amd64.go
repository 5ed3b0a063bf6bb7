package resistor

import "golang.org/x/sys/cpu"

func (f *factor) forward(b []row, first, end int) {
	if !cpu.X86.HasAVX2 || first >= end || len(f.row) == 0 {
		f.forwardPlain(b, first, end)
		return
	}
	forwardAVX2(&b[0], &f.start[0], &f.row[0], &f.value[0], first, end)
}

func (f *factor) backward(b []row, first, end int) {
	if !cpu.X86.HasAVX2 || first >= end || len(f.row) == 0 {
		f.backwardPlain(b, first, end)
		return
	}
	backwardAVX2(&b[0], &f.start[0], &f.row[0], &f.value[0], &f.inverse[0], first, end)
}

func (l *laplacian) product(dst, x []row, first, end int) {
	if !cpu.X86.HasAVX2 || first >= end || len(l.col) == 0 {
		l.productPlain(dst, x, first, end)
		return
	}
	productAVX2(&dst[0], &x[0], &l.start[0], &l.col[0], &l.value[0], &l.diagonal[0], first, end)
}

// The assembly does what the plain forms do, to the bit, for rows first to end,
// at least one.

//go:noescape
func forwardAVX2(b *row, start *int, to *int32, value *float64, first, end int)

//go:noescape
func backwardAVX2(b *row, start *int, to *int32, value, inverse *float64, first, end int)

//go:noescape
func productAVX2(dst, x *row, start *int, col *int32, value, diagonal *float64, first, end int)

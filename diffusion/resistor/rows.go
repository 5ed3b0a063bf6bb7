package resistor

// lanes is how many samples are solved at once: eight float64 fill a cache line.
const lanes = 8

type row = [lanes]float64

// apply overwrites b, one row a place, with the factor's solution.
func (f *factor) apply(b []row) {
	f.forward(b, 0, len(b))
	f.backward(b, 0, len(b))
}

// forwardPlain overwrites rows first to end of b with L⁻¹ b; rows past end take
// what is carried on to them.
func (f *factor) forwardPlain(b []row, first, end int) {
	for i := first; i < end; i++ {
		y := &b[i]
		for k := f.start[i]; k < f.start[i+1]; k++ {
			l, z := f.value[k], &b[f.row[k]]
			for c := range z {
				z[c] += float64(l * y[c])
			}
		}
	}
}

// backwardPlain overwrites rows first to end of b with L⁻ᵀ D⁻¹ b, where the rows
// past end are solved.
func (f *factor) backwardPlain(b []row, first, end int) {
	for i := end - 1; i >= first; i-- {
		x, d := b[i], f.inverse[i]
		for c := range x {
			x[c] *= d
		}
		for k := f.start[i]; k < f.start[i+1]; k++ {
			l, z := f.value[k], &b[f.row[k]]
			for c := range x {
				x[c] += float64(l * z[c])
			}
		}
		b[i] = x
	}
}

// productPlain sets dst to rows first to end of L x.
func (l *laplacian) productPlain(dst, x []row, first, end int) {
	for i := first; i < end; i++ {
		var y row
		own, d := &x[i], l.diagonal[i]
		for c := range y {
			y[c] = d * own[c]
		}
		for k := l.start[i]; k < l.start[i+1]; k++ {
			v, z := l.value[k], &x[l.col[k]]
			for c := range y {
				y[c] -= float64(v * z[c])
			}
		}
		dst[i-first] = y
	}
}

// times calls do with every row of L x, in order.
func (l *laplacian) times(x []row, do func(i int, y *row)) {
	var strip [64]row
	for first := 0; first < len(x); first += len(strip) {
		end := min(len(x), first+len(strip))
		l.product(strip[:], x, first, end)
		for i := first; i < end; i++ {
			do(i, &strip[i-first])
		}
	}
}

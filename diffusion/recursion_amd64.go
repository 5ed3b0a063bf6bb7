package diffusion

import "golang.org/x/sys/cpu"

// rows is rowsPlain, in assembly for float32 where the processor has AVX2.
func (s *stepper[F]) rows(next, current, previous []F, factor F, first, end int) {
	short, ok := any(s).(*stepper[float32])
	if !ok || !cpu.X86.HasAVX2 || first == end || len(s.col) == 0 {
		s.rowsPlain(next, current, previous, factor, first, end)
		return
	}
	var diagonal *float32
	if short.diagonal != nil {
		diagonal = &short.diagonal[first]
	}
	to, from, before := any(next).([]float32), any(current).([]float32), any(previous).([]float32)
	twice := 0
	if factor == 2 {
		twice = 1
	}
	rowsAVX2(&to[first*lanes], &from[0], &from[first*lanes], &before[first*lanes], diagonal,
		&s.start[first], &s.col[0], &short.off[0], end-first, twice)
}

// addScaled adds c x to dst.
func addScaled[F real](dst, x []F, c F) {
	to, ok := any(dst).([]float32)
	if !ok || !cpu.X86.HasAVX2 || len(x) == 0 || len(x)%lanes != 0 {
		addScaledPlain(dst, x, c)
		return
	}
	addScaledAVX2(&to[0], &any(x).([]float32)[0], float32(c), len(x)/lanes)
}

// rowsAVX2 steps rows (at least one) of a panel of 16 lanes. own is current at
// the first row; start, col and off are as in stepper, start at the first row.
//
//go:noescape
func rowsAVX2(next, current, own, previous, diagonal *float32, start *int, col *int32, off *float32, rows, twice int)

//go:noescape
func addScaledAVX2(dst, x *float32, c float32, blocks int)

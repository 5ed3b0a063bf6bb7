//go:build !amd64

package diffusion

func (s *stepper[F]) rows(next, current, previous []F, factor F, first, end int) {
	s.rowsPlain(next, current, previous, factor, first, end)
}

func addScaled[F real](dst, x []F, c F) { addScaledPlain(dst, x, c) }

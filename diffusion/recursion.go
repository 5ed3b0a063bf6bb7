package diffusion

// real is the arithmetic a recursion runs in.
type real interface{ float32 | float64 }

// stepper is X = I - (2/bound) L of one walk, whose spectrum lies in [-1, 1],
// laid out for the recursion: off-diagonal entries in compressed rows, the
// diagonal apart.
type stepper[F real] struct {
	half     float64 // bound/2, so that exp(-tL) = exp(-t half (1-X))
	start    []int
	col      []int32
	off      []F
	diagonal []F // nil where all are 0, as for the walk of a network
}

func newStepper[F real](w *Walk) *stepper[F] {
	s := &stepper[F]{half: w.bound / 2, start: w.weight.start, col: w.weight.col}
	if w.bound == 0 { // no links at all: L = 0
		return s
	}
	s.off = make([]F, len(s.col))
	for k, v := range s.col {
		s.off[k] = F(w.weight.value[k] / (s.half * w.capacity[v]))
	}
	diagonal, some := make([]F, w.Order()), false
	for u, r := range w.rate {
		diagonal[u] = F(1 - r/s.half)
		some = some || diagonal[u] != 0
	}
	if some {
		s.diagonal = diagonal
	}
	return s
}

// heat sets acc[i] to exp(-times[i] L) x for ascending times by one Chebyshev
// recursion. All blocks are row-major, one row of width samples a node; x is
// kept, spare is scratch. Truncation: at most tol times the norm of a column,
// in the 2-norm weighted by 1/capacity.
//
// Each order streams the blocks once: the recursion
// T_{k+1} = 2 X T_k - T_{k-1} goes row by row, in place over T_{k-1}, and
// every sum that still needs the order takes the row while it is in cache.
// Cost: orders × (links + nodes × sums) × width.
func (s *stepper[F]) heat(acc [][]F, x []F, width int, times []float64, tol float64, spare [2][]F) {
	if s.half == 0 {
		for i := range acc {
			copy(acc[i], x)
		}
		return
	}
	series := make([][]F, len(times))
	orders := 0
	for i, t := range times {
		c := chebyshev(t*s.half, tol)
		series[i] = make([]F, len(c))
		for k := range c {
			series[i][k] = F(c[k])
		}
		orders = max(orders, len(c))
	}
	for i := range acc {
		scale(acc[i], x, series[i][0])
	}
	previous, current := x, x
	for k := 1; k < orders; k++ {
		next := spare[k%2]
		first := 0 // ascending times have ascending orders
		for len(series[first]) <= k {
			first++
		}
		factor := F(2)
		if k == 1 {
			factor = 1
		}
		coefficient := make([]F, len(series)-first)
		for i := range coefficient {
			coefficient[i] = series[first+i][k]
		}
		s.step(next, current, previous, factor, acc[first:], coefficient, width)
		previous, current = current, next
	}
}

func scale[F real](dst, x []F, c F) {
	for i, v := range x {
		dst[i] = F(c * v)
	}
}

// lanes is the width of a panel of samples: a row of a panel of float32 fills
// one cache line of 64 bytes.
const lanes = 16

// step sets next to X current where factor is 1 and to 2 X current - previous
// where it is 2, and adds coefficient[i] next to acc[i]. next may be previous.
func (s *stepper[F]) step(next, current, previous []F, factor F, acc [][]F, coefficient []F, width int) {
	if width == lanes {
		s.stepPanel(next, current, previous, factor, acc, coefficient)
		return
	}
	sum := make([]F, width)
	for u := range len(s.start) - 1 {
		row := u * width
		clear(sum)
		if s.diagonal != nil {
			scale(sum, current[row:row+width], s.diagonal[u])
		}
		for k := s.start[u]; k < s.start[u+1]; k++ {
			v, at := s.off[k], int(s.col[k])*width
			for l, y := range current[at : at+width] {
				sum[l] += F(v * y)
			}
		}
		if factor == 2 {
			for l, y := range previous[row : row+width] {
				sum[l] = F(2*sum[l]) - y
			}
		}
		copy(next[row:row+width], sum)
		for i, c := range coefficient {
			to := acc[i][row : row+width]
			for l, y := range sum {
				to[l] += F(c * y)
			}
		}
	}
}

// strip is how many rows of a panel are stepped before the sums take them: few
// enough to stay in the first cache.
const strip = 128

// stepPanel is step for panels of lanes samples.
func (s *stepper[F]) stepPanel(next, current, previous []F, factor F, acc [][]F, coefficient []F) {
	n := len(s.start) - 1
	for first := 0; first < n; first += strip {
		end := min(first+strip, n)
		s.rows(next, current, previous, factor, first, end)
		for i, c := range coefficient {
			addScaled(acc[i][first*lanes:end*lanes], next[first*lanes:end*lanes], c)
		}
	}
}

// rowsPlain steps rows first to end of a panel. Products and sums are rounded
// one by one in the order of the entries, as in the assembly, which agrees to
// the bit.
func (s *stepper[F]) rowsPlain(next, current, previous []F, factor F, first, end int) {
	for u := first; u < end; u++ {
		row := u * lanes
		var sum [lanes]F
		if s.diagonal != nil {
			d := s.diagonal[u]
			for l, y := range (*[lanes]F)(current[row:]) {
				sum[l] = F(d * y)
			}
		}
		for k := s.start[u]; k < s.start[u+1]; k++ {
			v := s.off[k]
			x := (*[lanes]F)(current[int(s.col[k])*lanes:])
			for l := range x {
				sum[l] += F(v * x[l])
			}
		}
		if factor == 2 {
			p := (*[lanes]F)(previous[row:])
			for l := range p {
				sum[l] = F(2*sum[l]) - p[l]
			}
		}
		*(*[lanes]F)(next[row:]) = sum
	}
}

func addScaledPlain[F real](dst, x []F, c F) {
	for i, y := range x {
		dst[i] += F(c * y)
	}
}

package inference

import "slices"

// A triangle is a symmetric matrix: the entries above the diagonal row by row,
// as pairwise.Matrix keeps them, and the diagonal, nil where it is 0.
type triangle struct {
	n    int
	v    []float64
	diag []float64
}

// row is the entries (i, i+1), …, (i, n-1).
func (t *triangle) row(i int) []float64 {
	begin := i * (2*t.n - i - 1) / 2
	return t.v[begin : begin+t.n-1-i]
}

// A summer adds up a triangle over the cells of many labellings at once. Row
// by row, it gathers what stands in the columns of each cell: a row stays in
// the first cache for a whole batch of labellings, and each labelling has a
// fixed order of summation whatever the batch.
type summer struct {
	t      *triangle
	code   []int32 // cell of each sample as observed
	begin  []int32 // where each cell's members begin in a list of all
	cross  bool    // also between cells
	cells  int
	labels [][]int32
	list   [][]int32
	next   [][]int32
}

func newSummer(t *triangle, code []int32, cells int, cross bool) *summer {
	s := &summer{t: t, code: code, cross: cross, cells: cells, begin: make([]int32, cells+1)}
	for _, c := range code {
		s.begin[c+1]++
	}
	for c := range cells {
		s.begin[c+1] += s.begin[c]
	}
	return s
}

// sum sets out, cells × cells for each arrangement, at (c, e): over pairs
// i < j with i in cell c and j in e, and, for c = e, half the diagonal: the
// sum over all ordered pairs of two cells is out(c,e) + out(e,c). Without
// cross only c = e is set. Cost: n²/2 additions an arrangement with cross,
// about n²/2/cells without.
func (s *summer) sum(batch [][]int32, out []float64) {
	clear(out)
	s.lay(batch)
	for i := range s.t.n {
		row := s.t.row(i)
		first := int32(i + 1)
		for b := range batch {
			cell := int(s.labels[b][i])
			next, list := s.next[b], s.list[b]
			next[cell]++ // past i itself
			to := out[b*s.cells*s.cells+cell*s.cells:][:s.cells]
			if s.t.diag != nil {
				to[cell] += s.t.diag[i] / 2
			}
			if !s.cross {
				to[cell] += gather(row, list[next[cell]:s.begin[cell+1]], first)
				continue
			}
			for c := range to {
				to[c] += gather(row, list[next[c]:s.begin[c+1]], first)
			}
		}
	}
}

// lay labels the samples and lists the members of each cell, ascending.
func (s *summer) lay(batch [][]int32) {
	for len(s.labels) < len(batch) {
		s.labels = append(s.labels, make([]int32, s.t.n))
		s.list = append(s.list, make([]int32, s.t.n))
		s.next = append(s.next, make([]int32, s.cells))
	}
	for b, arrangement := range batch {
		next, list, labels := s.next[b], s.list[b], s.labels[b]
		copy(next, s.begin)
		for i, from := range arrangement {
			c := s.code[from]
			labels[i] = c
			list[next[c]] = int32(i)
			next[c]++
		}
		copy(next, s.begin)
	}
}

// gather is the sum of row[j-first] over the list, in four strands.
func gather(row []float64, list []int32, first int32) float64 {
	var a, b, c, d float64
	for len(list) >= 4 {
		a += row[list[0]-first]
		b += row[list[1]-first]
		c += row[list[2]-first]
		d += row[list[3]-first]
		list = list[4:]
	}
	for _, j := range list {
		a += row[j-first]
	}
	return (a + b) + (c + d)
}

// sumsEvaluation makes evaluations of a statistic of sums over cells.
func sumsEvaluation(t *triangle, code []int32, cells int, cross bool, statistic func(sums []float64) float64) func() evaluation {
	return func() evaluation {
		s := newSummer(t, code, cells, cross)
		var sums []float64
		return func(batch [][]int32, out []float64) {
			sums = slices.Grow(sums[:0], len(batch)*cells*cells)[:len(batch)*cells*cells]
			s.sum(batch, sums)
			for b := range batch {
				out[b] = statistic(sums[b*cells*cells:][:cells*cells])
			}
		}
	}
}

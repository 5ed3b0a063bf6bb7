package diffusion

import (
	"sort"

	"gonum.org/v1/gonum/mat"
)

var (
	_ mat.Matrix         = (*CSR)(nil)
	_ mat.NonZeroDoer    = (*CSR)(nil)
	_ mat.RowNonZeroDoer = (*CSR)(nil)
	_ mat.ColNonZeroDoer = csrTransposed{}
	_ mat.NonZeroDoer    = csrTransposed{}
	_ mat.Matrix         = csrTransposed{}
)

// A CSR is a sparse matrix in compressed rows: the entries of row r are
// col[start[r]:start[r+1]], ascending, and the same stretch of value. It does
// not change once made.
//
// Memory: 12 bytes an entry and 8 a row.
type CSR struct {
	rows, cols int
	start      []int
	col        []int32
	value      []float64
}

// Dims is the number of rows and columns.
func (m *CSR) Dims() (r, c int) { return m.rows, m.cols }

// At is the entry in row i and column j. It panics where there is none, as
// gonum's matrices do. Cost: O(log entries of the row).
func (m *CSR) At(i, j int) float64 {
	if uint(i) >= uint(m.rows) {
		panic(mat.ErrRowAccess)
	}
	if uint(j) >= uint(m.cols) {
		panic(mat.ErrColAccess)
	}
	row := m.col[m.start[i]:m.start[i+1]]
	k := sort.Search(len(row), func(k int) bool { return int(row[k]) >= j })
	if k == len(row) || int(row[k]) != j {
		return 0
	}
	return m.value[m.start[i]+k]
}

// T is the transpose, which shares the entries.
func (m *CSR) T() mat.Matrix { return csrTransposed{m} }

// NNZ is the number of entries kept.
func (m *CSR) NNZ() int { return len(m.col) }

// DoNonZero calls fn for every entry kept, row by row.
func (m *CSR) DoNonZero(fn func(i, j int, v float64)) {
	for i := range m.rows {
		m.DoRowNonZero(i, fn)
	}
}

// DoRowNonZero calls fn for every entry kept in row i, by ascending column.
func (m *CSR) DoRowNonZero(i int, fn func(i, j int, v float64)) {
	for k := m.start[i]; k < m.start[i+1]; k++ {
		fn(i, int(m.col[k]), m.value[k])
	}
}

// MulTo sets dst to the product of m and x, a block of columns (row-major).
// dst must not overlap x. It panics where the shapes do not fit.
// Cost: O(entries × columns of x).
func (m *CSR) MulTo(dst, x *mat.Dense) {
	xr, xc := x.Dims()
	dr, dc := dst.Dims()
	if xr != m.cols || dr != m.rows || dc != xc {
		panic(mat.ErrShape)
	}
	for i := range m.rows {
		row := dst.RawRowView(i)
		clear(row)
		for k := m.start[i]; k < m.start[i+1]; k++ {
			v := m.value[k]
			for l, y := range x.RawRowView(int(m.col[k])) {
				row[l] += float64(v * y)
			}
		}
	}
}

// csrTransposed presents a CSR by columns.
type csrTransposed struct{ m *CSR }

func (t csrTransposed) Dims() (r, c int)    { return t.m.cols, t.m.rows }
func (t csrTransposed) At(i, j int) float64 { return t.m.At(j, i) }
func (t csrTransposed) T() mat.Matrix       { return t.m }
func (t csrTransposed) DoNonZero(fn func(i, j int, v float64)) {
	t.m.DoNonZero(func(i, j int, v float64) { fn(j, i, v) })
}
func (t csrTransposed) DoColNonZero(j int, fn func(i, j int, v float64)) {
	t.m.DoRowNonZero(j, func(r, c int, v float64) { fn(c, r, v) })
}

// link is an undirected weighted edge, u < v.
type link struct {
	u, v int32
	w    float64
}

// symmetric makes the symmetric matrix that has w at (u, v) and (v, u) for
// every link; no two links may join the same nodes. Two counting sorts, first
// by one end and then by the other, leave every row in ascending order.
// Cost: O(n + links).
func symmetric(n int, links []link) *CSR {
	m := &CSR{rows: n, cols: n, start: make([]int, n+1)}
	for _, l := range links {
		m.start[l.u+1]++
		m.start[l.v+1]++
	}
	for i := range n {
		m.start[i+1] += m.start[i]
	}
	col, value := make([]int32, 2*len(links)), make([]float64, 2*len(links))
	next := append([]int(nil), m.start[:n]...)
	put := func(r, c int32, w float64) {
		col[next[r]], value[next[r]] = c, w
		next[r]++
	}
	for _, l := range links {
		put(l.u, l.v, l.w)
		put(l.v, l.u, l.w)
	}
	m.col, m.value = make([]int32, len(col)), make([]float64, len(col))
	copy(next, m.start)
	for r := range n {
		for k := m.start[r]; k < m.start[r+1]; k++ {
			c := col[k]
			m.col[next[c]], m.value[next[c]] = int32(r), value[k]
			next[c]++
		}
	}
	return m
}

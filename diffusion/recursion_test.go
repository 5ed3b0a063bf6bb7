package diffusion

import (
	"math"
	"slices"
	"testing"
)

// The forms in assembly have the bits of the plain ones, with and without a
// diagonal, for rows without entries, and for every length of strip.
func TestPanelAgainstPlain(t *testing.T) {
	for name, net := range larger() {
		h := NewHierarchy(NewWalk(net))
		for level := range h.Levels() {
			s := newStepper[float32](h.Walk(level))
			n := h.Walk(level).Order()
			current, previous := noise(n, 1), noise(n, 2)
			for _, factor := range []float32{1, 2} {
				for _, part := range [][2]int{{0, n}, {n / 3, n/3 + 1}, {n / 2, n}} {
					fast, plain := make([]float32, n*lanes), make([]float32, n*lanes)
					s.rows(fast, current, previous, factor, part[0], part[1])
					s.rowsPlain(plain, current, previous, factor, part[0], part[1])
					if !slices.Equal(fast, plain) {
						t.Fatalf("%s: rows %v of level %d differ from the plain form", name, part, level)
					}
				}
			}
			fast, plain := slices.Clone(current), slices.Clone(current)
			addScaled(fast, previous, 0.3)
			addScaledPlain(plain, previous, 0.3)
			if !slices.Equal(fast, plain) {
				t.Fatalf("%s: sums differ from the plain form", name)
			}
		}
	}
	s := newStepper[float32](randomWalk(4, [][2]int{{1, 3}})) // nodes 0 and 2 have no link
	fast, plain := make([]float32, 4*lanes), make([]float32, 4*lanes)
	s.rows(fast, noise(4, 3), noise(4, 4), 2, 0, 4)
	s.rowsPlain(plain, noise(4, 3), noise(4, 4), 2, 0, 4)
	if !slices.Equal(fast, plain) {
		t.Fatal("rows without entries differ from the plain form")
	}
}

func noise(n int, seed uint64) []float32 {
	x := make([]float32, n*lanes)
	for i, y := range signed(len(x), seed) {
		x[i] = float32(y)
	}
	return x
}

// A panel and a block of any other width go different ways to the same result.
func TestPanelAgainstNarrowBlock(t *testing.T) {
	w := NewWalk(larger()["road"])
	s := newStepper[float64](w)
	n := w.Order()
	run := func(x []float64, width int) []float64 {
		acc := make([]float64, len(x))
		s.heat([][]float64{acc}, x, width, []float64{5}, 1e-9, [2][]float64{make([]float64, len(x)), make([]float64, len(x))})
		return acc
	}
	column := signed(n, 9)
	panel := make([]float64, n*lanes)
	for v, y := range column {
		panel[v*lanes+3] = y
	}
	narrow, wide := run(column, 1), run(panel, lanes)
	for v := range narrow {
		if math.Float64bits(narrow[v]) != math.Float64bits(wide[v*lanes+3]) {
			t.Fatalf("node %d: %g in a block of one, %g in a panel", v, narrow[v], wide[v*lanes+3])
		}
	}
}

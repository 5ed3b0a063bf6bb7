package diffusion

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"example.org/barrow/graphio/graphiotest"
)

// At, T, DoNonZero and MulTo agree with the dense form of the same operator.
func TestCSRAgainstDense(t *testing.T) {
	for _, c := range append(graphiotest.Cases(), graphiotest.Directed()...) {
		w := NewWalk(c.Net)
		p, l := w.Operator(), w.Laplacian()
		n, _ := p.Dims()
		dense := mat.NewDense(n, n, nil)
		last, count := -1, 0
		p.DoNonZero(func(i, j int, v float64) {
			if i*n+j <= last || v == 0 {
				t.Fatalf("%s: entry %d, %d is out of order or 0", c.Name, i, j)
			}
			last, count = i*n+j, count+1
			dense.Set(i, j, v)
		})
		if count != p.NNZ() {
			t.Errorf("%s: %d entries of %d", c.Name, count, p.NNZ())
		}
		var back mat.Dense
		back.Add(dense, l) // P + L = I
		if !mat.EqualApprox(&back, identity(n), 1e-15) || !mat.Equal(p, dense) || !mat.Equal(p.T(), dense.T()) {
			t.Errorf("%s: the sparse operator differs from the dense one", c.Name)
		}
		for j := range n {
			if sum := mat.Sum(dense.ColView(j)); math.Abs(sum-1) > 1e-14 {
				t.Errorf("%s: column %d sums to %g", c.Name, j, sum)
			}
		}
		x := randomBlock(n, 5)
		fast, slow := mat.NewDense(n, 5, nil), mat.NewDense(n, 5, nil)
		p.MulTo(fast, x)
		slow.Mul(dense, x)
		if !mat.EqualApprox(fast, slow, 1e-14) {
			t.Errorf("%s: the sparse product differs from the dense one", c.Name)
		}
	}
}

func TestCSRPanicsOutside(t *testing.T) {
	p := randomWalk(3, path(3)).Operator()
	for name, call := range map[string]func(){
		"row":    func() { p.At(3, 0) },
		"column": func() { p.At(0, -1) },
		"shape":  func() { p.MulTo(mat.NewDense(3, 2, nil), mat.NewDense(2, 2, nil)) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			call()
		}()
	}
}

package diffusion

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// program is the transport distance of two distributions over edges of length
// 1 by gonum's dense simplex: least Σ|f| with div f = p - q.
func program(t *testing.T, n int, edges [][2]int, p, q []float64) float64 {
	t.Helper()
	a := mat.NewDense(n-1, 2*len(edges), nil) // one balance follows from the rest
	cost := make([]float64, 2*len(edges))
	for i, e := range edges {
		for side, sign := range []float64{1, -1} {
			cost[2*i+side] = 1
			if e[0] < n-1 {
				a.Set(e[0], 2*i+side, sign)
			}
			if e[1] < n-1 {
				a.Set(e[1], 2*i+side, -sign)
			}
		}
	}
	b := make([]float64, n-1)
	floats.SubTo(b, p[:n-1], q[:n-1])
	value, _, err := lp.Simplex(cost, a, b, 1e-12, nil)
	if err != nil {
		t.Fatal(err)
	}
	return value
}

// How far apart two point masses are after a while. Complete network and cube:
// closed forms e^{-nt} and h e^{-2t}; path: difference of means; the rest
// computed by linear programming (HiGHS through scipy 1.10.1 linprog).
func TestDistanceAfterDiffusion(t *testing.T) {
	for _, c := range []struct {
		name  string
		walk  *Walk
		edges [][2]int
		u, v  int
		time  float64
		want  float64
	}{
		{"K5", plain(5, complete(5)), complete(5), 0, 3, 0.3, math.Exp(-1.5)},
		{"cube", plain(8, cube()), cube(), 1, 6, 0.5, 3 * math.Exp(-1)},
		{"path", plain(5, path(5)), path(5), 0, 4, 0.7, 2.933714458198779},
		{"karate, D - A, 0.1", plain(34, karate(t)), karate(t), 0, 33, 0.1, 2.214115320295627},
		{"karate, D - A, 1", plain(34, karate(t)), karate(t), 0, 33, 1, 1.388751294613881},
		{"karate, D - A, 5", plain(34, karate(t)), karate(t), 0, 33, 5, .1919838808258557},
		{"karate, walk, 1", randomWalk(34, karate(t)), karate(t), 0, 33, 1, 2.017603849743164},
	} {
		h := kernel(t, c.walk, c.time)
		got := program(t, c.walk.Order(), c.edges, mat.Col(nil, c.u, h), mat.Col(nil, c.v, h))
		if math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%s: distance %.15g, want %.15g", c.name, got, c.want)
		}
	}
}

// Equilibrium against equal shares on the karate club: 1704/5304, computed by
// linear programming (HiGHS).
func TestDistanceToEquilibrium(t *testing.T) {
	w := randomWalk(34, karate(t))
	p, q := make([]float64, 34), make([]float64, 34)
	for v, c := range w.capacity {
		p[v], q[v] = c/156, 1/34.
	}
	if got := program(t, 34, karate(t), p, q); math.Abs(got-1704./5304) > 1e-9 {
		t.Errorf("distance %.15g, want %.15g", got, 1704./5304)
	}
}

package diffusion

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/floats"
	"gonum.org/v1/gonum/mat"
)

const (
	denseLimit   = 400 // nodes up to which eigenvalues are computed densely
	lanczosSteps = 20
)

// symmetrised applies C^{-1/2} (D - A) C^{-1/2}, which has the eigenvalues of
// L, on the nodes of one component.
func (w *Walk) symmetrised(dst, x []float64) {
	for u := range w.Order() {
		sum := w.rate[u] * x[u]
		for k := w.weight.start[u]; k < w.weight.start[u+1]; k++ {
			v := w.weight.col[k]
			sum -= float64(w.weight.value[k] / math.Sqrt(w.capacity[u]*w.capacity[v]) * x[v])
		}
		dst[u] = sum
	}
}

// largestComponent marks the nodes of the component with the most of size,
// the first one where several have as much.
func (w *Walk) largestComponent(size []float64) (nodes []int32) {
	seen := make([]bool, w.Order())
	most := -1.0
	for s := range seen {
		if seen[s] {
			continue
		}
		seen[s] = true
		part, total := []int32{int32(s)}, 0.0
		for i := 0; i < len(part); i++ {
			u := part[i]
			total += size[u]
			for _, v := range w.weight.col[w.weight.start[u]:w.weight.start[u+1]] {
				if !seen[v] {
					seen[v] = true
					part = append(part, v)
				}
			}
		}
		if total > most {
			nodes, most = part, total
		}
	}
	return nodes
}

// lanczos returns the eigenvalues of a few steps of Lanczos's method (1950) on
// one component, with its equilibrium projected out: the extreme ones are
// close to the smallest but zero and the largest of L, from inside.
func (w *Walk) lanczos(component []int32) []float64 {
	n := w.Order()
	still := make([]float64, n)
	for _, u := range component {
		still[u] = math.Sqrt(w.capacity[u])
	}
	floats.Scale(1/floats.Norm(still, 2), still)
	rng := rand.New(rand.NewPCG(3, 4))
	v := make([]float64, n)
	for _, u := range component {
		v[u] = rng.NormFloat64()
	}
	basis := [][]float64{still}
	var diagonal, off []float64
	next := make([]float64, n)
	for range min(lanczosSteps, len(component)-1) {
		for range 2 { // orthogonal to rounding: twice is enough (Parlett 1980)
			for _, b := range basis {
				floats.AddScaled(v, -floats.Dot(b, v), b)
			}
		}
		norm := floats.Norm(v, 2)
		if norm < 1e-10 {
			break
		}
		if len(diagonal) > 0 {
			off = append(off, norm)
		}
		floats.Scale(1/norm, v)
		basis = append(basis, v)
		w.symmetrised(next, v)
		diagonal = append(diagonal, floats.Dot(v, next))
		v, next = next, make([]float64, n)
	}
	t := mat.NewSymDense(max(len(diagonal), 1), nil)
	for i, d := range diagonal {
		t.SetSym(i, i, d)
		if i < len(off) {
			t.SetSym(i, i+1, off[i])
		}
	}
	return eigenvalues(t)
}

// dense returns all eigenvalues of L on one component, ascending, without the
// zero of its equilibrium.
func (w *Walk) dense(component []int32) []float64 {
	at := make(map[int32]int, len(component))
	for i, u := range component {
		at[u] = i
	}
	s := mat.NewSymDense(len(component), nil)
	for i, u := range component {
		s.SetSym(i, i, w.rate[u])
		w.weight.DoRowNonZero(int(u), func(_, v int, x float64) {
			s.SetSym(i, at[int32(v)], -x/math.Sqrt(w.capacity[u]*w.capacity[v]))
		})
	}
	return eigenvalues(s)[1:]
}

func eigenvalues(s mat.Symmetric) []float64 {
	var e mat.EigenSym
	if !e.Factorize(s, false) {
		return nil
	}
	return e.Values(nil)
}

// spectrum estimates the smallest eigenvalue above 0 (the gap) and the largest
// of L on the component with the most nodes; 0, 0 where that has no link. The
// gap is taken from the finest level that is small enough for all eigenvalues,
// as slow modes survive coarsening.
func (h *Hierarchy) spectrum() (gap, top float64) {
	w := h.walks[0]
	size := make([]float64, w.Order())
	for u := range size {
		size[u] = 1
	}
	component := w.largestComponent(size)
	if len(component) < 2 {
		return 0, 0
	}
	var values []float64
	if len(component) <= denseLimit {
		values = w.dense(component)
	} else {
		values = w.lanczos(component)
	}
	gap, top = values[0], values[len(values)-1]
	for level := 0; level < len(h.parent) && len(component) > denseLimit; level++ {
		coarse := make([]float64, h.walks[level+1].Order())
		for u, a := range h.parent[level] {
			coarse[a] += size[u]
		}
		size = coarse
		component = h.walks[level+1].largestComponent(size)
		if len(component) > 8 && len(component) <= denseLimit {
			gap = min(gap, h.walks[level+1].dense(component)[0])
		}
	}
	return gap, top
}

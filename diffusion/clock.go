package diffusion

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// setClocks multiplies the rates of each coarser level by the factor that lets
// its slow modes decay as they do on the level below. The links are fitted to
// functions that vary over a few links; over a whole network small errors of
// theirs add up. The slow modes come from the coarsest level and are carried
// down, smoothed on every level.
//
// Cost: as the smoothing in coarsen.
func (h *Hierarchy) setClocks() {
	last := len(h.walks) - 1
	if last == 0 || h.walks[last].Order() > denseLimit {
		return
	}
	f := h.walks[last].slowModes()
	if f == nil {
		return
	}
	ratio := make([]float64, last) // decay on a level by that on the next
	for level := last - 1; level >= 0; level-- {
		fine, coarse := h.walks[level], h.walks[level+1]
		g := make([]float64, fine.Order()*probes)
		for u, a := range h.parent[level] {
			copy(g[u*probes:(u+1)*probes], f[int(a)*probes:(int(a)+1)*probes])
		}
		f = fine.smoothed(g)
		ratio[level] = fine.decay(f) / coarse.decay(fine.means(f, h.parent[level], coarse.capacity))
		if !(ratio[level] > 0.25 && ratio[level] < 4) {
			ratio[level] = 1 // no mode left to judge by
		}
	}
	factor := 1.0
	for level, r := range ratio {
		factor *= r
		h.walks[level+1] = h.walks[level+1].faster(factor)
	}
}

// faster is the walk with all rates multiplied by a factor.
func (w *Walk) faster(factor float64) *Walk {
	weight := *w.weight
	weight.value = make([]float64, len(w.weight.value))
	for k, x := range w.weight.value {
		weight.value[k] = factor * x
	}
	return newWalk(&weight, w.capacity)
}

// slowModes returns the slowest eigenfunctions of Lᵀ but constants, nodes ×
// probes; columns beyond those there are stay 0. nil where there is none.
func (w *Walk) slowModes() []float64 {
	n := w.Order()
	s := mat.NewSymDense(n, nil)
	for u := range n {
		s.SetSym(u, u, w.rate[u])
		w.weight.DoRowNonZero(u, func(_, v int, x float64) {
			s.SetSym(u, v, -x/math.Sqrt(w.capacity[u]*w.capacity[v]))
		})
	}
	var e mat.EigenSym
	if !e.Factorize(s, true) {
		return nil
	}
	var vectors mat.Dense
	e.VectorsTo(&vectors)
	f, count := make([]float64, n*probes), 0
	for k, x := range e.Values(nil) {
		if x < 1e-12*w.bound || count == modes {
			continue
		}
		for u := range n {
			f[u*probes+count] = vectors.At(u, k) / math.Sqrt(w.capacity[u])
		}
		count++
	}
	if count == 0 {
		return nil
	}
	return f
}

// modes is how many slow modes set the clock.
const modes = 4

// decay is the mean rate at which functions, nodes × probes, decay: the sum of
// their Rayleigh quotients Σ weight (f_u - f_v)² / Σ capacity (f - mean)².
func (w *Walk) decay(f []float64) float64 {
	var energy, norm, mean [probes]float64
	total := 0.0
	for u, c := range w.capacity {
		total += c
		for j := range mean {
			mean[j] += float64(c * f[u*probes+j])
		}
	}
	for u, c := range w.capacity {
		for j := range mean {
			d := f[u*probes+j] - mean[j]/total
			norm[j] += float64(c * d * d)
		}
		for k := w.weight.start[u]; k < w.weight.start[u+1]; k++ {
			v := int(w.weight.col[k])
			for j := range mean {
				d := f[u*probes+j] - f[v*probes+j]
				energy[j] += float64(w.weight.value[k] / 2 * d * d)
			}
		}
	}
	sum := 0.0
	for j, e := range energy {
		if norm[j] > 0 {
			sum += e / norm[j]
		}
	}
	return sum
}

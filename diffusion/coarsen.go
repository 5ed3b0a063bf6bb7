package diffusion

import (
	"math/rand/v2"
	"sort"
)

// coarsen joins the nodes of w into aggregates of two or a few and returns the
// walk of the aggregates, with the aggregate of each node. Aggregates are
// numbered by their first node, and never reach across components. The walk
// keeps the clock of w, but for what setClocks adds: exp(-tL) of both describe
// the same time.
//
// Cost: O(links log links + nodes) time.
func coarsen(w *Walk) (coarse *Walk, parent []int32) {
	parent, n := w.aggregate()
	capacity := make([]float64, n)
	for u, a := range parent {
		capacity[a] += w.capacity[u]
	}
	return newWalk(symmetric(n, w.crossings(parent, capacity)), capacity), parent
}

// aggregate pairs nodes along the links by which they exchange mass fastest,
// at the rate w_uv (1/c_u + 1/c_v): first each pair that is left, in falling
// order of rate (ties: by node numbers), then each node left over joins the
// neighbour it exchanges with fastest. Greedy matching by heavy edges is
// common in multilevel partitioning (Karypis & Kumar 1998).
func (w *Walk) aggregate() (parent []int32, count int) {
	n := w.Order()
	type pair struct {
		u, v int32
		rate float64
	}
	pairs := make([]pair, 0, w.weight.NNZ()/2)
	w.weight.DoNonZero(func(u, v int, x float64) {
		if u < v {
			pairs = append(pairs, pair{int32(u), int32(v), x * (1/w.capacity[u] + 1/w.capacity[v])})
		}
	})
	sort.Slice(pairs, func(i, j int) bool {
		a, b := pairs[i], pairs[j]
		switch {
		case a.rate != b.rate:
			return a.rate > b.rate
		case a.u != b.u:
			return a.u < b.u
		}
		return a.v < b.v
	})
	mate := make([]int32, n) // the first node of the aggregate, -1 while free
	for u := range mate {
		mate[u] = -1
	}
	for _, p := range pairs {
		if mate[p.u] < 0 && mate[p.v] < 0 {
			mate[p.u], mate[p.v] = p.u, p.u
		}
	}
	joined := append([]int32(nil), mate...)
	for _, p := range pairs {
		if joined[p.u] < 0 && mate[p.v] >= 0 {
			joined[p.u] = mate[p.v]
		}
		if joined[p.v] < 0 && mate[p.u] >= 0 {
			joined[p.v] = mate[p.u]
		}
	}
	number := make([]int32, n)
	for u := range number {
		number[u] = -1
	}
	parent = make([]int32, n)
	for u, m := range joined {
		if m < 0 { // no link at all
			m = int32(u)
		}
		if number[m] < 0 {
			number[m] = int32(count)
			count++
		}
		parent[u] = number[m]
	}
	return parent, count
}

const (
	probes = 8  // smooth functions a coarse link is fitted to
	sweeps = 20 // of smoothing, so that they vary over about three links
)

// crossings lists the links between aggregates. The plain sum of the weights
// that cross would let mass move too fast, by the ratio of the distance
// between aggregates to the length of a link: a jump to the next aggregate
// lands in its middle, a step across the border just behind it. So each sum is
// multiplied by the factor that fits, by least squares over a few smooth
// random functions, the flow Σ w_uv (f_u - f_v) across the border to the
// difference of the functions' means.
func (w *Walk) crossings(parent []int32, capacity []float64) []link {
	f := w.smooth()
	mean := w.means(f, parent, capacity)
	list := w.fluxes(parent, len(capacity), f, mean)
	var flow, energy float64
	for _, c := range list {
		flow, energy = flow+c.flow, energy+c.energy
	}
	if energy == 0 {
		energy, flow = 1, 1
	}
	typical := min(max(flow/energy, 1e-3), 1)
	links := make([]link, len(list))
	few := energy / float64(len(list)+1) // the average link, as a weak prior
	for i, c := range list {
		factor := (c.flow + typical*few/probes) / (c.energy + few/probes)
		factor = min(max(factor, typical/4), min(4*typical, 1))
		links[i] = link{c.a, c.b, factor * c.weight}
	}
	return links
}

// means averages functions, nodes × probes, over aggregates.
func (w *Walk) means(f []float64, parent []int32, capacity []float64) []float64 {
	mean := make([]float64, len(capacity)*probes)
	for u, a := range parent {
		for j := range probes {
			mean[int(a)*probes+j] += float64(w.capacity[u] / capacity[a] * f[u*probes+j])
		}
	}
	return mean
}

// crossing gathers the links between two aggregates: their total weight, the
// flow of the probes across them times the difference of the means, and what
// that would be if the flow were weight times the difference.
type crossing struct {
	a, b                 int32
	weight, flow, energy float64
}

func (w *Walk) fluxes(parent []int32, count int, f, mean []float64) []crossing {
	members := make([]int32, len(parent)) // nodes sorted by aggregate
	begin := make([]int, count+1)
	for _, a := range parent {
		begin[a+1]++
	}
	for a := range count {
		begin[a+1] += begin[a]
	}
	next := append([]int(nil), begin[:count]...)
	for u, a := range parent {
		members[next[a]] = int32(u)
		next[a]++
	}
	var list []crossing
	at := make([]int, count) // place + 1 of the crossing from a
	for a := range count {
		first := len(list)
		for _, u := range members[begin[a]:begin[a+1]] {
			for k := w.weight.start[u]; k < w.weight.start[u+1]; k++ {
				v := w.weight.col[k]
				b := parent[v]
				if int(b) <= a {
					continue
				}
				if at[b] <= first {
					list = append(list, crossing{a: int32(a), b: b})
					at[b] = len(list)
				}
				c := &list[at[b]-1]
				c.weight += w.weight.value[k]
				for j := range probes {
					d := mean[a*probes+j] - mean[int(b)*probes+j]
					c.flow += float64(w.weight.value[k] * d * (f[int(u)*probes+j] - f[int(v)*probes+j]))
					c.energy += float64(w.weight.value[k] * d * d)
				}
			}
		}
	}
	return list
}

// smooth returns a few smooth random functions, nodes × probes.
func (w *Walk) smooth() []float64 {
	rng := rand.New(rand.NewPCG(1, 2)) // fixed: the hierarchy is part of the method
	f := make([]float64, w.Order()*probes)
	for i := range f {
		f[i] = float64(1 - 2*int(rng.Uint64()&1))
	}
	return w.smoothed(f)
}

// smoothed averages functions, nodes × probes, with their neighbours again and
// again: f <- (I - Lᵀ/bound) f. It takes f over.
func (w *Walk) smoothed(f []float64) []float64 {
	if w.bound == 0 {
		return f
	}
	g := make([]float64, len(f))
	for range sweeps {
		for u := range w.Order() {
			row := (*[probes]float64)(g[u*probes:])
			own := (*[probes]float64)(f[u*probes:])
			stay := 1 - w.rate[u]/w.bound
			for j := range row {
				row[j] = stay * own[j]
			}
			for k := w.weight.start[u]; k < w.weight.start[u+1]; k++ {
				share := w.weight.value[k] / (w.capacity[u] * w.bound)
				other := (*[probes]float64)(f[int(w.weight.col[k])*probes:])
				for j := range row {
					row[j] += float64(share * other[j])
				}
			}
		}
		f, g = g, f
	}
	return f
}

package resistor

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
)

// laplacian is that of the core in compressed rows, numbered from the cut on;
// off-diagonal entries are -value.
type laplacian struct {
	start    []int
	col      []int32
	value    []float64
	diagonal []float64
}

func newLaplacian(f *factor) *laplacian {
	n, e := len(f.order)-f.cut, &f.core
	l := &laplacian{start: make([]int, n+1), diagonal: make([]float64, n)}
	for k, u := range e.from {
		l.start[u+1]++
		l.start[e.to[k]+1]++
	}
	for i := range n {
		l.start[i+1] += l.start[i]
	}
	l.col, l.value = make([]int32, l.start[n]), make([]float64, l.start[n])
	next := append([]int(nil), l.start[:n]...)
	put := func(i, j int32, c float64) {
		l.col[next[i]], l.value[next[i]] = j, c
		next[i]++
		l.diagonal[i] += c
	}
	for k, u := range e.from {
		put(u, e.to[k], e.weight[k])
		put(e.to[k], u, e.weight[k])
	}
	return l
}

const (
	aim       = 3e-3 // of the error left, relative, in the norm of the energy
	mostSteps = 200
)

// plan sets how many steps of Chebyshev's iteration are made, for eigenvalues
// of the preconditioned Laplacian between low and high.
func (c *Circuit) plan(low, high float64) {
	c.low, c.high = low, high
	root := math.Sqrt(high / low)
	c.steps = 1
	if high > low {
		rate := (root - 1) / (root + 1)
		c.steps = max(1, min(mostSteps, int(math.Ceil(math.Log(aim/2)/math.Log(rate)))))
	}
}

// solve overwrites p.x, which sums to 0 on every component, with about L⁺ of it.
// The nodes before the cut are eliminated; on the core Chebyshev's iteration
// (Saad 2003, algorithm 12.1, preconditioned) is run. Every lane takes the same
// steps: the map is linear.
func (c *Circuit) solve(p *Panel) {
	c.factor.forward(p.x, 0, c.factor.cut)
	if !c.factor.exact() {
		copy(p.r, p.x[c.factor.cut:])
		c.iterate(p, p.x[c.factor.cut:])
	}
	c.factor.backward(p.x, 0, c.factor.cut)
}

// iterate solves the core for p.r, which it overwrites, into x.
func (c *Circuit) iterate(p *Panel, x []row) {
	theta, delta := (c.high+c.low)/2, (c.high-c.low)/2
	copy(p.z, p.r)
	c.inner.apply(p.z)
	for i := range p.d {
		d, z, x := &p.d[i], &p.z[i], &x[i]
		for l := range d {
			d[l] = z[l] / theta
			x[l] = d[l]
		}
	}
	rho := delta / theta
	for range c.steps - 1 {
		c.laplacian.times(p.d, func(i int, y *row) {
			r, z := &p.r[i], &p.z[i]
			for l := range r {
				r[l] -= y[l]
				z[l] = r[l]
			}
		})
		c.inner.apply(p.z)
		next := 1 / (2*theta/delta - rho)
		keep, move := next*rho, 2*next/delta
		rho = next
		for i := range p.d {
			d, z, x := &p.d[i], &p.z[i], &x[i]
			for l := range d {
				d[l] = float64(keep*d[l]) + float64(move*z[l])
				x[l] += d[l]
			}
		}
	}
}

// measure plans the iteration: the extreme eigenvalues come from a few steps of
// conjugate gradients on random panels (Lanczos's method: Saad 2003, 6.7.3), a
// little widened, and a trial says whether they hold.
func (c *Circuit) measure() {
	c.plan(1, 1)
	if c.factor.exact() {
		return
	}
	var p Panel
	p.fit(c)
	x := make([]row, len(p.r))
	low, high := c.extremes(&p)
	for low, high = low/1.1, high*1.05; ; high *= 1.3 {
		c.plan(low, high)
		c.random(&p)
		before := c.energy(&p)
		c.iterate(&p, x)
		// p.r lacks the last step; renew what is left from there
		c.laplacian.times(p.d, func(i int, y *row) {
			for l := range y {
				p.r[i][l] -= y[l]
			}
		})
		if c.energy(&p) < 10*aim*before || c.steps == mostSteps {
			return
		}
	}
}

// energy is Σ over lanes of the root of r·M r, M being the factor's solution.
func (c *Circuit) energy(p *Panel) float64 {
	copy(p.z, p.r)
	c.inner.apply(p.z)
	sum, all := dots(p.r, p.z), 0.0
	for _, x := range sum {
		all += math.Sqrt(max(x, 0))
	}
	return all
}

// random fills p.r with signs, less their mean on every component.
func (c *Circuit) random(p *Panel) {
	rng := rand.New(rand.NewPCG(9, 10))
	nodes := c.factor.order[c.factor.cut:]
	sum, size := make([]row, len(c.tree.roots)), make([]float64, len(c.tree.roots))
	for i, v := range nodes {
		part := c.tree.label[v]
		size[part]++
		for l := range sum[part] {
			p.r[i][l] = float64(1 - 2*int(rng.Uint64()&1))
			sum[part][l] += p.r[i][l]
		}
	}
	for i, v := range nodes {
		part := c.tree.label[v]
		for l := range sum[part] {
			p.r[i][l] -= sum[part][l] / size[part]
		}
	}
}

func dots(a, b []row) (sum row) {
	for i := range a {
		x, y := &a[i], &b[i]
		for l := range sum {
			sum[l] += float64(x[l] * y[l])
		}
	}
	return sum
}

const lanczosSteps = 16

// extremes estimates the least and largest eigenvalue above 0 of M L.
func (c *Circuit) extremes(p *Panel) (low, high float64) {
	c.random(p)
	copy(p.z, p.r)
	c.inner.apply(p.z)
	copy(p.d, p.z)
	rz := dots(p.r, p.z)
	first := rz
	var diagonal, off [lanes][]float64
	var beta, alpha row
	ld := make([]row, len(p.d))
	for range lanczosSteps {
		c.laplacian.times(p.d, func(i int, y *row) { ld[i] = *y })
		curve := dots(p.d, ld)
		var step row
		for l := range step {
			if !(rz[l] > 1e-20*first[l]) || !(curve[l] > 0) {
				continue // solved: nothing more to learn from this lane
			}
			if n := len(diagonal[l]); n > 0 {
				off[l] = append(off[l], math.Sqrt(beta[l])/alpha[l])
				diagonal[l] = append(diagonal[l], curve[l]/rz[l]+beta[l]/alpha[l])
			} else {
				diagonal[l] = append(diagonal[l], curve[l]/rz[l])
			}
			step[l] = rz[l] / curve[l]
			alpha[l] = step[l]
		}
		for i := range p.r {
			for l := range step {
				p.r[i][l] -= float64(step[l] * ld[i][l])
			}
		}
		copy(p.z, p.r)
		c.inner.apply(p.z)
		next := dots(p.r, p.z)
		for l := range beta {
			beta[l] = 0
			if rz[l] > 0 {
				beta[l] = next[l] / rz[l]
			}
		}
		rz = next
		for i := range p.d {
			for l := range beta {
				p.d[i][l] = p.z[i][l] + float64(beta[l]*p.d[i][l])
			}
		}
	}
	low, high = 1, 1
	for l := range diagonal {
		n := len(diagonal[l])
		if n == 0 {
			continue
		}
		t := mat.NewSymDense(n, nil)
		for i, x := range diagonal[l] {
			t.SetSym(i, i, x)
			if i > 0 {
				t.SetSym(i-1, i, off[l][i-1])
			}
		}
		var e mat.EigenSym
		if e.Factorize(t, false) {
			values := e.Values(nil)
			low, high = min(low, max(values[0], 1e-3)), max(high, values[n-1])
		}
	}
	return low, high
}

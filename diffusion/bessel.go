package diffusion

import "math"

// chebyshev returns the coefficients of
//
//	exp(-a(1-x)) = Σ_k c_k T_k(x) on [-1, 1], c_0 = e^{-a} I_0(a), c_k = 2 e^{-a} I_k(a)
//
// up to the first order whose tail Σ_{m>k} c_m is at most tol (Abramowitz &
// Stegun 9.6.34). All c_k are positive and sum to 1, and |T_k| <= 1, so the
// tail bounds the truncation error. a >= 0, 0 < tol < 1.
// Cost: O(√(a log 1/tol)) for large a.
func chebyshev(a, tol float64) []float64 {
	c := scaledBessel(a, start(a, tol*1e-20))
	for k := 1; k < len(c); k++ {
		c[k] *= 2
	}
	tail, order := 0.0, len(c)-1
	for order > 0 && tail+c[order] <= tol {
		tail += c[order]
		order--
	}
	return c[:order+1]
}

// start is an order from which on the coefficients add up to less than eps.
// c_k is the probability that a symmetric walk in continuous time is k steps
// from its start after a mean of a steps, so Bernstein's inequality gives
// Σ_{m>=k} c_m <= 2 exp(-k²/(2(a + k/3))).
func start(a, eps float64) int {
	l := math.Log(2 / eps)
	return int(math.Ceil(l/3+math.Sqrt(l*l/9+2*a*l))) + 1
}

// scaledBessel is e^{-a} I_k(a) for k = 0..order, by Miller's backward
// recurrence I_{k-1} = I_{k+1} + (2k/a) I_k, normalised by
// I_0 + 2 Σ I_k = e^a (A&S 9.12, 9.6.37). Orders far past √a come out
// accurate only if the start lies beyond them, which it does for all that
// chebyshev keeps.
func scaledBessel(a float64, order int) []float64 {
	c := make([]float64, order+1)
	if a < 1e-9 { // the next terms are below a² < 1e-18
		c[0] = 1 - a
		if order > 0 {
			c[1] = a / 2
		}
		return c
	}
	const large = 1e200
	above, at, sum := 0.0, 1e-280, 0.0
	for k := order; k > 0; k-- {
		c[k] = at
		sum += 2 * at
		above, at = at, above+float64(2*float64(k)/a*at)
		if at > large {
			for j := k; j <= order && c[j] > 0; j++ {
				c[j] /= large
			}
			above, at, sum = above/large, at/large, sum/large
		}
	}
	c[0] = at
	sum += at
	for k := range c {
		c[k] /= sum
	}
	return c
}

package dual

// manhattan is Σ |a_i - b_i|: differences in float32, sums in float64 over 16
// interleaved lanes that are added up in a fixed tree, which is the order the
// assembly has too. b is at least as long as a.
func manhattanPlain(a, b []float32) float64 {
	var sum [16]float64
	b = b[:len(a)]
	for len(a) >= 16 {
		x, y := (*[16]float32)(a), (*[16]float32)(b)
		for l := range x {
			sum[l] += abs(x[l] - y[l])
		}
		a, b = a[16:], b[16:]
	}
	for l := range a {
		sum[l] += abs(a[l] - b[l])
	}
	for half := 8; half > 0; half /= 2 {
		for l := range half {
			sum[l] += sum[l+half]
		}
	}
	return sum[0]
}

func abs(x float32) float64 {
	if x < 0 {
		x = -x
	}
	return float64(x)
}

func manhattan(a, b []float32) float64 { return manhattanPlain(a, b) }

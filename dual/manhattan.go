package dual

// manhattan is Σ |a_i - b_i|: differences in float32, sums in float64 over 16
// interleaved lanes that are added up in a fixed tree. The assembly and the
// plain form add in the same order and agree to the bit. b is at least as long
// as a.
func manhattan(a, b []float32) float64 {
	var sum [16]float64
	whole := len(a) &^ 15
	absolute(&sum, a[:whole], b[:whole])
	for l, x := range a[whole:] {
		sum[l] += magnitude(x - b[whole+l])
	}
	for half := 8; half > 0; half /= 2 {
		for l := range half {
			sum[l] += sum[l+half]
		}
	}
	return sum[0]
}

// absolutePlain adds |a_i - b_i| to lane i mod 16 of sum; the lengths are equal
// multiples of 16.
func absolutePlain(sum *[16]float64, a, b []float32) {
	for len(a) >= 16 {
		x, y := (*[16]float32)(a), (*[16]float32)(b)
		for l := range x {
			sum[l] += magnitude(x[l] - y[l])
		}
		a, b = a[16:], b[16:]
	}
}

func magnitude(x float32) float64 {
	if x < 0 {
		x = -x
	}
	return float64(x)
}

package dual

// An Embedding holds one vector a sample: the scales of a Multiscale side by
// side, unweighted, in the unit of the masses. Vectors is row-major, Rows ×
// Width. In float32, samples that differ by less than some 1e-6 of their mass
// are told apart from equal ones but not measured.
type Embedding struct {
	Scales  []Scale
	Width   int
	Rows    int
	Vectors []float32
}

// Row is the vector of sample i.
func (e *Embedding) Row(i int) []float32 { return e.Vectors[i*e.Width : (i+1)*e.Width] }

// Theory is the theoretical weight of each scale. With them distances have no
// unit: they rank pairs but are no lengths.
func (e *Embedding) Theory() []float64 {
	w := make([]float64, len(e.Scales))
	for k, s := range e.Scales {
		w[k] = s.Weight
	}
	return w
}

// Terms sets dst, one value a scale, to the L1 norms of the difference of
// samples i and j, and returns it; a nil dst is made. Sums run in float64 in a
// fixed order: the same bits whichever of i and j comes first, 0 for equal
// vectors. Cost: O(Width).
func (e *Embedding) Terms(i, j int, dst []float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(e.Scales))
	}
	a, b := e.Row(i), e.Row(j)
	for k, s := range e.Scales {
		sum := 0.0
		for begin := s.Begin; begin < s.End; begin += strip {
			end := min(begin+strip, s.End)
			sum += manhattan(a[begin:end], b[begin:end])
		}
		dst[k] = sum
	}
	return dst
}

// Distance is Σ_k weights_k Terms_k of samples i and j. Cost: O(Width).
func (e *Embedding) Distance(i, j int, weights []float64) float64 {
	var terms [64]float64
	sum := 0.0
	for k, t := range e.Terms(i, j, terms[:len(e.Scales)]) {
		sum += float64(weights[k] * t)
	}
	return sum
}

// strip is how many columns are added up at a time: two rows of them fit the
// first cache.
const strip = 2048

// Distances sets dst, row-major, to the distances of every sample of [i0, i1)
// to every sample of [j0, j1), each the same bits as Distance. It goes through
// the vectors strip by strip, so that a block of 16 × 16 samples reads each
// from memory once. Cost: O((i1-i0)(j1-j0) Width).
func (e *Embedding) Distances(dst []float64, i0, i1, j0, j1 int, weights []float64) {
	dst = dst[:(i1-i0)*(j1-j0)]
	clear(dst)
	term := make([]float64, len(dst))
	for k, s := range e.Scales {
		clear(term)
		for begin := s.Begin; begin < s.End; begin += strip {
			end := min(begin+strip, s.End)
			at := 0
			for i := i0; i < i1; i++ {
				a := e.Row(i)[begin:end]
				for j := j0; j < j1; j++ {
					term[at] += manhattan(a, e.Row(j)[begin:end])
					at++
				}
			}
		}
		for at, t := range term {
			dst[at] += float64(weights[k] * t)
		}
	}
}

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
		for begin := s.Begin; begin < s.End; begin += Strip {
			end := min(begin+Strip, s.End)
			sum += manhattan(a[begin:end], b[begin:end])
		}
		dst[k] = sum
	}
	return dst
}

// Distance is Σ_k weights_k Terms_k of samples i and j, to some 1e-6: sums run
// in float32 first. It is the same bits whichever of i and j comes first, and 0
// for equal vectors. Cost: O(Width).
func (e *Embedding) Distance(i, j int, weights []float64) float64 {
	var d [1]float64
	e.Distances(d[:], i, i+1, j, j+1, weights)
	return d[0]
}

// Strip is how many columns are added up at a time: the rows of two sides of a
// square of pairs stay in the second cache meanwhile. AddDistances over parts
// of the columns gives the same bits as over all where the parts are multiples
// of it.
const Strip = 2048

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
		e.add(term, i0, i1, j0, j1, s.Begin, s.End)
		for at, t := range term {
			dst[at] += float64(weights[k] * t)
		}
	}
}

// AddDistances adds to dst, laid out as in Distances, the L1 distances of whole
// rows, whatever the scales.
func (e *Embedding) AddDistances(dst []float64, i0, i1, j0, j1 int) {
	e.add(dst, i0, i1, j0, j1, 0, e.Width)
}

func (e *Embedding) add(dst []float64, i0, i1, j0, j1, first, last int) {
	for begin := first; begin < last; begin += Strip {
		end := min(begin+Strip, last)
		at := 0
		for i := i0; i < i1; i++ {
			a := e.Row(i)[begin:end]
			for j := j0; j < j1; j++ {
				dst[at] += taxi(a, e.Row(j)[begin:end])
				at++
			}
		}
	}
}

package pairwise

import (
	"context"
	"encoding/binary"
	"encoding/json"
	"math"

	"example.org/barrow/graphio"
)

// potentials holds a value a node for each witness: the potentials that proved
// the pairs solved to fit a calibration. Each bounds the distance of every pair
// from below, by the difference of its heights, potential·p - potential·q
// (Kantorovich & Rubinstein 1958), and the largest of these bounds is a term of
// the estimate beside the L1 norms: an L∞ norm.
//
// As JSON it is float32, little-endian, in base64.
type potentials []float32

// heights is potential·sample for every witness, row-major by sample, 0 for
// nodes without mass. Cost: O(witnesses × entries).
func heights(ctx context.Context, witness []potentials, n int, sample func(i int) graphio.Sample, threads int) ([]float64, error) {
	count := len(witness)
	all := make([]float64, n*count)
	err := work(ctx, threads, n, func(int, int) {}, func() func(int) error {
		return func(i int) error {
			s, row := sample(i), all[i*count:(i+1)*count]
			for k, potential := range witness {
				sum := 0.0
				for j, v := range s.Nodes {
					sum += float64(float64(potential[v]) * s.Values[j])
				}
				row[k] = sum
			}
			return nil
		}
	})
	return all, err
}

// farthest is the largest difference of two rows of heights; skip, if not below
// 0, leaves one out.
func farthest(a, b []float64, skip int) float64 {
	most := 0.0
	for k, x := range a {
		d := math.Abs(x - b[k])
		if d > most && k != skip {
			most = d
		}
	}
	return most
}

// addWitnesses adds weight times the largest difference of heights to every
// pair.
func (m *Matrix) addWitnesses(ctx context.Context, all []float64, count int, weight float64, opt Options) error {
	return tiles(ctx, opt.threads(), len(m.Names), func(int, int) {}, func(i0, i1, j0, j1 int) {
		for i := i0; i < i1; i++ {
			a := all[i*count : (i+1)*count]
			for j := max(j0, i+1); j < j1; j++ {
				m.Value[m.Index(i, j)] += float64(weight * farthest(a, all[j*count:(j+1)*count], -1))
			}
		}
	})
}

// MarshalJSON writes the bytes of the values as base64.
func (p potentials) MarshalJSON() ([]byte, error) {
	text := make([]byte, 0, 4*len(p))
	for _, x := range p {
		text = binary.LittleEndian.AppendUint32(text, math.Float32bits(x))
	}
	return json.Marshal(text)
}

// UnmarshalJSON reads what MarshalJSON wrote.
func (p *potentials) UnmarshalJSON(b []byte) error {
	var text []byte
	if err := json.Unmarshal(b, &text); err != nil {
		return err
	}
	*p = make(potentials, len(text)/4)
	for i := range *p {
		(*p)[i] = math.Float32frombits(binary.LittleEndian.Uint32(text[4*i:]))
	}
	return nil
}

package pairwise

import (
	"context"
	"encoding/binary"
	"fmt"
	"math"
	"os"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// Vectors holds one vector a sample, such that the L1 distance of two is what a
// method makes of the pair: in memory, or, where they do not fit, in a file that
// Close removes.
type Vectors struct {
	Rows, Width int
	OnDisk      bool

	memory   []float32
	file     *os.File
	nameless bool
	// In the file the columns come block by block, each with its part of all
	// rows, so that comparing all pairs reads every byte once.
	block int
}

// An embedder makes the vectors of samples: see dual.Estimator.
type embedder interface {
	Width() int
	EmbedRows(ctx context.Context, samples *graphio.Samples, row func(i int) []float32, threads int, progress func(done, total int)) error
}

// columnStep is what column blocks are multiples of, so that sums run in the
// same order as in memory.
const columnStep = dual.Strip

// embedAll makes the vectors of all samples, in memory if they take at most
// room bytes, on disk otherwise, with no more than room held at a time.
func embedAll(ctx context.Context, e embedder, samples *graphio.Samples, room uint64, opt Options) (*Vectors, error) {
	v := &Vectors{Rows: samples.Len(), Width: e.Width()}
	switch need := 4 * uint64(v.Rows) * uint64(v.Width); opt.Hold {
	case "disk":
		v.OnDisk = true
	case "memory":
	default:
		v.OnDisk = need > room
	}
	if !v.OnDisk {
		v.memory = make([]float32, v.Rows*v.Width)
		return v, e.EmbedRows(ctx, samples, v.row, opt.Threads, opt.stage("embed"))
	}
	if err := v.toDisk(ctx, e, samples, room, opt); err != nil {
		v.Close()
		return nil, err
	}
	return v, nil
}

func (v *Vectors) row(i int) []float32 { return v.memory[i*v.Width : (i+1)*v.Width] }

// toDisk embeds a batch of samples at a time and writes it block by block.
func (v *Vectors) toDisk(ctx context.Context, e embedder, samples *graphio.Samples, room uint64, opt Options) error {
	var err error
	if v.file, err = os.CreateTemp(opt.Scratch, ".barrow-vectors-*"); err != nil {
		return fmt.Errorf("vectors of the samples: %w", err)
	}
	// Where a file that is open can be removed, nothing is left of it however
	// the run ends.
	v.nameless = os.Remove(v.file.Name()) == nil
	room = max(room, 1<<20)
	columns := int(room / 2 / 4 / uint64(max(v.Rows, 1)))
	v.block = max(columnStep, columns/columnStep*columnStep)
	batch := max(16, int(room/2/4/uint64(max(v.Width, 1)))/16*16)
	report := opt.stage("embed")
	var held []float32
	for first := 0; first < v.Rows; first += batch {
		end := min(v.Rows, first+batch)
		part, err := some(samples, first, end)
		if err != nil {
			return err
		}
		held = grown(held, (end-first)*v.Width)
		row := func(i int) []float32 { return held[i*v.Width : (i+1)*v.Width] }
		progress := func(done, _ int) { report(first+done, v.Rows) }
		if err := e.EmbedRows(ctx, part, row, opt.Threads, progress); err != nil {
			return err
		}
		if err := v.write(row, first, end); err != nil {
			return fmt.Errorf("vectors of the samples: %w", err)
		}
	}
	return nil
}

func some(samples *graphio.Samples, first, end int) (*graphio.Samples, error) {
	list := make([]graphio.Sample, 0, end-first)
	for i := first; i < end; i++ {
		list = append(list, samples.At(i))
	}
	return graphio.NewSamples(samples.Order(), list)
}

func grown(s []float32, size int) []float32 {
	if cap(s) < size {
		return make([]float32, size)
	}
	return s[:size]
}

// write puts rows [first, end) into every column block of the file.
func (v *Vectors) write(row func(i int) []float32, first, end int) error {
	var text []byte
	for begin := 0; begin < v.Width; begin += v.block {
		stop := min(v.Width, begin+v.block)
		text = text[:0]
		for i := range end - first {
			for _, x := range row(i)[begin:stop] {
				text = binary.LittleEndian.AppendUint32(text, math.Float32bits(x))
			}
		}
		if _, err := v.file.WriteAt(text, v.offset(begin, first)); err != nil {
			return err
		}
	}
	return nil
}

// offset is where the part of row i that begins at a block's first column is.
func (v *Vectors) offset(begin, i int) int64 {
	stop := min(v.Width, begin+v.block)
	return 4 * (int64(begin)*int64(v.Rows) + int64(i)*int64(stop-begin))
}

// read sets dst to the columns [begin, begin+block) of rows [first, end).
func (v *Vectors) read(dst []float32, begin, first, end int) error {
	text := make([]byte, min(1<<20, 4*len(dst)))
	at := v.offset(begin, first)
	for len(dst) > 0 {
		n := min(len(dst), len(text)/4)
		if _, err := v.file.ReadAt(text[:4*n], at); err != nil {
			return fmt.Errorf("vectors of the samples: %w", err)
		}
		for k := range n {
			dst[k] = math.Float32frombits(binary.LittleEndian.Uint32(text[4*k:]))
		}
		dst, at = dst[n:], at+int64(4*n)
	}
	return nil
}

// Row sets dst, grown where needed, to the vector of sample i and returns it.
func (v *Vectors) Row(i int, dst []float32) ([]float32, error) {
	dst = grown(dst, v.Width)
	if !v.OnDisk {
		copy(dst, v.row(i))
		return dst, nil
	}
	for begin := 0; begin < v.Width; begin += v.block {
		if err := v.read(dst[begin:min(v.Width, begin+v.block)], begin, i, i+1); err != nil {
			return nil, err
		}
	}
	return dst, nil
}

// Close removes the file, if there is one.
func (v *Vectors) Close() error {
	if v == nil || v.file == nil {
		return nil
	}
	err := v.file.Close()
	if !v.nameless {
		if removed := os.Remove(v.file.Name()); err == nil {
			err = removed
		}
	}
	v.file = nil
	return err
}

// Compare is the L1 distance of all pairs of rows of an embedding, whatever its
// scales. Cost: O(rows² width).
func Compare(ctx context.Context, names []string, e *dual.Embedding, opt Options) (*Matrix, error) {
	m := newMatrix(names, false, false)
	return m, m.addColumns(ctx, e.Vectors, e.Width, opt, opt.stage("estimate"))
}

// compare sets every pair of m to the L1 distance of its vectors.
func (m *Matrix) compare(ctx context.Context, v *Vectors, opt Options) error {
	if !v.OnDisk {
		return m.addColumns(ctx, v.memory, v.Width, opt, opt.stage("estimate"))
	}
	report := opt.stage("estimate")
	var held []float32
	for begin := 0; begin < v.Width; begin += v.block {
		width := min(v.Width, begin+v.block) - begin
		held = grown(held, v.Rows*width)
		if err := v.read(held, begin, 0, v.Rows); err != nil {
			return err
		}
		progress := func(done, total int) {
			report(int((float64(begin)+float64(width)*float64(done)/float64(total))/float64(v.Width)*float64(total)), total)
		}
		if err := m.addColumns(ctx, held, width, opt, progress); err != nil {
			return err
		}
	}
	return nil
}

// addColumns adds to every pair the L1 distance of some columns of its vectors,
// row-major.
func (m *Matrix) addColumns(ctx context.Context, columns []float32, width int, opt Options, progress func(done, total int)) error {
	e := &dual.Embedding{Width: width, Rows: len(m.Names), Vectors: columns}
	return tiles(ctx, opt.threads(), len(m.Names), progress, func(i0, i1, j0, j1 int) {
		square := make([]float64, (i1-i0)*(j1-j0))
		each := func(do func(at, index int)) {
			for i := i0; i < i1; i++ {
				for j := max(j0, i+1); j < j1; j++ {
					do((i-i0)*(j1-j0)+j-j0, m.Index(i, j))
				}
			}
		}
		each(func(at, index int) { square[at] = m.Value[index] })
		e.AddDistances(square, i0, i1, j0, j1)
		each(func(at, index int) { m.Value[index] = square[at] })
	})
}

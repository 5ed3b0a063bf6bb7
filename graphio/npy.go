package graphio

import (
	"bufio"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"strings"

	"codeberg.org/sbinet/npyio/npy"
)

// readNPY reads a NumPy array of two dimensions (the .npy format, NumPy
// enhancement proposal 1): floats, or whole numbers with or without sign.
//
// The library reads the header; values are decoded here as they stream in, as
// a header may declare any size.
func (r *sampleReader) readNPY(in *input) ([]Sample, error) {
	fail := func(found, want string) ([]Sample, error) {
		return nil, oneFault(Fault{File: in.path, Found: found, Want: want})
	}
	head, _ := in.peek(12)
	if headerSize(head) > 1<<16 {
		return fail("a header of more than 64 KiB", "a NumPy file of one plain array")
	}
	file, err := readNPYHeader(in)
	if err != nil {
		return fail(fmt.Sprintf("a damaged NumPy header (%v)", err), "a file written by NumPy's save")
	}
	shape := file.Header.Descr.Shape
	if len(shape) != 2 || shape[0] < 0 || shape[1] < 0 {
		return fail(fmt.Sprintf("an array of shape %v", shape), "two dimensions, nodes × samples or samples × nodes")
	}
	kind := strings.Trim(file.Header.Descr.Type, `'"`)
	size, decode := npyDecoder(kind)
	if decode == nil {
		return fail(fmt.Sprintf("values of type %q", kind), "floats (f4, f8) or whole numbers (i1 to i8, u1 to u8)")
	}
	a, err := r.readAxes(in.path, int64(shape[0]), int64(shape[1]))
	if err != nil {
		return nil, err
	}
	outer, inner := int64(shape[0]), int64(shape[1])
	if file.Header.Descr.Fortran {
		outer, inner = inner, outer
	}
	buffered := bufio.NewReaderSize(in, 1<<16)
	raw := make([]byte, size)
	for o := range outer {
		for k := range inner {
			i, j := o, k
			if file.Header.Descr.Fortran {
				i, j = k, o
			}
			if _, err := io.ReadFull(buffered, raw); err == io.EOF || err == io.ErrUnexpectedEOF && in.packed == "" {
				return fail("the end of the data", fmt.Sprintf("a value %s of %d × %d", a.place(i, j), shape[0], shape[1]))
			} else if err != nil {
				return nil, in.readFault(err, 0)
			}
			x := decode(raw)
			v, found, want := r.mass(x, aNumber)
			if found != "" {
				r.faults.Add(Fault{File: in.path, Found: fmt.Sprintf("%s %v %s", found, x, a.place(i, j)), Want: want})
			} else if v != 0 {
				r.addAt(a, i, j, v)
			}
		}
	}
	if _, err := buffered.ReadByte(); err != nil && err != io.EOF {
		return nil, in.readFault(err, 0)
	} else if err == nil {
		r.faults.Add(Fault{File: in.path, Found: "more data than the header says", Want: fmt.Sprintf("%d × %d values", shape[0], shape[1])})
	}
	if err := r.faults.Err(); err != nil {
		return nil, err
	}
	return r.collect(a.samples, nil), nil // every place is read once
}

// readNPYHeader turns panics of the library on damaged headers into errors.
func readNPYHeader(in io.Reader) (file *npy.Reader, err error) {
	defer func() {
		if p := recover(); p != nil {
			err = fmt.Errorf("%v", p)
		}
	}()
	return npy.NewReader(in)
}

// headerSize is the declared length of a header, as version 1 and later state
// it.
func headerSize(head []byte) int64 {
	switch {
	case len(head) < 12:
		return 0
	case head[6] == 1:
		return int64(binary.LittleEndian.Uint16(head[8:]))
	}
	return int64(binary.LittleEndian.Uint32(head[8:]))
}

// npyDecoder is the size of a value of a NumPy type and how to read it, nil for
// types that are no masses.
func npyDecoder(kind string) (size int, decode func([]byte) float64) {
	if len(kind) < 2 {
		return 0, nil
	}
	var order binary.ByteOrder = binary.LittleEndian
	switch kind[0] {
	case '>':
		order = binary.BigEndian
		kind = kind[1:]
	case '<', '|', '=':
		kind = kind[1:]
	}
	switch kind {
	case "f8":
		return 8, func(b []byte) float64 { return math.Float64frombits(order.Uint64(b)) }
	case "f4":
		return 4, func(b []byte) float64 { return float64(math.Float32frombits(order.Uint32(b))) }
	case "i8":
		return 8, func(b []byte) float64 { return float64(int64(order.Uint64(b))) }
	case "i4":
		return 4, func(b []byte) float64 { return float64(int32(order.Uint32(b))) }
	case "i2":
		return 2, func(b []byte) float64 { return float64(int16(order.Uint16(b))) }
	case "i1":
		return 1, func(b []byte) float64 { return float64(int8(b[0])) }
	case "u8":
		return 8, func(b []byte) float64 { return float64(order.Uint64(b)) }
	case "u4":
		return 4, func(b []byte) float64 { return float64(order.Uint32(b)) }
	case "u2":
		return 2, func(b []byte) float64 { return float64(order.Uint16(b)) }
	case "u1":
		return 1, func(b []byte) float64 { return float64(b[0]) }
	}
	return 0, nil
}
